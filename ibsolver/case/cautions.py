"""Cautions: what a case may be run with, but what its results must be read with.

A caution is not a fault. Each names the rule and where the rule comes from.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from ibsolver.case.model import Case
from ibsolver.case.placement import extent, has_body, motion_range, opening_range, segments
from ibsolver.case.scales import dimensional

TWO_DIMENSIONAL = (
    "The flow is two-dimensional, laminar and unbounded along the span: no tip effects, no free surface, no carriage "
    "vibration, no bending. Use the loads to choose tests and load cells, never to size parts that carry people."
)
LAMINAR_REYNOLDS = 3000.0
CYLINDER_REYNOLDS = 190.0
BOUNDARY_LAYER_CELLS = 6.0
STAGNATION_CELLS = 3.0
FLAP_CELLS = 8.0
GAP_CELLS = 3.0
MOST_BLOCKAGE = 0.05
SHORT_START = 0.25
WAVE_SPEED = 0.231
_DEGREE = math.pi / 180


def cautions(case: Case) -> tuple[str, ...]:
    """Return the cautions of a case, as sentences; of a box without a body none.

    Parameters
    ----------
    case : Case
        A case without faults.
    """
    if not has_body(case):
        return ()
    parts = (_dimensions, _boundary_layer, _flap_cells, _gaps, _closeness, _blockage, _start, _domain, _surface, _units)
    return tuple(sentence for part in parts for sentence in part(case))


def _dimensions(case: Case) -> Iterator[str]:
    yield TWO_DIMENSIONAL
    reynolds = case.tow.reynolds
    if case.cylinder is not None and reynolds > CYLINDER_REYNOLDS:
        yield (
            f"Re {reynolds:.4g}: a cylinder's wake is three-dimensional above about {CYLINDER_REYNOLDS:g} (Williamson "
            "1996, Annu. Rev. Fluid Mech. 28, 477); a two-dimensional one overrates its loads."
        )
    elif reynolds > LAMINAR_REYNOLDS:
        yield (
            f"Re {reynolds:.4g} is above {LAMINAR_REYNOLDS:g}: after a few chords of travel a real wake turns "
            "three-dimensional, while this one keeps its vortices too coherent: loads come out too high and too "
            "regular (common practice)."
        )
    elif case.cylinder is None and reynolds > 300 and case.run.travel > 4 and _greatest_incidence(case) > 12 * _DEGREE:
        yield (
            f"The travel of {case.run.travel:g} chords goes beyond the first few: a real wake then leaves the plane "
            "(common practice; for short spans see Taira & Colonius 2009, J. Fluid Mech. 623, 187). Trust the later "
            "loads less."
        )


def _greatest_incidence(case: Case) -> float:
    """Return the greatest incidence (rad) a plate or outline takes, as a size."""
    body = case.plate or case.outline
    if body is None:
        return 0.0
    return max(abs(value) for value in motion_range(case.incidence_motion, body.incidence))


def boundary_layer_cells(case: Case) -> float:
    """Return the cells across the laminar boundary layer: where it is thinnest of those that matter.

    Plate and outline: 5 c / sqrt(Re) at the trailing edge (Blasius 1908). Cylinder: 1.2 D / sqrt(Re), the layer at
    the front stagnation point (Hiemenz 1911, 2.4 sqrt(nu / a) with a = 4 U / D).
    """
    factor = 1.2 if case.cylinder is not None else 5.0
    return factor / math.sqrt(case.tow.reynolds) * case.grid.cells_per_chord


def _boundary_layer(case: Case) -> Iterator[str]:
    cells, cylinder = boundary_layer_cells(case), case.cylinder is not None
    least = STAGNATION_CELLS if cylinder else BOUNDARY_LAYER_CELLS
    if cells >= least:
        return
    what = "at the front of the cylinder (1.2 D / sqrt(Re), Hiemenz 1911)"
    what = what if cylinder else "at the trailing edge (5 c / sqrt(Re), Blasius 1908)"
    needed = math.ceil(case.grid.cells_per_chord * least / cells)
    yield (
        f"The boundary layer {what} is {cells:.2g} cells thick; at least {least:g} are common practice: "
        f"cells_per_chord = {needed} at this Reynolds number."
    )


def _flap_cells(case: Case) -> Iterator[str]:
    for flap in case.flaps:
        cells = flap.length * case.grid.cells_per_chord
        if cells < FLAP_CELLS:
            yield (
                f'Flap "{flap.name}" is {cells:.2g} cells long; at least {FLAP_CELLS:g} are common practice: '
                f"cells_per_chord = {math.ceil(FLAP_CELLS / flap.length)}."
            )


def _gaps(case: Case) -> Iterator[str]:
    for flap in case.flaps:
        gap = min(abs(math.sin(value)) for value in (flap.opening, *_driven_ends(case, flap.name)))
        cells = flap.length * gap * case.grid.cells_per_chord
        if cells < GAP_CELLS and flap.mount != "free":
            yield (
                f'The tip of flap "{flap.name}" stands {cells:.2g} cells off its plate at its least opening; below '
                f"{GAP_CELLS:g} the two merge on the grid and the gap carries no flow of its own (common practice)."
            )


def _driven_ends(case: Case, name: str) -> tuple[float, ...]:
    flap = next(flap for flap in case.flaps if flap.name == name)
    return opening_range(flap) if flap.mount == "driven" else ()


def _closeness(case: Case) -> Iterator[str]:
    """Yield tips of flaps that come close to another piece they are not hinged on."""
    pieces, parents = segments(case), {flap.name: flap.on for flap in case.flaps}
    for piece in pieces[1:]:
        for other in pieces:
            if other.name in (piece.name, parents[piece.name]) or parents.get(other.name) == piece.name:
                continue
            cells = _distance(piece.end, other.start, other.end) * case.grid.cells_per_chord
            if cells < GAP_CELLS:
                yield (
                    f'The tip of flap "{piece.name}" is {cells:.2g} cells from "{other.name}" at the start; below '
                    f"{GAP_CELLS:g} the gap carries no flow of its own (common practice)."
                )


def _distance(point: tuple[float, float], start: tuple[float, float], end: tuple[float, float]) -> float:
    """Return the distance of a point from a straight piece."""
    ux, uy, px, py = end[0] - start[0], end[1] - start[1], point[0] - start[0], point[1] - start[1]
    share = min(1.0, max(0.0, (px * ux + py * uy) / (ux * ux + uy * uy)))
    return math.hypot(px - share * ux, py - share * uy)


def blockage(case: Case) -> float | None:
    """Return the blockage c sin(incidence) / width between two tank walls, None in open water."""
    tank = case.tank
    if tank.wall_above is None or tank.wall_below is None:
        return None
    width = tank.wall_above + tank.wall_below
    if case.cylinder is not None:
        return 1.0 / width
    low, high = motion_range(case.incidence_motion, (case.plate or case.outline).incidence)
    crosswise = low <= math.pi / 2 <= high or low <= -math.pi / 2 <= high
    return (1.0 if crosswise else max(abs(math.sin(low)), abs(math.sin(high)))) / width


def _blockage(case: Case) -> Iterator[str]:
    share = blockage(case)
    if share is not None and share > MOST_BLOCKAGE:
        yield (
            f"The blockage c sin(incidence) / width is {100 * share:.3g} %; above {100 * MOST_BLOCKAGE:g} % the walls "
            "raise the loads noticeably (Maskell 1963, R&M 3400)."
        )


def _start(case: Case) -> Iterator[str]:
    tow = case.tow
    if tow.profile or tow.start == "hold acceleration":
        return
    if tow.start == "impulsive":
        yield (
            "An impulsive start has an infinite added-mass load at its first moment; no carriage does it, and the "
            "first coefficients depend on the time step."
        )
    elif tow.start_distance < SHORT_START:
        yield (
            f"The start over {tow.start_distance:g} chords is short: its added-mass load grows like one over that "
            "distance and may exceed the load cell's range. A ramp should last at least 2 to 3 natural periods of the "
            "balance (common practice)."
        )
    if tow.start in ("linear", "smooth") and tow.start_distance > case.run.travel:
        yield (
            f"The start takes {tow.start_distance:g} chords, the run ends after {case.run.travel:g}: the final speed, "
            "which coefficients refer to, is not reached."
        )


def _domain(case: Case) -> Iterator[str]:
    x_low, x_high, y_low, y_high = extent(case)
    near = []
    if -x_low < 4:
        near.append(f"upstream {-x_low:g}")
    if x_high < 6:
        near.append(f"downstream {x_high:g}")
    walls = case.tank.wall_above is not None or case.tank.wall_below is not None
    slip = case.domain.top.condition == "slip" and case.domain.bottom.condition == "slip"
    if slip and not walls and min(y_high, -y_low) < 4:
        near.append(f"lateral {min(y_high, -y_low):g}")
    if near:
        yield (
            f"The domain is small ({', '.join(near)} chords; at least 4, 6 and 4 are advised): near sides raise the "
            "loads (common practice)."
        )


def _surface(case: Case) -> Iterator[str]:
    water = case.fluid is not None and case.fluid.kind in ("fresh water", "glycerol solution")
    if water and case.tow.speed is not None and case.tow.speed > WAVE_SPEED:
        yield (
            f"At {1000 * case.tow.speed:.4g} mm/s whatever pierces the water's surface makes steady waves, which this "
            f"computation does not know (none exist below {1000 * WAVE_SPEED:g} mm/s: capillary-gravity limit)."
        )


def _units(case: Case) -> Iterator[str]:
    """Yield lengths in SI that a dimensionless case leaves unused."""
    body = case.plate or case.outline or case.cylinder
    length = case.cylinder.diameter if case.cylinder else body.chord
    if not dimensional(case) and (length is not None or body.span is not None):
        yield "Without [fluid] the run is dimensionless: chord and span in SI units are not used."
