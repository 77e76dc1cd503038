"""The loop: march, record, stop. Numerical trouble inside a step becomes an exception here."""

from __future__ import annotations

import math
from collections import deque
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from ibsolver.case.encode import differences, physics_hash
from ibsolver.case.estimate import memory_bytes
from ibsolver.case.model import Case
from ibsolver.errors import CaseError, DivergedError, Fault, IbsolverError, InterruptedRun, StorageError
from ibsolver.flow.advance import Problem, StepReport, advance
from ibsolver.flow.state import FlowState
from ibsolver.kernels import _jit
from ibsolver.run.assemble import assemble, restored_state, start_state
from ibsolver.run.directory import create_directory, decoded, edited_case, write_case
from ibsolver.run.forecast import forecast
from ibsolver.run.progress import Clock, Progress
from ibsolver.run.record import RESERVE_BYTES, Recorder
from ibsolver.run.stopping import StopRequest
from ibsolver.runfile import layout
from ibsolver.runfile.atomic import free_bytes, free_memory, read_json
from ibsolver.runfile.checkpoint import has_checkpoint, read_latest
from ibsolver.runfile.lock import WriterLock

LAST_ROWS = 20  # step records kept in the log when a run diverges


@dataclass(frozen=True)
class RunResult:
    """How a run ended.

    Parameters
    ----------
    directory : Path
    state : str
        "finished"; anything else is raised as an error.
    steps : int
    travel : float
        Chords.
    seconds : float
        Wall time of the march (s).
    ns_per_cell_step : float
    solves_per_step : float
        Poisson solves a step, mean.
    """

    directory: Path
    state: str
    steps: int
    travel: float
    seconds: float
    ns_per_cell_step: float
    solves_per_step: float


Watcher = Callable[[Progress], None]


def run_case(
    case: Case,
    out: Path | str,
    *,
    threads: int | None = None,
    progress: Watcher | None = None,
    overwrite: bool = False,
    case_text: str | None = None,
) -> RunResult:
    """March a case from its start to the end of its travel and write a run directory.

    Parameters
    ----------
    case : Case
    out : path
        Run directory; must not exist, or be empty, unless `overwrite`.
    threads : int, optional
        Threads of the kernels; by default all cores of this process, or one for a small grid.
    progress : callable, optional
        Receives a `Progress` after every step.
    overwrite : bool
        Whether an earlier run in `out` may be replaced.
    case_text : str, optional
        The case file as the user wrote it, to be kept in the run directory.

    Raises
    ------
    IbsolverError
        With the exit status of the contract: invalid case 3, divergence 4, storage 5, interruption 7.
    """
    directory = Path(out)
    with _jit.one_blas_thread():
        _set_threads(threads)
        _require_memory(case)
        problem = assemble(case)
        used = _set_threads(threads or _jit.sensible_threads(problem.grid.cells))
        _require_space(case, problem, directory)
        create_directory(case, directory, case_text if case_text is not None else case.text, overwrite)
        with WriterLock(directory) as lock:
            state = start_state(case, problem)
            recorder = Recorder(case, problem, directory, lock)
            recorder.log.write("started", threads=used, cells=problem.grid.cells, plan=problem.poisson.plan)
            recorder.start_frame(state)
            return _march(case, problem, state, recorder, used, progress)


