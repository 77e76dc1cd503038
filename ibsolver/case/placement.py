"""Where the bodies of a case lie: in chords, pivot of the body at x = 0, y = 0, stream toward +x.

`segments` gives the plate and its flaps at the start; `reach` bounds everything a body can touch in a run, by
interval arithmetic over the ranges of incidence, heave and openings; `extent` and `sides` resolve the domain with
its tank walls.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from ibsolver.case.model import Case, Flap, Motion, Side

Point = tuple[float, float]
Interval = tuple[float, float]
Box = tuple[float, float, float, float]  # x low, x high, y low, y high


@dataclass(frozen=True)
class Segment:
    """A straight piece: plate from leading to trailing edge, or flap from hinge to tip (chords)."""

    name: str
    start: Point
    end: Point


def segments(case: Case) -> list[Segment]:
    """Return the plate (first) and its flaps (in order) at the start of the run; empty without a plate.

    A flap whose parent is unknown is left out.
    """
    if case.plate is None:
        return []
    pivot = case.plate.pivot
    angle = -case.plate.incidence
    leading = along((0.0, 0.0), angle, -pivot)
    found = {"plate": (leading, angle)}
    pieces = {"plate": Segment("plate", leading, along(leading, angle, 1.0))}
    for flap in parents_first(case.flaps):
        origin, parent_angle = found[flap.on]
        hinge = along(origin, parent_angle, flap.hinge)
        own = parent_angle + signed_opening(flap)
        found[flap.name] = (hinge, own)
        pieces[flap.name] = Segment(flap.name, hinge, along(hinge, own, flap.length))
    return [pieces["plate"]] + [pieces[flap.name] for flap in case.flaps if flap.name in pieces]


def along(origin: Point, angle: float, distance: float) -> Point:
    """Return the point at `distance` (chords) from `origin` in the direction `angle` (rad)."""
    return origin[0] + distance * math.cos(angle), origin[1] + distance * math.sin(angle)


def signed_opening(flap: Flap) -> float:
    """Return the turn from the parent's direction to the flap's, counter-clockwise positive (rad)."""
    return flap.opening if flap.side == "upper" else -flap.opening


def parents_first(flaps: tuple[Flap, ...]) -> list[Flap]:
    """Return flaps such that each follows what it hangs on; those on unknown parents or in a ring are left out."""
    known, ordered, waiting = {"plate"}, [], list(flaps)
    while True:
        ready = [flap for flap in waiting if flap.on in known]
        if not ready:
            return ordered
        ordered += ready
        known.update(flap.name for flap in ready)
        waiting = [flap for flap in waiting if flap not in ready]


def motion_range(motion: Motion | None, fixed: float) -> Interval:
    """Return least and greatest value of a motion, or of `fixed` where there is none."""
    if motion is None:
        return fixed, fixed
    if motion.kind == "oscillation":
        return motion.value - abs(motion.amplitude), motion.value + abs(motion.amplitude)
    if motion.kind == "table":
        return min(motion.values), max(motion.values)
    if motion.kind == "constant":
        return motion.value, motion.value
    return min(motion.value, motion.to), max(motion.value, motion.to)


def opening_range(flap: Flap) -> Interval:
    """Return least and greatest opening of a flap (rad)."""
    if flap.mount == "free":
        low, high = flap.limits or (0.0, math.pi)
        return min(low, flap.opening), max(high, flap.opening)
    return motion_range(flap.motion, flap.opening)


def reach(case: Case) -> Box:
    """Return the box that holds every body point at any time of the run (chords); zeros for a box without body."""
    low, high = motion_range(case.heave_motion, 0.0)
    box = _still_reach(case)
    return box[0], box[1], box[2] + low, box[3] + high


def _still_reach(case: Case) -> Box:
    """Return the reach without heave."""
    if case.cylinder is not None:
        return -0.5, 0.5, -0.5, 0.5
    if case.outline is not None:
        return _outline_reach(case)
    if case.plate is None:
        return 0.0, 0.0, 0.0, 0.0
    low, high = motion_range(case.incidence_motion, case.plate.incidence)
    turn = (-high, -low)
    leading = arc((0.0, 0.0, 0.0, 0.0), turn, -case.plate.pivot)
    frames = {"plate": (leading, turn)}
    boxes = [leading, arc((0.0, 0.0, 0.0, 0.0), turn, 1 - case.plate.pivot)]
    for flap in parents_first(case.flaps):
        origin, parent = frames[flap.on]
        if flap.on == "plate":  # tighter than along the leading edge's own box
            hinge = arc((0.0, 0.0, 0.0, 0.0), turn, flap.hinge - case.plate.pivot)
        else:
            hinge = arc(origin, parent, flap.hinge)
        least, most = opening_range(flap)
        own = (parent[0] + least, parent[1] + most) if flap.side == "upper" else (parent[0] - most, parent[1] - least)
        frames[flap.name] = (hinge, own)
        boxes += [hinge, arc(hinge, own, flap.length)]
    return around(boxes)


def _outline_reach(case: Case) -> Box:
    outline = case.outline
    low, high = motion_range(case.incidence_motion, outline.incidence)
    boxes = []
    for x, y in outline.points or ((0.0, 0.0), (1.0, 0.0)):
        radius, angle = math.hypot(x - outline.pivot, y), math.atan2(y, x - outline.pivot)
        boxes.append(arc((0.0, 0.0, 0.0, 0.0), (angle - high, angle - low), radius))
    return around(boxes)


def arc(origin: Box, turn: Interval, distance: float) -> Box:
    """Return the box of all points at a signed `distance` from any point of `origin`, in any direction of `turn`."""
    low, high = turn if distance >= 0 else (turn[0] + math.pi, turn[1] + math.pi)
    size = abs(distance)
    cosines, sines = cosine_range(low, high), cosine_range(low - math.pi / 2, high - math.pi / 2)
    return (
        origin[0] + size * cosines[0],
        origin[1] + size * cosines[1],
        origin[2] + size * sines[0],
        origin[3] + size * sines[1],
    )


def cosine_range(low: float, high: float) -> Interval:
    """Return least and greatest cosine over an interval of angles (rad)."""
    ends = (math.cos(low), math.cos(high))
    holds_top = math.floor(high / (2 * math.pi)) >= math.ceil(low / (2 * math.pi))
    holds_bottom = math.floor((high - math.pi) / (2 * math.pi)) >= math.ceil((low - math.pi) / (2 * math.pi))
    return -1.0 if holds_bottom else min(ends), 1.0 if holds_top else max(ends)


def around(boxes: list[Box]) -> Box:
    """Return the smallest box that holds all boxes."""
    return (
        min(box[0] for box in boxes),
        max(box[1] for box in boxes),
        min(box[2] for box in boxes),
        max(box[3] for box in boxes),
    )


def core_margin(case: Case) -> float:
    """Return the width of the uniform core around all that a body can reach (chords): six cells at least."""
    return max(case.grid.core_margin, 6 / case.grid.cells_per_chord)


def has_body(case: Case) -> bool:
    """Return whether the case has a body (else it is a plain box)."""
    return case.plate is not None or case.cylinder is not None or case.outline is not None


def extent(case: Case) -> Box:
    """Return the computed region (x low, x high, y low, y high) in chords, tank walls included."""
    domain, tank = case.domain, case.tank
    if domain.width is not None and domain.height is not None:
        return 0.0, domain.width, 0.0, domain.height
    above = tank.wall_above or domain.above or domain.lateral
    below = tank.wall_below or domain.below or domain.lateral
    return -domain.upstream, domain.downstream, -below, above


def sides(case: Case) -> dict[str, Side]:
    """Return the condition of each side: ``left``, ``right``, ``bottom``, ``top``.

    A tank wall stays with the water, so that in the frame of the carriage it slides past with the stream: no slip,
    tangential speed 1 (that of the tow at the moment).
    """
    domain, tank = case.domain, case.tank
    wall = Side("no slip", 1.0)
    return {
        "left": domain.left,
        "right": domain.right,
        "bottom": wall if tank.wall_below is not None else domain.bottom,
        "top": wall if tank.wall_above is not None else domain.top,
    }
