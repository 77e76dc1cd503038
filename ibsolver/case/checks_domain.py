"""Checks of domain, sides, tank walls and start field."""

from __future__ import annotations

from collections.abc import Iterator

from ibsolver.case.model import Case, Side
from ibsolver.case.placement import core_margin, extent, has_body, reach, sides
from ibsolver.case.problem import Place, Problem


def check_box(case: Case) -> Iterator[Problem]:
    """Yield what a box without a body must not have, and what only a box may have."""
    if has_body(case):
        if case.initial.field != "tow":
            yield Problem(("initial", "field"), "is for a box without a body.", 'Leave it out, or write "tow".')
        return
    if case.flaps:
        yield Problem(("flap",), "needs a [plate] to be hinged on.", "Add [plate], or leave the flaps out.")
    for name, motion in (("incidence", case.incidence_motion), ("heave", case.heave_motion)):
        if motion is not None:
            yield Problem(("motion", name), "moves a body, but the case has none.", "Leave [motion] out.")
    for name in ("wall_above", "wall_below"):
        if getattr(case.tank, name) is not None:
            remedy = 'Write the walls as domain.top and domain.bottom = "no slip".'
            yield Problem(("tank", name), "is measured from a body, but the case has none.", remedy)


def check_periodic(case: Case) -> Iterator[Problem]:
    """Yield periodic sides without their partner."""
    all_sides = sides(case)
    for one, other in (("left", "right"), ("bottom", "top")):
        conditions = (all_sides[one].condition, all_sides[other].condition)
        if conditions.count("periodic") == 1:
            lone, name = (one, other) if conditions[0] == "periodic" else (other, one)
            problem = f"is periodic, but {name} is not; the two belong together."
            yield Problem(("domain", lone), problem, f'Write {name} = "periodic" as well.')


def check_through_flow(case: Case) -> Iterator[Problem]:
    """Yield inflows and outflows at the wrong side, or without each other."""
    all_sides = sides(case)
    for name, side in all_sides.items():
        if side.condition == "inflow" and name != "left":
            yield Problem(("domain", name), "cannot be an inflow; the stream comes from the left.", 'Write "slip".')
        if side.condition == "outflow" and name != "right":
            yield Problem(("domain", name), "cannot be an outflow; the stream leaves at the right.", 'Write "slip".')
    left, right = all_sides["left"].condition, all_sides["right"].condition
    if left == "inflow" and right != "outflow":
        yield Problem(("domain", "right"), "must let out what comes in at the left.", 'Write right = "outflow".')
    if right == "outflow" and left != "inflow":
        yield Problem(("domain", "left"), "must let in what leaves at the right.", 'Write left = "inflow".')
    if has_body(case) and left not in ("inflow", "periodic"):
        yield Problem(("domain", "left"), "must be an inflow, or periodic, for a tow.", 'Write left = "inflow".')


def check_initial(case: Case) -> Iterator[Problem]:
    """Yield start fields that do not fit the domain."""
    if case.initial.field == "taylor green":
        if has_body(case) or any(side.condition != "periodic" for side in sides(case).values()):
            remedy = 'Write left, right, bottom and top = "periodic".'
            yield Problem(("initial", "field"), "needs a box that is periodic on all four sides.", remedy)
        elif any(size is None or size % 1 for size in (case.domain.width, case.domain.height)):
            remedy = "Write whole numbers for domain.width and domain.height."
            yield Problem(("initial", "field"), "has a wavelength of 1, which must fit into the box.", remedy)
    elif case.initial.stream != (0.0, 0.0):
        remedy = 'Leave it out, or write field = "taylor green".'
        yield Problem(("initial", "stream"), 'is added to field = "taylor green" only.', remedy)


def check_walls(case: Case) -> Iterator[Problem]:
    """Yield conditions that are given beside a tank wall on the same side."""
    domain, tank = case.domain, case.tank
    for wall, side, length in (("wall_above", "top", "above"), ("wall_below", "bottom", "below")):
        if getattr(tank, wall) is None:
            continue
        if getattr(domain, side) != Side("slip"):
            yield Problem(("domain", side), f"is given beside tank.{wall}, which is that side.", "Leave one out.")
        if getattr(domain, length) is not None:
            yield Problem(("domain", length), f"is given beside tank.{wall}, which is that distance.", "Leave one out.")


def check_inside(case: Case) -> Iterator[Problem]:
    """Yield where the bodies, with the fine cells around them, reach the domain's boundary or a tank wall."""
    if not has_body(case):
        return
    left, right, bottom, top = reach(case)
    x_low, x_high, y_low, y_high = extent(case)
    gap = core_margin(case) + 1 / case.grid.cells_per_chord
    above = ("tank", "wall_above") if case.tank.wall_above else ("domain", "above" if case.domain.above else "lateral")
    below = ("tank", "wall_below") if case.tank.wall_below else ("domain", "below" if case.domain.below else "lateral")
    needed: dict[Place, float] = {}
    for place, due, there in (
        (("domain", "upstream"), gap - left, -x_low),
        (("domain", "downstream"), gap + right, x_high),
        (above, gap + top, y_high),
        (below, gap - bottom, -y_low),
    ):
        if due > there:
            needed[place] = max(due, needed.get(place, 0.0))
    for place, due in needed.items():
        what = "tank wall" if place[0] == "tank" else "boundary"
        problem = f"the body with the fine cells around it reaches the {what}, {due:.3g} chords from the pivot."
        yield Problem(place, problem, f"Choose more than {due:.3g}, lower grid.core_margin, or move the body.")
