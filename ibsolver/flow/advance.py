"""One time step: predict, force, project, repeat while the bodies slip, then take stock."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from ibsolver.body.rig import Configuration, Placement, Rig
from ibsolver.flow.balance import ControlVolume
from ibsolver.flow.boundary import BoundaryConditions
from ibsolver.flow.coupling import Coupling
from ibsolver.flow.hinge import Mechanics
from ibsolver.flow.loads import Acceleration, Loads, inertia_of_held_fluid, loads_of
from ibsolver.flow.moving import FlapReport, Movement, begin_step, end_step, start_motion
from ibsolver.flow.poisson import PoissonSolver
from ibsolver.flow.state import FlowState
from ibsolver.flow.timestep import RUNAWAY, StepRule
from ibsolver.flow.viscous import ImplicitDiffusion
from ibsolver.grid.staggered import StaggeredGrid
from ibsolver.kernels import momentum

FIRST_STEP_REPEATS = 12  # an impulsive start asks for a whole force at once


@dataclass(eq=False)
class Problem:
    """Everything about a run that does not change while it marches.

    Attributes
    ----------
    tow_speed : callable
        Tow speed at a time.
    tow_distance : callable
        Distance towed at a time.
    time_end : float
        Time at which the travel of the run is covered.
    configuration : callable
        Configuration of the rig at a time; openings of free flaps are their start values.
    moving_points : ndarray of int or None
        Lagrangian points that move on the grid; None where all of them do. Empty where nothing moves.
    mechanics : tuple of Mechanics
        Of all flaps.
    mass_rig : Rig
        The rig with mass points in place of Lagrangian ones.
    masses, buoyant_masses : ndarray, shape (nm,)
        Of the mass points (rho c^2).
    gravity : ndarray, shape (2,)
        Gravity in the plane of the flow (U^2/c).
    """

    grid: StaggeredGrid
    sides: BoundaryConditions
    poisson: PoissonSolver
    rig: Rig
    coupling: Coupling
    rule: StepRule
    reynolds: float
    tow_speed: Callable[[float], float]
    tow_distance: Callable[[float], float]
    time_end: float
    configuration: Callable[[float], Configuration]
    slip_tolerance: float
    repeats: int
    placement: Placement
    moving_points: np.ndarray | None
    mechanics: tuple[Mechanics, ...]
    mass_rig: Rig
    masses: np.ndarray
    buoyant_masses: np.ndarray
    gravity: np.ndarray
    volume: ControlVolume | None = None
    implicit: ImplicitDiffusion | None = None
    scratch: dict[str, np.ndarray] = field(default_factory=dict)

    @property
    def moving(self) -> bool:
        """Whether any point moves on the grid."""
        return self.moving_points is None or self.moving_points.size > 0

    @property
    def shapes(self) -> dict[str, np.ndarray]:
        """Outlines of all bodies as they lie now, by name, each of shape (k, 2)."""
        return self.rig.shapes(self.placement)

    @property
    def points(self) -> np.ndarray:
        """Lagrangian points as they lie now, shape (n, 2)."""
        return self.placement.points

    @property
    def core(self) -> tuple[float, float, float, float]:
        """Uniform part of the grid (x low, x high, y low, y high)."""
        return self.grid.core


@dataclass(frozen=True)
class StepReport:
    """What one step did; `trouble` is empty, or a sentence that says why the march must stop."""

    dt: float
    courant: float
    slip: float
    divergence: float
    repeats: int
    loads: Loads
    momentum_drag: float
    momentum_lift: float
    felt: Acceleration = Acceleration(0.0)
    flaps: tuple[FlapReport, ...] = ()
    trouble: str = ""


def prepare(state: FlowState, problem: Problem) -> None:
    """Fill the ghosts and the stock-taking of a start field, so that `advance` may begin."""
    problem.sides.fill(state.u, state.v, problem.tow_speed(state.time))
    start_motion(state, problem)
    state.rate = max(take_stock(state, problem)[0], _point_rate(state, problem))
    if problem.volume is not None:
        state.momentum[...] = problem.volume.snapshot(state.u, state.v)


def advance(state: FlowState, problem: Problem, dt: float) -> StepReport:
    """March the state by one step, in place.

    Parameters
    ----------
    state : FlowState
        Prepared by `prepare` or an earlier step. Modified in place.
    problem : Problem
    dt : float
        Step length, > 0.
    """
    speeds = (problem.tow_speed(state.time), problem.tow_speed(state.time + dt))
    acceleration = (speeds[1] - speeds[0]) / dt
    movement = begin_step(state, problem, dt) if problem.moving else None
    u_star, v_star = _predict(state, problem, dt, speeds)
    slip, repeats = _force_and_project(state, problem, dt, (u_star, v_star), movement)
    _exchange(state, problem, u_star, v_star)
    problem.sides.fill(state.u, state.v, speeds[1])
    rate, divergence, total = take_stock(state, problem)
    felt = _accelerations(state, movement, dt, acceleration)
    momentum_force = _balance(state, problem, dt, felt)
    loads = loads_of(problem.rig, problem.placement, state.force, felt)
    flaps: tuple[FlapReport, ...] = ()
    if movement is not None:
        flaps = end_step(state, problem, movement, loads.hinge_moments, dt, acceleration)
        rate = max(rate, _point_rate(state, problem))
    state.time += dt
    state.travel = problem.tow_distance(state.time)
    state.dt, state.step, state.rate = dt, state.step + 1, rate
    return StepReport(
        dt=dt,
        courant=rate * dt,
        slip=slip,
        divergence=divergence,
        repeats=repeats,
        loads=loads,
        momentum_drag=-float(momentum_force[0]),
        momentum_lift=-float(momentum_force[1]),
        felt=felt,
        flaps=flaps,
        trouble=_trouble(rate * dt, total, loads),
    )


def _accelerations(state: FlowState, movement: Movement | None, dt: float, frame: float) -> Acceleration:
    """Return the mean accelerations of the step."""
    if movement is None:
        return Acceleration(frame)
    points = (movement.velocity - state.point_velocity) / dt
    return Acceleration(frame, points, (movement.base_motion - state.base_motion) / dt)


def _point_rate(state: FlowState, problem: Problem) -> float:
    """Return the rate at which the fastest point crosses cells: the next step must not outrun a body."""
    speed = np.abs(state.point_velocity).sum(axis=1)
    return float(speed.max(initial=0.0)) / problem.grid.spacing


def _predict(
    state: FlowState, problem: Problem, dt: float, speeds: tuple[float, float]
) -> tuple[np.ndarray, np.ndarray]:
    """Return the predicted velocity, boundary faces set, pushed by the last step's forces (scratch arrays).

    The carried forces enter beside the pressure gradient that they balance, before any implicit diffusion, which
    would otherwise smooth the one and not the other.
    """
    grid, sides = problem.grid, problem.sides
    u_star, v_star = problem.scratch["u"], problem.scratch["v"]
    sides.fill_scalar(state.p)
    explicit = problem.implicit is None
    pull = ((speeds[1] - speeds[0]) / dt, 0.0)
    scheme = momentum.scheme_numbers(1.0 / problem.reynolds, dt, state.dt, explicit, pull)
    momentum.predict(
        state.u,
        state.v,
        state.p,
        grid.x_metrics,
        grid.y_metrics,
        scheme,
        sides.ranges,
        state.tendency_u,
        state.tendency_v,
        u_star,
        v_star,
    )
    sides.set_normal(state.u, u_star, v_star, speeds, dt)
    stencils = problem.coupling.earlier if problem.moving else problem.coupling.stencils
    problem.coupling.spread(state.force, dt, u_star, v_star, stencils)
    if problem.implicit is not None:
        problem.implicit.apply(state.u, state.v, u_star, v_star, speeds, dt)
    return u_star, v_star


def _force_and_project(
    state: FlowState,
    problem: Problem,
    dt: float,
    predicted: tuple[np.ndarray, np.ndarray],
    movement: Movement | None,
) -> tuple[float, int]:
    """Force the bodies' velocity, project, and repeat until they slip less than the tolerance.

    Returns the slip that is left and the number of Poisson solves.
    """
    coupling, (u_star, v_star) = problem.coupling, predicted
    if coupling.count == 0:
        _project(state, problem, dt, u_star, v_star)
        return 0.0, 1
    present = np.empty_like(state.force)
    coupling.interpolate(u_star, v_star, present)
    most = problem.repeats if state.step > 0 else max(problem.repeats, FIRST_STEP_REPEATS)
    repeats = 0
    while True:
        if movement is None:
            change = coupling.force_change(-present, dt, state.force)
        elif repeats == 0:
            coupling.spread(state.force, -dt, u_star, v_star, coupling.earlier)
            change = movement.whole_force(problem, present, state, dt)
            state.force[...] = 0.0
        else:
            change = movement.corrected_force(problem, present, state, dt) - state.force
        coupling.spread(change, dt, u_star, v_star)
        state.force += change
        _project(state, problem, dt, u_star, v_star)
        repeats += 1
        coupling.interpolate(u_star, v_star, present)
        slip = coupling.worst_slip(-present if movement is None else movement.velocity - present)
        if not slip > problem.slip_tolerance or repeats >= most:
            return slip, repeats


def _project(state: FlowState, problem: Problem, dt: float, u: np.ndarray, v: np.ndarray) -> None:
    """Make the velocity divergence-free and add the increment to the pressure. Modified in place."""
    grid, sides = problem.grid, problem.sides
    source, phi = problem.scratch["source"], problem.scratch["phi"]
    if grid.periodic_x:
        u[:, 1] = u[:, -2]
    if grid.periodic_y:
        v[1] = v[-2]
    momentum.divergence(u, v, grid.x_metrics, grid.y_metrics, 1.0 / dt, source)
    problem.poisson.solve(source, phi[1:-1, 1:-1])
    sides.fill_scalar(phi)
    momentum.correct(phi, grid.x_metrics, grid.y_metrics, dt, sides.ranges, u, v, state.p)
    if grid.periodic_x:
        u[:, 1] = u[:, -2]
    if grid.periodic_y:
        v[1] = v[-2]


def _exchange(state: FlowState, problem: Problem, u_star: np.ndarray, v_star: np.ndarray) -> None:
    """Make the new velocity the state's, and the old one the scratch of the next step."""
    problem.scratch["u"], problem.scratch["v"] = state.u, state.v
    state.u, state.v = u_star, v_star


