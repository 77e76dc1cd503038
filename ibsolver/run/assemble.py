"""The only place that knows both sides: from a frozen Case to a Problem and its start state."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from ibsolver.body.build import build_rig, mass_rig
from ibsolver.body.regularisation import AT_REST, MOVING
from ibsolver.body.rig import Rig
from ibsolver.case.model import Case
from ibsolver.case.placement import reach
from ibsolver.errors import StorageError
from ibsolver.flow.advance import Problem, prepare, scratch_arrays
from ibsolver.flow.balance import ControlVolume
from ibsolver.flow.boundary import BoundaryConditions
from ibsolver.flow.coupling import Coupling
from ibsolver.flow.poisson import PoissonSolver
from ibsolver.flow.state import FlowState, empty_state
from ibsolver.flow.timestep import StepRule, choose_explicit
from ibsolver.flow.viscous import ImplicitDiffusion
from ibsolver.motion.tow import tow_law
from ibsolver.run.domain import build_grid, side_conditions
from ibsolver.run.mechanics import gravity_of, longest_for_springs, mechanics_of, require_resolvable_springs
from ibsolver.run.motions import anything_moves, motions_of


def assemble(case: Case, rig: Rig | None = None) -> Problem:
    """Return everything about a run that does not change while it marches.

    Parameters
    ----------
    case : Case
    rig : Rig, optional
        Bodies in place of those of the case, for experiments that no case file describes.

    Raises
    ------
    IbsolverError
        With exit status 3 where bodies and grid do not fit.
    """
    spacing = 1.0 / case.grid.cells_per_chord
    rule = MOVING if anything_moves(case) else AT_REST
    rig = build_rig(case, spacing, rule) if rig is None else rig
    motions = motions_of(case, rig)
    placement = rig.place(motions.configuration(0.0))
    grid = build_grid(case, reach(case) if rig.links else None)
    sides = BoundaryConditions(grid, **side_conditions(case))
    poisson = PoissonSolver(grid)
    reynolds, courant = case.tow.reynolds, case.run.courant
    explicit = choose_explicit(grid.spacing, reynolds, courant, grid.periodic_x or grid.periodic_y)
    coupling = Coupling(grid, sides, poisson, rig.size, rule.kernel)
    tow = tow_law(case.tow, case.run.travel)
    mechanics = mechanics_of(case, rig)
    bare = mass_rig(rig)
    steps = StepRule(
        courant, grid.spacing, reynolds, explicit, case.run.fixed_step, longest_for_springs(mechanics, rig)
    )
    require_resolvable_springs(steps, mechanics, rig)
    problem = Problem(
        grid=grid,
        sides=sides,
        poisson=poisson,
        rig=rig,
        coupling=coupling,
        rule=steps,
        reynolds=reynolds,
        tow_speed=tow.speed,
        tow_distance=tow.distance,
        time_end=tow.time_of(case.run.travel),
        configuration=motions.configuration,
        slip_tolerance=case.run.slip_tolerance,
        repeats=case.run.repeats,
        placement=placement,
        moving_points=motions.moving_points(rig),
        mechanics=mechanics,
        mass_rig=bare,
        masses=_spread_over(bare, [flap.mass for flap in mechanics]),
        buoyant_masses=_spread_over(bare, [flap.buoyant_mass for flap in mechanics]),
        gravity=gravity_of(case),
        volume=ControlVolume(grid, 1.0 / reynolds) if rig.links else None,
        implicit=None if explicit else ImplicitDiffusion(sides, 1.0 / reynolds),
    )
    if rig.size:
        coupling.locate(placement.points)
        if problem.moving_points is None:
            coupling.build_from_lattice()
        else:
            coupling.build_exact()
        coupling.factorise(rig.weights(placement, grid.spacing), problem.moving_points)
    return problem


def _spread_over(bare: Rig, per_length: list[float]) -> np.ndarray:
    """Return a quantity per length of each flap as shares of its mass points."""
    values = np.array([0.0, *per_length])
    return values[bare.link_of_point] * bare.ds if bare.size else np.zeros(0)


def start_state(case: Case, problem: Problem) -> FlowState:
    """Return the state a run starts from, prepared for the first step."""
    state = empty_state(problem.grid, problem.rig.size, len(problem.mechanics), problem.mass_rig.size)
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
    state = empty_state(problem.grid, problem.rig.size, len(problem.mechanics), problem.mass_rig.size)
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