def resume_case(
    out: Path | str,
    *,
    threads: int | None = None,
    progress: Watcher | None = None,
    case: Case | None = None,
) -> RunResult:
    """Go on with a run from its last checkpoint, to the same bits as an uninterrupted run.

    Parameters
    ----------
    out : path
        Run directory.
    case : Case, optional
        The case with a longer travel or other output settings. By default the ``case.toml`` in the directory, which may
        have been edited likewise.

    Raises
    ------
    IbsolverError
        If nothing can be resumed, or the case differs in anything else (the message says in what).
    """
    directory = Path(out)
    resolved = read_json(directory / layout.RESOLVED)
    stored = decoded(resolved, directory)
    wanted = case or edited_case(directory, resolved) or stored
    _require_same_physics(stored, wanted, directory)
    checkpoint = read_latest(directory, physics_hash(stored)) if has_checkpoint(directory) else None
    with _jit.one_blas_thread(), WriterLock(directory) as lock:
        _set_threads(threads)
        _require_memory(wanted)
        problem = assemble(wanted)
        used = _set_threads(threads or _jit.sensible_threads(problem.grid.cells))
        if wanted != stored:
            write_case(directory, wanted, (directory / layout.CASE).read_text() if case is None else case.text)
        if checkpoint is None:
            state, facts = start_state(wanted, problem), {"checkpoint": "none yet: begun anew"}
        else:
            state = restored_state(problem, checkpoint.arrays, checkpoint.numbers["state"])
            facts = {"checkpoint": checkpoint.file, "skipped": list(checkpoint.skipped)}
        recorder = Recorder(wanted, problem, directory, lock, checkpoint)
        recorder.log.write("resumed", step=state.step, **facts)
        if checkpoint is None:
            recorder.start_frame(state)
        return _march(wanted, problem, state, recorder, used, progress)


def _require_same_physics(stored: Case, wanted: Case, directory: Path) -> None:
    if physics_hash(stored) == physics_hash(wanted) and wanted.run.travel >= stored.run.travel:
        return
    facts = "; ".join(differences(stored, wanted))
    problem = f"the case differs from the one that {directory} was begun with: {facts}."
    raise CaseError(
        [Fault("case", 0, "", "", problem, "Only a longer travel and [output] may change; start a new run.")]
    )


def _set_threads(threads: int | None) -> int:
    try:
        return _jit.set_threads(threads)
    except ValueError as error:
        raise CaseError([Fault("--threads", 0, "", str(threads), str(error))]) from None


def _require_space(case: Case, problem: Problem, directory: Path) -> None:
    """Refuse a run that will not fit on the disk.

    Raises
    ------
    StorageError
        With the bytes needed and free.
    """
    needed = forecast(case, 0, problem).disk_bytes
    free = free_bytes(directory)
    if needed + RESERVE_BYTES > free:
        raise StorageError(
            f"{directory}: the run needs about {needed / 1e9:.2f} GB and {free / 1e9:.2f} GB are free "
            f"({RESERVE_BYTES / 1e9:.2f} GB are kept in reserve). Make space, write elsewhere with --out, or write fewer "
            f"frames (output.frame_every is {case.output.frame_every:g} chords)."
        )


def _require_memory(case: Case) -> None:
    """Refuse a run that will not fit into the memory that is free now.

    Raises
    ------
    StorageError
        With the bytes needed and free.
    """
    needed, free = memory_bytes(case), free_memory()
    if free is not None and needed > free:
        raise StorageError(
            f"The run needs about {needed / 1e9:.2f} GB of memory and {free / 1e9:.2f} GB are free. Close other programs, "
            f"or lower grid.cells_per_chord ({case.grid.cells_per_chord:g})."
        )


def _march(
    case: Case, problem: Problem, state: FlowState, recorder: Recorder, threads: int, watch: Watcher | None
) -> RunResult:
    """March to the end of the travel; leave status, manifest and files whole whatever happens."""
    clock = Clock(problem.time_end)
    first_step, solves = state.step, 0
    last: deque[dict[str, float]] = deque(maxlen=LAST_ROWS)
    name, facts = "failed", {}
    try:
        with StopRequest() as stop:
            while state.travel < case.run.travel:
                report = _one_step(state, problem, recorder, last)
                solves += report.repeats
                left = clock.seconds_left(state.time)
                if watch is not None:
                    watch(_progress(case, state, report, left))
                if recorder.status_due():
                    recorder.status("running", state, {"seconds_left": left})
                if stop:
                    recorder.checkpoint(state)
                    raise InterruptedRun(
                        f"{stop.received}: stopped at {state.travel:.3f} of {case.run.travel:g} chords, checkpoint "
                        f"written. Go on with `ibsolver resume {recorder.directory}`."
                    )
                if recorder.checkpoint_due():
                    recorder.checkpoint(state)
            _finish(recorder, state)
        name = "finished"
    except IbsolverError as error:
        name, facts = _state_name(error), {"message": str(error)}
        raise
    finally:
        steps = state.step - first_step
        ns = clock.elapsed / max(steps, 1) / problem.grid.cells * 1e9
        cost = {"wall_seconds": clock.elapsed, "ns_per_cell_step": ns, "solves_per_step": solves / max(steps, 1)}
        _close(recorder, problem, state, threads, name, facts, cost)
    return RunResult(recorder.directory, name, state.step, state.travel, clock.elapsed, ns, solves / max(steps, 1))


