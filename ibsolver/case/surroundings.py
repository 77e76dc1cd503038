"""Tank, domain and grid of a case file."""

from __future__ import annotations

from ibsolver.case.draft import Draft, Place, Table
from ibsolver.case.model import Domain, Grid, Side, Tank
from ibsolver.case.motions import Units
from ibsolver.case.schema import SECTION
from ibsolver.case.values import Length


def read_tank(draft: Draft, table: Table, units: Units) -> Tank:
    """Return the tank; faults go to the draft."""
    walls = {name: _wall(draft, table, name, units) for name in ("wall_above", "wall_below")}
    if table.given("gravity") != table.given("gravity_direction"):
        missing = "gravity_direction" if table.given("gravity") else "gravity"
        example = f"Write for example {missing} = {table.section.key(missing).example}."
        draft.table_fault(table, missing, "is missing; gravity needs both its size and its direction.", example)
    return Tank(**walls, gravity=table.optional("gravity"), gravity_direction=table.optional("gravity_direction"))


def _wall(draft: Draft, table: Table, name: str, units: Units) -> float | None:
    value = table.get(name)
    if not isinstance(value, Length):
        return None
    chords = value.in_chords(units.chord)
    if chords is None:
        if units.sound:
            problem = "is a length, but the case has no chord to divide it by."
            draft.table_fault(table, name, problem, "Write it in chords.")
    elif not table.section.key(name).low <= chords <= table.section.key(name).high:
        draft.table_fault(table, name, f"is {chords:.4g} chords; 0.01 to 1000 are taken.", "Check its unit.")
        return None
    return chords


def read_domain(draft: Draft, table: Table) -> Domain:
    """Return the domain; faults go to the draft."""
    sides = {name: _side(draft, table, name) for name in ("left", "right", "bottom", "top")}
    return Domain(**{**table.fields(), **sides})


def _side(draft: Draft, table: Table, name: str) -> Side:
    raw = table.get(name)
    place: Place = ("domain", name)
    written = raw
    if isinstance(raw, str):
        raw = {"condition": raw}
    if not isinstance(raw, dict):
        draft.fault(place, written, "must be a condition in quotes or a side table.", 'Write for example "slip".')
        return Side("slip")
    before = len(draft.faults)
    side = draft.read_table(SECTION["side table"], place, raw)
    _check_side(draft, side)
    if len(draft.faults) > before:
        table.bad.add(name)
        return Side("slip")
    return Side(str(side.get("condition")), side.number("speed"), str(side.get("profile")))


def _check_side(draft: Draft, side: Table) -> None:
    condition = side.get("condition")
    if side.given("speed") and condition != "no slip" and side.sound("condition", "speed"):
        draft.table_fault(side, "speed", "is the speed of a wall without slip.", 'Write condition = "no slip".')
    if side.given("profile") and condition != "inflow" and side.sound("condition", "profile"):
        draft.table_fault(side, "profile", "is the shape of an inflow.", 'Write condition = "inflow".')


def read_grid(draft: Draft, table: Table, box: bool) -> Grid:
    """Return the grid; faults go to the draft."""
    values = table.fields()
    if box:
        if table.given("uniform") and table.get("uniform") is False:
            draft.table_fault(table, "uniform", "must be true for a box; its grid is uniform.", "Leave it out.")
        values["uniform"] = True
    return Grid(**values)
