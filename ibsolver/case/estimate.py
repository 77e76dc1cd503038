"""How many cells, steps and bytes a case will take, by formula, before any grid is built."""

from __future__ import annotations

import math
import os

from ibsolver.case.model import Case
from ibsolver.case.placement import core_margin, extent, has_body, reach
from ibsolver.case.scales import duration

DOUBLES_PER_CELL = 40
PEAK_SPEED = 2.5  # greatest speed over the tow speed near a plate's edge at common resolutions; common practice


def cell_counts(case: Case) -> tuple[int, int]:
    """Return (cells along x, cells along y): a uniform core, cells that grow geometrically outside it."""
    x_low, x_high, y_low, y_high = extent(case)
    spacing = 1 / case.grid.cells_per_chord
    if case.grid.uniform or not has_body(case):
        return math.ceil((x_high - x_low) / spacing), math.ceil((y_high - y_low) / spacing)
    left, right, bottom, top = reach(case)
    margin = core_margin(case)
    return (
        _axis_count(x_low, left - margin, right + margin, x_high, case),
        _axis_count(y_low, bottom - margin, top + margin, y_high, case),
    )


def _axis_count(low: float, core_low: float, core_high: float, high: float, case: Case) -> int:
    core_low, core_high = max(low, core_low), min(high, core_high)
    core = math.ceil(max(0.0, core_high - core_low) * case.grid.cells_per_chord)
    return core + growing_count(core_low - low, case) + growing_count(high - core_high, case)


def growing_count(distance: float, case: Case) -> int:
    """Return how many growing cells fill `distance` (chords): h r (r^n - 1)/(r - 1), constant once at the largest."""
    first, ratio = 1 / case.grid.cells_per_chord, case.grid.stretch
    largest = max(case.grid.largest_cell, first)
    if distance <= 0:
        return 0
    if ratio - 1 < 1e-9:
        return math.ceil(distance / first)
    until_largest = math.floor(math.log(largest / first) / math.log(ratio))
    grown = first * ratio * math.expm1(until_largest * math.log(ratio)) / (ratio - 1)
    if grown >= distance:
        return math.ceil(math.log1p(distance * (ratio - 1) / (first * ratio)) / math.log(ratio))
    return until_largest + math.ceil((distance - grown) / largest)


def memory_bytes(case: Case) -> float:
    """Return the memory of a run: fields, and the dense transforms of the stretched directions."""
    nx, ny = cell_counts(case)
    return 8.0 * (DOUBLES_PER_CELL * nx * ny + 2 * nx * nx)


def machine_memory() -> float | None:
    """Return the memory of this machine in bytes, None where the system does not tell."""
    try:
        return float(os.sysconf("SC_PHYS_PAGES") * os.sysconf("SC_PAGE_SIZE"))
    except (AttributeError, ValueError, OSError):
        return None


def step_count(case: Case) -> float:
    """Return about how many time steps the run takes."""
    total = duration(case)
    if case.run.fixed_step is not None:
        return total / case.run.fixed_step
    peak = PEAK_SPEED if has_body(case) else 1.5
    return total * case.grid.cells_per_chord * peak / case.run.courant
