"""Checks of bodies, flaps and their motions."""

from __future__ import annotations

import math
from collections.abc import Iterator

from ibsolver.case.model import Case, Flap
from ibsolver.case.placement import (
    Segment,
    has_body,
    opening_range,
    parents_first,
    segments,
)
from ibsolver.case.problem import Problem
from ibsolver.case.scales import dimensional, span

_DEGREE = math.pi / 180


def check_motions(case: Case) -> Iterator[Problem]:
    """Yield motions that contradict the body."""
    if case.cylinder is not None and case.incidence_motion is not None:
        yield Problem(("motion", "incidence"), "has no meaning for a circular cylinder.", "Use heave, or leave it out.")
    body = case.plate or case.outline
    if body is None or case.incidence_motion is None:
        return
    start = case.incidence_motion.value
    if abs(start - body.incidence) > 1e-9:
        name = "plate" if case.plate else "outline"
        problem = f"begins at (or swings about) {start / _DEGREE:.6g} deg, but {name}.incidence is"
        remedy = f"Leave {name}.incidence out, or make the two agree."
        yield Problem(("motion", "incidence"), f"{problem} {body.incidence / _DEGREE:.6g} deg.", remedy)


def check_flap_names(case: Case) -> Iterator[Problem]:
    """Yield flaps without a plate, and names used twice."""
    if case.flaps and has_body(case) and case.plate is None:
        yield Problem(("flap",), "needs a [plate]; flaps on other bodies are not computed.", "Leave the flaps out.")
        return
    seen: set[str] = set()
    for index, flap in enumerate(case.flaps):
        if flap.name in seen:
            yield Problem(("flap", index, "name"), "is the name of another flap.", "Give each flap a name of its own.")
        if flap.name == "plate":
            yield Problem(("flap", index, "name"), "is taken by the plate itself.", 'Choose another, such as "front".')
        seen.add(flap.name)


def check_flap_parents(case: Case) -> Iterator[Problem]:
    """Yield flaps hinged on nothing, in a ring, or beyond the end of what they hang on."""
    names = {flap.name: flap for flap in case.flaps}
    hung = parents_first(case.flaps)
    for index, flap in enumerate(case.flaps):
        place = ("flap", index, "on")
        if flap.on != "plate" and flap.on not in names:
            known = ", ".join(f'"{name}"' for name in ("plate", *names) if name != flap.name)
            yield Problem(place, "is not the name of a body to be hinged on.", f"Known: {known}.")
        elif flap not in hung:
            yield Problem(place, "leads in a ring and never to the plate.", 'Write on = "plate" for one of them.')
        else:
            length = 1.0 if flap.on == "plate" else names[flap.on].length
            if flap.hinge > length * (1 + 1e-12):
                what = "plate" if flap.on == "plate" else f'flap "{flap.on}"'
                problem = f"lies beyond the {what}, whose length is {length:g} chords."
                yield Problem(("flap", index, "hinge"), problem, f"Choose at least 0 and at most {length:g}.")


def check_flap_openings(case: Case) -> Iterator[Problem]:
    """Yield openings through the own plate, without effect, or beyond the stops."""
    for index, flap in enumerate(case.flaps):
        if flap.mount == "free" and flap.limits:
            yield from _stops(flap, index)
        low, high = (flap.opening, flap.opening) if flap.mount == "free" else opening_range(flap)
        place = ("flap", index, "opening")
        if low < -1e-12 or high >= math.pi:
            problem = "takes the flap through its own plate: it is counted from the plate's surface."
            remedy = "At least 0 deg and less than 180 deg are allowed; for the other surface choose the other side."
            yield Problem(place, problem, remedy)
        elif flap.mount == "fixed" and flap.opening == 0 and not _beyond_edge(case, flap):
            remedy = "Leave the flap out, or open it."
            yield Problem(place, "lays the flap on its own plate, where it changes nothing.", remedy)


