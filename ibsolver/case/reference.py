"""Fluid, reference length and tow of a case file: what leads to the Reynolds number."""

from __future__ import annotations

from dataclasses import replace

from ibsolver.case import fluids
from ibsolver.case.draft import ABSENT, Draft, Table
from ibsolver.case.encoder import Record, normalised, read_encoder
from ibsolver.case.model import Fluid, Tow
from ibsolver.case.schema import SECTION
from ibsolver.case.values import ValueFault

Tables = dict[str, Table]

BODIES = {"plate": "chord", "cylinder": "diameter", "outline": "chord"}


def read_fluid(draft: Draft, table: Table) -> Fluid | None:
    kind = table.get("kind")
    takes = {
        "fresh water": ("temperature",),
        "glycerol solution": ("temperature", "glycerol_mass_fraction"),
        "air": ("temperature",),
        "given": ("density", "kinematic_viscosity"),
    }
    if not isinstance(kind, str):
        return None
    needed = takes[kind]
    allowed = needed + (("temperature",) if kind == "given" else ())
    for name in table.raw:
        if name != "kind" and name not in allowed and table.sound(name):
            remedy = f"That kind takes {' and '.join(needed)}."
            draft.table_fault(table, name, f'has no meaning for kind = "{kind}".', remedy)
    for name in needed:
        if not table.given(name):
            example = f"Write for example {name} = {table.section.key(name).example}."
            draft.table_fault(table, name, f'is missing; kind = "{kind}" needs it.', example)
    if not table.sound(*needed):
        return None
    return _fluid_of(draft, table, kind)


def _fluid_of(draft: Draft, table: Table, kind: str) -> Fluid | None:
    try:
        if kind == "fresh water":
            return fluids.fresh_water(table.number("temperature"))
        if kind == "air":
            return fluids.air(table.number("temperature"))
        if kind == "glycerol solution":
            fraction = table.number("glycerol_mass_fraction")
            return fluids.glycerol_solution(table.number("temperature"), fraction)
    except fluids.FluidError as error:
        draft.table_fault(table, error.key, error.problem, error.suggestion)
        return None
    return fluids.given(
        table.number("density"), table.number("kinematic_viscosity"), table.optional("temperature")
    )


def read_tow(draft: Draft, tables: Tables, body: Table | None, fluid: Fluid | None, length: float | None) -> Tow:
    table = tables["tow"]
    record = _encoder(draft, table)
    dimensional = "fluid" in tables
    speed, reynolds = table.optional("speed"), table.optional("reynolds")
    if table.given("speed") and table.given("reynolds"):
        draft.table_fault(table, "reynolds", "is given beside speed; one follows from the other.", "Leave one out.")
    elif not table.given("speed") and not table.given("reynolds"):
        if record is not None and dimensional:
            speed = record.final_speed
        elif not (table.given("profile") and dimensional) and not draft.at_fault(("tow",)):
            example = 'speed = "20 mm/s"' if dimensional else "reynolds = 1200"
            draft.fault(("tow",), ABSENT, "needs speed or reynolds.", f"Write for example {example}.")
    _check_reference(draft, tables, body, table)
    if dimensional and fluid and length:
        if reynolds is None and speed is not None:
            reynolds = _reynolds_of(draft, table, speed * length / fluid.kinematic_viscosity)
        elif speed is None and reynolds is not None:
            speed = reynolds * fluid.kinematic_viscosity / length
    tow = Tow(
        speed=speed if dimensional else None,
        reynolds=reynolds or 1.0,
        start=str(table.get("start") or "smooth"),
        start_distance=table.number("start_distance") or 0.5,
        coefficient_speed=str(table.get("coefficient_speed") or "final"),
    )
    if record is None:
        return tow
    return _with_profile(draft, table, tow, record, length)


def _check_reference(draft: Draft, tables: Tables, body: Table | None, table: Table) -> None:
    """Note what is missing or too much for the step between SI and dimensionless."""
    dimensional = "fluid" in tables
    if table.given("speed") and not dimensional and table.sound("speed"):
        problem = "needs [fluid]: without a viscosity there is no Reynolds number."
        draft.table_fault(table, "speed", problem, "Add [fluid], or write reynolds instead.")
    if not dimensional:
        return
    if body is None:
        if not draft.at_fault(("domain", "width"), ("domain", "height")) and tables["domain"].given("width"):
            problem = "has no meaning for a box without a body: there is no chord."
            draft.fault(("fluid",), ABSENT, problem, "Leave [fluid] out and write tow.reynolds.")
        return
    name = BODIES[body.section.name]
    if not body.given(name):
        example = body.section.key(name).example
        problem = "is missing; with [fluid] it is needed for the Reynolds number."
        draft.table_fault(body, name, problem, f"Write for example {name} = {example}.")


def _reynolds_of(draft: Draft, table: Table, reynolds: float) -> float:
    least, most = SECTION["tow"].key("reynolds").low, SECTION["tow"].key("reynolds").high
    name = "speed" if table.given("speed") else "profile"
    if reynolds < least:
        problem = f"gives a Reynolds number of {reynolds:.4g}; at least {least:g} is taken."
        draft.table_fault(table, name, problem, "Check the units of speed, chord and viscosity.")
    elif reynolds > most:
        problem = f"gives a Reynolds number of {reynolds:.4g}; at most {most:g} is taken."
        remedy = "A two-dimensional laminar flow is not a model of the tank there. Tow slower or use a smaller chord."
        draft.table_fault(table, name, problem, remedy)
    return reynolds


def _encoder(draft: Draft, table: Table) -> Record | None:
    """Return the encoder's record, or None."""
    name = table.get("profile")
    if not isinstance(name, str):
        return None
    for other in ("start", "start_distance"):
        if table.given(other):
            problem = "is given beside profile; the encoder's own start is used."
            draft.table_fault(table, other, problem, "Leave one of the two out.")
    try:
        record = read_encoder(name, draft.folder)
    except ValueFault as error:
        table.bad.add("profile")
        draft.value_fault(("tow", "profile"), name, error)
        return None
    if not record.final_speed > 0:
        problem = "has no forward speed in its last tenth, which is the final speed of the tow."
        draft.table_fault(table, "profile", problem, "Export the record up to the end of the steady tow.")
        return None
    return record


def _with_profile(draft: Draft, table: Table, tow: Tow, record: Record, length: float | None) -> Tow:
    """Return the tow with the record in convective units."""
    if tow.speed is None or length is None:
        if not draft.faults:
            problem = "needs [fluid] and a chord, to turn seconds and metres into convective times and chords."
            draft.table_fault(table, "profile", problem, "Add them, or use start.")
        return tow
    name = str(table.get("profile"))
    return replace(tow, profile_file=name, profile=normalised(record, tow.speed, length))


