"""Checked tables of a case file to a `Case`: what follows from what, in SI and in convective units.

Where a value is at fault a harmless one takes its place, so that all the rest can still be checked in the same go;
no such case ever leaves the room.
"""

from __future__ import annotations

from ibsolver.case.draft import ABSENT, Draft, Table
from ibsolver.case.flaps import read_flap
from ibsolver.case.model import Case, Cylinder, Initial, Motion, Outline, Output, Plate, Run
from ibsolver.case.motions import Units, read_motion
from ibsolver.case.outline_file import read_outline
from ibsolver.case.reference import BODIES, Tables, read_fluid, read_tow
from ibsolver.case.surroundings import read_domain, read_grid, read_tank
from ibsolver.case.values import ValueFault


def build_case(draft: Draft, tables: Tables, flap_tables: list[Table]) -> Case:
    """Return the case; faults that show on the way go to the draft."""
    body = _body_table(draft, tables)
    fluid = read_fluid(draft, tables["fluid"]) if "fluid" in tables else None
    length = _reference_length(body)
    tow = read_tow(draft, tables, body, fluid, length)
    units = Units(length, tow.speed, sound=not draft.at_fault(("fluid",), ("tow",), *((name,) for name in BODIES)))
    incidence = _motion(draft, tables, "incidence", body.number("incidence") if body else 0.0, units)
    heave = _motion(draft, tables, "heave", 0.0, units)
    flaps = tuple(read_flap(draft, table, units) for table in flap_tables)
    return Case(
        title=str(tables[""].get("title")),
        tow=tow,
        fluid=fluid,
        plate=_plate(draft, tables, incidence),
        cylinder=_cylinder(tables),
        outline=_outline(draft, tables, incidence),
        flaps=flaps,
        incidence_motion=incidence,
        heave_motion=heave,
        tank=read_tank(draft, tables["tank"], units),
        domain=read_domain(draft, tables["domain"]),
        initial=Initial(**tables["initial"].fields()),
        grid=read_grid(draft, tables["grid"], box=body is None),
        run=Run(**tables["run"].fields()),
        output=Output(**tables["output"].fields()),
    )


def _body_table(draft: Draft, tables: Tables) -> Table | None:
    """Return the table of the one body, None for a box."""
    bodies = [tables[name] for name in BODIES if name in tables]
    for extra in bodies[1:]:
        problem = f"is a second body beside [{bodies[0].section.name}]; a case has one."
        draft.fault(extra.place, ABSENT, problem, "Leave one of the two out.")
    domain = tables["domain"]
    box = domain.given("width") or domain.given("height")
    if not bodies and not box:
        problem = "the case has no body: one of [plate], [cylinder] or [outline] is due."
        draft.fault((), ABSENT, problem, "Or give domain.width and domain.height of a box without one.")
        draft.places.add(("plate",))
    for name in ("width", "height"):
        if bodies and domain.given(name):
            draft.table_fault(domain, name, "is of a box without a body.", "Use upstream, downstream and lateral.")
        if not bodies and box and not domain.given(name):
            problem = "is missing; a box needs width and height."
            draft.table_fault(domain, name, problem, f"Write for example {name} = 1.")
    return bodies[0] if bodies else None


def _reference_length(body: Table | None) -> float | None:
    return None if body is None else body.optional(BODIES[body.section.name])


def _motion(draft: Draft, tables: Tables, name: str, start: float, units: Units) -> Motion | None:
    table = tables.get("motion")
    if table is None or name not in table.raw:
        return None
    motion = read_motion(draft, ("motion", name), table.raw[name], table.section.key(name), start, units)
    if motion is None:
        table.bad.add(name)
    return motion


def _incidence(draft: Draft, table: Table, motion: Motion | None) -> float:
    if table.given("incidence"):
        return table.number("incidence")
    if motion is not None:
        return motion.value
    if table.section.key("incidence").default is None and not draft.at_fault(("motion", "incidence")):
        problem = "is missing; without [motion] incidence it is needed."
        draft.table_fault(table, "incidence", problem, 'Write for example incidence = "18 deg".')
    return table.number("incidence")


def _plate(draft: Draft, tables: Tables, motion: Motion | None) -> Plate | None:
    table = tables.get("plate")
    if table is None:
        return None
    incidence = _incidence(draft, table, motion)
    return Plate(table.optional("chord"), table.optional("span"), incidence, table.number("pivot"))


def _cylinder(tables: Tables) -> Cylinder | None:
    table = tables.get("cylinder")
    return None if table is None else Cylinder(table.optional("diameter"), table.optional("span"))


def _outline(draft: Draft, tables: Tables, motion: Motion | None) -> Outline | None:
    table = tables.get("outline")
    if table is None:
        return None
    points: tuple[tuple[float, float], ...] = ()
    name = table.get("file")
    if isinstance(name, str):
        try:
            points = read_outline(name, draft.folder)
        except ValueFault as error:
            table.bad.add("file")
            draft.value_fault(("outline", "file"), name, error)
    incidence = _incidence(draft, table, motion)
    return Outline(
        str(name or ""), points, table.optional("chord"), table.optional("span"), incidence, table.number("pivot")
    )


