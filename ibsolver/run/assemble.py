"""The only place that knows both sides: from a frozen Case to a Problem and its start state."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from ibsolver.body.build import build_rig
from ibsolver.body.rig import Configuration, Rig
from ibsolver.case.model import Case
from ibsolver.errors import CaseError, Fault, StorageError
from ibsolver.flow.advance import Problem, prepare, scratch_arrays
from ibsolver.flow.balance import ControlVolume
from ibsolver.flow.boundary import BoundaryConditions
from ibsolver.flow.coupling import Coupling
from ibsolver.flow.poisson import PoissonSolver
from ibsolver.flow.state import FlowState, empty_state
from ibsolver.flow.timestep import StepRule, choose_explicit
from ibsolver.flow.viscous import ImplicitDiffusion
from ibsolver.motion.tow import tow_law
from ibsolver.run.domain import build_grid, reach_of, side_conditions


def assemble(case: Case) -> Problem:
    """Return everything about a run that does not change while it marches.

    Raises
    ------
    IbsolverError
        With exit status 3 where bodies and grid do not fit.
    """
    _refuse_what_moves(case)
    spacing = 1.0 / case.grid.cells_per_chord
    rig = build_rig(case, spacing)
    still = _still_configuration(case, rig)
    placement = rig.place(still)
    grid = build_grid(case, reach_of(rig, [rig.shapes(placement)]))
    sides = BoundaryConditions(grid, **side_conditions(case))
    poisson = PoissonSolver(grid)
    reynolds, courant = case.tow.reynolds, case.run.courant
    explicit = choose_explicit(grid.spacing, reynolds, courant, grid.periodic_x or grid.periodic_y)
    coupling = Coupling(grid, sides, poisson, rig.size)
    tow = tow_law(case.tow, case.run.travel)
    problem = Problem(
        grid=grid,
        sides=sides,
        poisson=poisson,
        rig=rig,
        coupling=coupling,
        rule=StepRule(courant, grid.spacing, reynolds, explicit, case.run.fixed_step),
        reynolds=reynolds,
        tow_speed=tow.speed,
        tow_distance=tow.distance,
        time_end=tow.time_of(case.run.travel),
        configuration=lambda time: still,
        moving=False,
        slip_tolerance=case.run.slip_tolerance,
        repeats=case.run.repeats,
        placement=placement,
        volume=ControlVolume(grid, 1.0 / reynolds) if rig.links else None,
        implicit=None if explicit else ImplicitDiffusion(sides, 1.0 / reynolds),
    )
    if rig.size:
        coupling.locate(placement.points)
        coupling.build_exact()
        coupling.factorise(rig.weights(placement, grid.spacing))
    return problem


def _refuse_what_moves(case: Case) -> None:
    """Refuse, with a sentence, motions on the grid, which this version does not march."""
    moving = [f"flap {flap.name!r} is {flap.mount}" for flap in case.flaps if flap.mount != "fixed"]
    if case.incidence_motion is not None or case.heave_motion is not None:
        moving.append("[motion] moves the plate")
    if moving:
        problem = f"{'; '.join(moving)}: this version computes plates and flaps that rest on the carriage."
        raise CaseError([Fault("case", 0, "", "", problem, 'Use mount = "fixed" and leave out [motion].')])


def _still_configuration(case: Case, rig: Rig) -> Configuration:
    """Return the configuration at the start, openings in the order of the rig."""
    incidence = case.plate.incidence if case.plate else case.outline.incidence if case.outline else 0.0
    opening = {flap.name: flap.opening for flap in case.flaps}
    return Configuration(
        incidence=incidence,
        openings=tuple(opening[link.name] for link in rig.flaps),
        opening_rates=(0.0,) * len(rig.flaps),
    )


def start_state(case: Case, problem: Problem) -> FlowState:
    """Return the state a run starts from, prepared for the first step."""
    state = empty_state(problem.grid, problem.rig.size)
    speed = problem.tow_speed(0.0)
    stream = case.initial.stream
    if case.initial.field == "tow":
        state.u[...] = speed
    elif case.initial.field == "taylor green":
        _taylor_green(problem, state)
    state.u += stream[0]
    state.v += stream[1]
    problem.scratch.update(scratch_arrays(state))
    problem.sides.set_normal(state.u, state.u, state.v, (speed, speed), 0.0)
    problem.scratch.update(scratch_arrays(state))
    prepare(state, problem)
    return state


def restored_state(problem: Problem, arrays: Mapping[str, np.ndarray], numbers: Mapping[str, float | int]) -> FlowState:
    """Return the state of a checkpoint, ready to go on.

    Raises
    ------
    StorageError
        If its arrays do not fit the grid.
    """
    state = empty_state(problem.grid, problem.rig.size)
    for name, array in state.arrays().items():
        if name not in arrays or arrays[name].shape != array.shape or arrays[name].dtype != array.dtype:
            raise StorageError(f"The checkpoint's {name} does not fit this case; it was written for another grid.")
        array[...] = arrays[name]
    for name in state.numbers():
        setattr(state, name, numbers[name])
    problem.scratch.update(scratch_arrays(state))
    return state


def _taylor_green(problem: Problem, state: FlowState) -> None:
    """Write the vortex array u = sin 2 pi x cos 2 pi y, v = -cos 2 pi x sin 2 pi y (Taylor & Green 1937)."""
    grid = problem.grid
    k = 2.0 * np.pi
    x_faces, y_faces, x, y = grid.x_faces, grid.y_faces, grid.x_centres, grid.y_centres
    state.u[1:-1, 1:-1] = np.outer(np.cos(k * y), np.sin(k * x_faces))
    state.v[1:-1, 1:-1] = -np.outer(np.sin(k * y_faces), np.cos(k * x))
    state.p[1:-1, 1:-1] = 0.25 * (np.cos(2 * k * x)[None, :] + np.cos(2 * k * y)[:, None])