def _one_step(state: FlowState, problem: Problem, recorder: Recorder, last: deque[dict[str, float]]) -> StepReport:
    """Advance and record one step.

    Raises
    ------
    DivergedError
        With the advice which knob to turn, and why.
    """
    dt = problem.rule.next_step(state.rate, state.dt)
    report = advance(state, problem, dt)
    row = recorder.sampler.row(state, report)
    last.append(row)
    if report.trouble:
        recorder.history.flush()
        recorder.log.write("diverged", trouble=report.trouble, last_steps=list(last))
        raise DivergedError(
            f"{report.trouble} Step {state.step}, travel {state.travel:.3f} chords. Lower run.courant "
            f"({problem.rule.courant:g}): the velocity at a plate's edge outgrew the step; or raise grid.cells_per_chord "
            f"if the cells are too coarse for Re = {problem.reynolds:g}. The last good frame and the last "
            f"{len(last)} step records (log.jsonl) are kept."
        )
    recorder.step(state, row, report.felt)
    return report


def _finish(recorder: Recorder, state: FlowState) -> None:
    """Write the last frame and a checkpoint from which a longer travel can go on."""
    recorder.checkpoint(state)
    recorder.last_frame(state)


def _progress(case: Case, state: FlowState, report: StepReport, left: float) -> Progress:
    return Progress(
        step=state.step,
        time=state.time,
        travel=state.travel,
        travel_end=case.run.travel,
        lift=2.0 * report.loads.lift,
        drag=2.0 * report.loads.drag,
        courant=report.courant,
        slip=report.slip,
        seconds_left=left,
    )


def _state_name(error: IbsolverError) -> str:
    if isinstance(error, InterruptedRun):
        return "interrupted"
    if isinstance(error, DivergedError):
        return "diverged"
    return "storage full" if isinstance(error, StorageError) else "failed"


def _close(
    recorder: Recorder,
    problem: Problem,
    state: FlowState,
    threads: int,
    name: str,
    facts: dict[str, Any],
    cost: dict[str, float],
) -> None:
    """Write the last words of a run, each by itself: on a full disk the shorter ones may still find room."""
    left = 0.0 if name == "finished" else math.nan
    machine = {
        "threads": threads,
        "threading_layer": _jit.threading_layer(),
        "state": name,
        "steps": state.step,
        "cells": problem.grid.cells,
        "nx": problem.grid.nx,
        "ny": problem.grid.ny,
        "points": problem.rig.size,
        "poisson": problem.poisson.plan,
        "explicit_diffusion": problem.rule.explicit,
    }
    last_words: tuple[Callable[[], None], ...] = (
        lambda: recorder.status(name, state, {"seconds_left": left, **facts}),
        lambda: recorder.history.flush(sync=True),
        lambda: recorder.manifest(**machine, **cost),
        lambda: recorder.log.write(name, step=state.step, travel=state.travel, **facts),
    )
    trouble: StorageError | None = None
    for say in last_words:
        try:
            say()
        except StorageError as error:
            trouble = trouble or error
    if trouble is not None and name != "storage full":
        raise trouble
