"""What a run will cost, from a few timed steps on this machine."""

from __future__ import annotations

import statistics
import time
from dataclasses import dataclass

from ibsolver.case.model import Case
from ibsolver.flow.advance import Problem, advance
from ibsolver.flow.timestep import EDGE_SPEED
from ibsolver.kernels._jit import one_blas_thread, sensible_threads, set_threads
from ibsolver.run.assemble import assemble, start_state

DOUBLES_PER_CELL = 20
FRAME_BYTES_PER_CELL = 13.0  # four float32 fields after compression, about
HISTORY_BYTES_PER_STEP = 330.0


@dataclass(frozen=True)
class Forecast:
    """Size and cost of a run.

    Parameters
    ----------
    nx, ny, cells, points : int
    steps : int
        Estimated number of time steps.
    seconds : float
        Estimated wall time (s); nan without timed steps.
    memory_bytes, disk_bytes : float
    ns_per_cell_step : float
        Median of the timed steps; nan without.
    duration : float
        Convective times from start to end.
    plan : str
        How the Poisson equation is solved.
    explicit_diffusion : bool
    setup_seconds : float
        Wall time of the assembly.
    """

    nx: int
    ny: int
    cells: int
    points: int
    steps: int
    seconds: float
    memory_bytes: float
    disk_bytes: float
    ns_per_cell_step: float
    duration: float
    plan: str
    explicit_diffusion: bool
    setup_seconds: float


def forecast(case: Case, timed_steps: int = 20, problem: Problem | None = None) -> Forecast:
    """Return the forecast of a case.

    Parameters
    ----------
    case : Case
    timed_steps : int
        Steps to time; 0 for none.
    problem : Problem, optional
        The assembled case, if at hand.
    """
    with one_blas_thread():
        begin = time.perf_counter()
        problem = problem or assemble(case)
        setup = time.perf_counter() - begin
        step_seconds = float("nan")
        if timed_steps > 0:
            set_threads(sensible_threads(problem.grid.cells))
            step_seconds = _time_steps(case, problem, timed_steps)
    duration = problem.time_end
    steps = _estimate_steps(problem, duration)
    cells = problem.grid.cells
    frames = case.run.travel / case.output.frame_every + 2
    return Forecast(
        nx=problem.grid.nx,
        ny=problem.grid.ny,
        cells=cells,
        points=problem.rig.size,
        steps=steps,
        seconds=setup + steps * step_seconds,
        memory_bytes=8.0 * (DOUBLES_PER_CELL * cells + 3 * (2 * problem.rig.size) ** 2) + 2.5e8,
        disk_bytes=frames * (FRAME_BYTES_PER_CELL * cells + 2e4) + steps * HISTORY_BYTES_PER_STEP + 2 * 48.0 * cells,
        ns_per_cell_step=step_seconds / cells * 1e9,
        duration=float(duration),
        plan=problem.poisson.plan,
        explicit_diffusion=problem.rule.explicit,
        setup_seconds=setup,
    )


def _time_steps(case: Case, problem: Problem, count: int) -> float:
    """Return the median wall time of a step (s), after a few to warm up."""
    state = start_state(case, problem)
    durations = []
    for k in range(count + 3):
        begin = time.perf_counter()
        advance(state, problem, problem.rule.next_step(state.rate, state.dt))
        if k >= 3:
            durations.append(time.perf_counter() - begin)
    return statistics.median(durations)


def _estimate_steps(problem: Problem, duration: float) -> int:
    """Return the likely number of steps: the edge of a plate sees a few times the tow speed."""
    rule = problem.rule
    if rule.fixed is not None:
        return max(1, round(duration / rule.fixed))
    likely = min(rule.longest(), rule.courant * problem.grid.spacing / EDGE_SPEED)
    return max(1, round(duration / likely))
