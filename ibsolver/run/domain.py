"""Grid and side conditions of a case."""

from __future__ import annotations

import numpy as np

from ibsolver.case.model import Case, Side
from ibsolver.flow.boundary import SideCondition
from ibsolver.grid.staggered import GridError, StaggeredGrid
from ibsolver.grid.stretching import stretched_faces, uniform_faces

LEAST_MARGIN = 6  # cells of core around everything a body can reach (three for the stencils, three for the balance)


def side_conditions(case: Case) -> dict[str, SideCondition]:
    """Return the condition of each side; tank walls replace the open water above and below."""
    sides = {name: _condition(getattr(case.domain, name)) for name in ("left", "right", "bottom", "top")}
    wall = SideCondition("no slip", tow_share=1.0)
    if case.tank.wall_above is not None:
        sides["top"] = wall
    if case.tank.wall_below is not None:
        sides["bottom"] = wall
    return sides


def _condition(side: Side) -> SideCondition:
    return SideCondition(side.condition, side.speed, 0.0, side.profile)


def build_grid(case: Case, reach: tuple[float, float, float, float] | None) -> StaggeredGrid:
    """Return the grid of a case.

    Parameters
    ----------
    case : Case
    reach : tuple of float or None
        (x low, x high, y low, y high) of everything a body can reach, chords from the pivot; None without a body.
    """
    spacing = 1.0 / case.grid.cells_per_chord
    periodic_x = case.domain.left.condition == "periodic"
    periodic_y = case.domain.bottom.condition == "periodic"
    box = extent(case)
    if reach is None or case.grid.uniform:
        x, y = uniform_faces(box[0], box[1], spacing), uniform_faces(box[2], box[3], spacing)
        return StaggeredGrid(x, y, box, float(x[1] - x[0]), periodic_x, periodic_y)
    margin = max(case.grid.core_margin, LEAST_MARGIN * spacing)
    core = [reach[0] - margin, reach[1] + margin, reach[2] - margin, reach[3] + margin]
    snapped = [
        np.floor(core[0] / spacing) * spacing,
        np.ceil(core[1] / spacing) * spacing,
        np.floor(core[2] / spacing) * spacing,
        np.ceil(core[3] / spacing) * spacing,
    ]
    exact = (case.tank.wall_above, case.tank.wall_below, case.domain.above, case.domain.below)
    if all(distance is None for distance in exact):  # open water: centred on the core, so that
        middle = 0.5 * (snapped[2] + snapped[3])  # the stretch is symmetric and its transform half as dear
        box = (box[0], box[1], box[2] + middle, box[3] + middle)
    _require_room(box, snapped, case)
    stretch, largest = case.grid.stretch, case.grid.largest_cell
    x = stretched_faces(box[0], snapped[0], snapped[1], box[1], spacing, stretch, largest)
    y = stretched_faces(box[2], snapped[2], snapped[3], box[3], spacing, stretch, largest)
    return StaggeredGrid(x, y, tuple(map(float, snapped)), spacing, periodic_x, periodic_y)


def _require_room(box: tuple[float, float, float, float], core: list[float], case: Case) -> None:
    """Refuse a core that reaches through a side of the domain."""
    places = (("upstream", core[0] < box[0]), ("downstream", core[1] > box[1]))
    places += (
        ("lateral (or the tank wall below)", core[2] < box[2]),
        ("lateral (or the tank wall above)", core[3] > box[3]),
    )
    wrong = [name for name, bad in places if bad]
    if wrong:
        raise GridError(
            f"The fine part of the grid ({core[0]:.2f} to {core[1]:.2f} by {core[2]:.2f} to {core[3]:.2f} chords) does "
            f"not fit into the domain: enlarge {', '.join(wrong)}, or lower grid.core_margin ({case.grid.core_margin:g})."
        )


def extent(case: Case) -> tuple[float, float, float, float]:
    """Return (x low, x high, y low, y high) of the domain in chords from the pivot, or of the plain box."""
    domain, tank = case.domain, case.tank
    if domain.width is not None and domain.height is not None:
        return (0.0, domain.width, 0.0, domain.height)
    below = next(d for d in (tank.wall_below, domain.below, domain.lateral) if d is not None)
    above = next(d for d in (tank.wall_above, domain.above, domain.lateral) if d is not None)
    return (-domain.upstream, domain.downstream, -below, above)
