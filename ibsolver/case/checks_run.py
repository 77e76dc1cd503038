"""Checks of grid, run and output: do they fit into memory, time and the run itself?"""

from __future__ import annotations

from collections.abc import Iterator

from ibsolver.case.estimate import cell_counts, machine_memory, memory_bytes, step_count
from ibsolver.case.model import Case
from ibsolver.case.problem import Problem
from ibsolver.case.scales import tow_speed

MOST_CELLS = 50_000_000
MOST_STEPS = 20_000_000
MOST_FRAMES = 100_000
MOST_MEMORY = 0.75  # of the machine's


def check_output(case: Case) -> Iterator[Problem]:
    """Yield frames that never come, or too many of them."""
    if case.output.frame_every > case.run.travel:
        problem = f"is longer than the whole run (run.travel = {case.run.travel:g} chords)."
        yield Problem(("output", "frame_every"), problem, f"Choose at most {case.run.travel:g}, for example 0.1.")
    elif case.run.travel / case.output.frame_every > MOST_FRAMES:
        least = case.run.travel / MOST_FRAMES
        problem = f"makes {case.run.travel / case.output.frame_every:.3g} frames; at most {MOST_FRAMES} are written."
        yield Problem(("output", "frame_every"), problem, f"Choose at least {least:.3g}.")


def check_grid(case: Case) -> Iterator[Problem]:
    """Yield grids that are empty or do not fit into memory."""
    spacing = 1 / case.grid.cells_per_chord
    if case.grid.largest_cell < spacing:
        problem = f"is smaller than the cells of the core, {spacing:.4g} chords."
        yield Problem(("grid", "largest_cell"), problem, "Choose a larger one, such as 0.5.")
        return
    nx, ny = cell_counts(case)
    least = 8
    if min(nx, ny) < least:
        problem = f"makes a grid of {nx} x {ny} cells; at least {least} each way are needed."
        yield Problem(("grid", "cells_per_chord"), problem, "Raise it, or enlarge the domain.")
    machine = machine_memory()
    needed = memory_bytes(case)
    if nx * ny > MOST_CELLS:
        count, most = nx * ny / 1e6, MOST_CELLS / 1e6
        problem = f"makes about {nx} x {ny} = {count:.3g} million cells; at most {most:g} million are taken."
        yield Problem(("grid", "cells_per_chord"), problem, _fewer_cells(case))
    elif machine is not None and needed > MOST_MEMORY * machine:
        problem = (
            f"makes about {nx} x {ny} cells, which take {needed / 1e9:.3g} GB of memory; "
            f"this machine has {machine / 1e9:.3g} GB, of which three quarters may be used."
        )
        yield Problem(("grid", "cells_per_chord"), problem, _fewer_cells(case))


def _fewer_cells(case: Case) -> str:
    if case.grid.uniform:
        return "Lower cells_per_chord, shorten the domain, or leave out uniform."
    return f"Lower cells_per_chord, shorten the domain, or raise grid.stretch (now {case.grid.stretch:g})."


def check_steps(case: Case) -> Iterator[Problem]:
    """Yield runs of absurd length."""
    if case.tow.profile:
        end = case.tow.profile[-1][0]
        if tow_speed(case, end) <= 0:
            problem = "ends at rest or backwards; the run could never reach its travel."
            yield Problem(("tow", "profile"), problem, "Export the record up to the end of the steady tow.")
            return
    steps = step_count(case)
    if steps > MOST_STEPS:
        problem = f"takes about {steps:.3g} time steps; at most {MOST_STEPS:.3g} are taken."
        yield Problem(("run", "travel"), problem, "Shorten the travel, or lower grid.cells_per_chord.")
    step = case.run.fixed_step
    if step is not None and step * case.grid.cells_per_chord > 0.7:
        problem = "is longer than 0.7 cells of the core a step: unstable whatever the flow."
        yield Problem(("run", "fixed_step"), problem, f"Choose less than {0.7 / case.grid.cells_per_chord:.3g}.")