def _stops(flap: Flap, index: int) -> Iterator[Problem]:
    """Yield stops that a free flap starts beyond, or that let it through its own plate."""
    least, most = flap.limits
    if least < 0 or most > math.pi:
        remedy = "Choose stops of at least 0 deg and at most 180 deg."
        yield Problem(("flap", index, "limits"), "let the flap swing through its own plate.", remedy)
    elif not least <= flap.opening <= most:
        problem = f"lies outside the limits {least / _DEGREE:.4g} deg to {most / _DEGREE:.4g} deg."
        yield Problem(("flap", index, "opening"), problem, "Start between the stops.")


def _beyond_edge(case: Case, flap: Flap) -> bool:
    """Return whether a closed flap sticks out beyond the end of what it is hinged on."""
    lengths = {"plate": 1.0} | {other.name: other.length for other in case.flaps}
    return flap.hinge + flap.length > lengths.get(flap.on, 1.0) * (1 + 1e-9)


def check_crossings(case: Case) -> Iterator[Problem]:
    """Yield flaps that cross the plate or one another at the start."""
    pieces = segments(case)
    place = {flap.name: index for index, flap in enumerate(case.flaps)}
    parent = {flap.name: flap for flap in case.flaps}
    for later in range(1, len(pieces)):
        for earlier in range(later):
            one, other = pieces[later], pieces[earlier]
            if _hinged_together(one, other, parent) or not meet(one, other):
                continue
            what = "the plate" if other.name == "plate" else f'flap "{other.name}"'
            remedy = "Move its hinge, shorten it, or change an opening."
            yield Problem(("flap", place[one.name]), f'flap "{one.name}" crosses or touches {what}.', remedy)


def _hinged_together(one: Segment, other: Segment, parent: dict[str, Flap]) -> bool:
    """Return whether two pieces meet at a hinge by right: child and parent, or two sides of one parent."""
    first, second = parent.get(one.name), parent.get(other.name)
    if first is not None and first.on == other.name or second is not None and second.on == one.name:
        return True
    if first is None or second is None or first.on != second.on:
        return False
    return first.side != second.side and 0 < first.opening < math.pi and 0 < second.opening < math.pi


def meet(one: Segment, other: Segment) -> bool:
    """Return whether two straight pieces have a point in common."""
    (a, b), (c, d) = (one.start, one.end), (other.start, other.end)
    tiny = 1e-12
    if max(a[0], b[0]) < min(c[0], d[0]) - tiny or max(c[0], d[0]) < min(a[0], b[0]) - tiny:
        return False
    if max(a[1], b[1]) < min(c[1], d[1]) - tiny or max(c[1], d[1]) < min(a[1], b[1]) - tiny:
        return False

    def turn(p: tuple[float, float], q: tuple[float, float], r: tuple[float, float]) -> float:
        value = (q[0] - p[0]) * (r[1] - p[1]) - (q[1] - p[1]) * (r[0] - p[0])
        return 0.0 if abs(value) < tiny else value

    return turn(c, d, a) * turn(c, d, b) <= 0 and turn(a, b, c) * turn(a, b, d) <= 0


def check_free_flaps(case: Case) -> Iterator[Problem]:
    """Yield properties in SI units that the case cannot make dimensionless."""
    scaled = dimensional(case) and span(case) is not None
    for index, flap in enumerate(case.flaps):
        for name in ("spring", "damping"):
            if getattr(flap, name) and not scaled:
                problem = "needs [fluid], a chord, a span and a tow speed to become dimensionless."
                yield Problem(("flap", index, name), problem, "Add what is missing, or write 0.")
        for name in ("mass_per_area", "thickness", "opening_rate"):
            if getattr(flap, name) and not dimensional(case):
                problem = "needs [fluid], a chord and a tow speed to become dimensionless."
                yield Problem(("flap", index, name), problem, "Add what is missing, or write 0.")
    if case.tank.gravity and not dimensional(case):
        problem = "needs [fluid], a chord and a tow speed to become dimensionless."
        yield Problem(("tank", "gravity"), problem, "Add what is missing, or leave it out.")