def take_stock(state: FlowState, problem: Problem) -> tuple[float, float, float]:
    """Return largest |u|/dx + |v|/dy, largest |div u|, and the sum of speeds, not finite if any speed is not."""
    rows = problem.scratch["rows"]
    momentum.row_health(state.u, state.v, problem.grid.x_metrics, problem.grid.y_metrics, rows)
    return float(rows[:, 0].max()), float(rows[:, 1].max()), float(rows[:, 2].sum())


def _balance(state: FlowState, problem: Problem, dt: float, felt: Acceleration) -> np.ndarray:
    """Return the force on the fluid outside the bodies by the momentum balance, shape (2,)."""
    if problem.volume is None:
        return np.zeros(2)
    after = problem.volume.snapshot(state.u, state.v)
    force = problem.volume.force_on_fluid(state.momentum, after, state.p, dt, felt.frame)
    state.momentum[...] = after
    return force - inertia_of_held_fluid(problem.rig, felt)


def _trouble(courant: float, total: float, loads: Loads) -> str:
    """Return why the march must stop, or an empty string."""
    if not np.isfinite(total) or not np.isfinite(loads.lift + loads.drag):
        return "A velocity or force is no longer a finite number."
    if courant > RUNAWAY:
        return f"The Courant number of the step was {courant:.2f}, beyond the limit of {RUNAWAY:g}."
    return ""


def scratch_arrays(state: FlowState) -> dict[str, np.ndarray]:
    """Return the working arrays of `advance`, allocated once."""
    ny, nx = state.p.shape[0] - 2, state.p.shape[1] - 2
    return {
        "u": state.u.copy(),
        "v": state.v.copy(),
        "phi": np.zeros_like(state.p),
        "source": np.zeros((ny, nx)),
        "rows": np.zeros((ny, 3)),
    }
