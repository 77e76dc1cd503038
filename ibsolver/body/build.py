"""From the bodies of a Case to a rig of links with Lagrangian points."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ibsolver.body import points as layout
from ibsolver.body.regularisation import AT_REST, Regularisation
from ibsolver.body.rig import Link, Rig
from ibsolver.case.model import Case, Flap, Plate


def build_rig(case: Case, spacing: float, rule: Regularisation = AT_REST) -> Rig:
    """Return the rig of a case.

    Parameters
    ----------
    case : Case
    spacing : float
        Cell width in the core of the grid (chords).
    rule : Regularisation
        How points stand for the body.
    """
    if case.plate is not None:
        links = [plate_link(case.plate, spacing, rule)]
    elif case.cylinder is not None:
        links = [closed_link("cylinder", layout.circle(0.5), spacing, rule)]
    elif case.outline is not None:
        pivot = np.array([case.outline.pivot, 0.0])
        links = [closed_link("outline", np.array(case.outline.points) - pivot, spacing, rule)]
    else:
        return Rig()
    names = {"plate": 0}
    for flap in _parents_first(case.flaps):
        names[flap.name] = len(links)
        links.append(flap_link(flap, names[flap.on], case, spacing, rule))
    return Rig(tuple(links), rule.merge)


def _parents_first(flaps: tuple[Flap, ...]) -> list[Flap]:
    """Return the flaps so that each comes after the one it is hinged on (the order of the case file otherwise)."""
    ordered: list[Flap] = []
    placed = {"plate"}
    waiting = list(flaps)
    while waiting:
        ready = [flap for flap in waiting if flap.on in placed]
        if not ready:
            raise layout.BodyError(f"Flap {waiting[0].name!r} hangs on {waiting[0].on!r}, which hangs on nothing.")
        ordered += ready
        placed |= {flap.name for flap in ready}
        waiting = [flap for flap in waiting if flap not in ready]
    return ordered


def plate_link(plate: Plate, spacing: float, rule: Regularisation) -> Link:
    """Return the base link of a thin plate, its frame at the pivot."""
    start, end = -plate.pivot, 1.0 - plate.pivot
    retraction = rule.edge_retraction * spacing
    s, ds = layout.along_line(start, end, rule.spacing * spacing, retraction, retraction)
    layer = rule.held_layer * spacing
    return Link("plate", _on_axis(s), ds, _on_axis(np.array([start, end])), layer=layer)


def flap_link(flap: Flap, parent: int, case: Case, spacing: float, rule: Regularisation) -> Link:
    """Return the link of a flap; its points reach from the hinge, where their weight vanishes, to near the tip."""
    s, ds = layout.along_line(0.0, flap.length, rule.spacing * spacing, 0.5 * spacing, rule.edge_retraction * spacing)
    offset = case.plate.pivot if parent == 0 and case.plate is not None else 0.0
    return Link(
        flap.name,
        _on_axis(s),
        ds,
        _on_axis(np.array([0.0, flap.length])),
        parent=parent,
        hinge=flap.hinge - offset,
        side=1 if flap.side == "upper" else -1,
        length=flap.length,
        layer=rule.held_layer * spacing,
    )


def closed_link(name: str, curve: np.ndarray, spacing: float, rule: Regularisation) -> Link:
    """Return the base link of a closed body whose curve is given in the base frame."""
    points, ds = layout.along_closed_curve(curve, rule.closed_spacing * spacing, rule.closed_retraction * spacing)
    area, centroid = layout.polygon_area(curve)
    return Link(
        name,
        points,
        ds,
        curve,
        area=area,
        centroid=(float(centroid[0]), float(centroid[1])),
        polar_moment=layout.polygon_polar_moment(curve),
    )


MASS_POINTS = 40  # a flap


def mass_rig(rig: Rig) -> Rig:
    """Return the rig with evenly spaced mass points along every flap in place of Lagrangian points; the base has none."""
    links = []
    for k, link in enumerate(rig.links):
        count = MASS_POINTS if k else 0
        s = (np.arange(count) + 0.5) * link.length / max(count, 1)
        links.append(replace(link, points=_on_axis(s), ds=np.full(count, link.length / max(count, 1)), layer=0.0))
    return Rig(tuple(links))


def _on_axis(s: np.ndarray) -> np.ndarray:
    return np.column_stack([s, np.zeros_like(s)])
