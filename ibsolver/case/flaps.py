"""One flap of a case file."""

from __future__ import annotations

import math
import re
from dataclasses import replace

from ibsolver.case.draft import Draft, Table
from ibsolver.case.model import Flap, Motion
from ibsolver.case.motions import Units, read_motion
from ibsolver.case.values import ValueFault, read_value

_NAME = re.compile(r"[A-Za-z0-9_-]{1,40}")
_FREE_ONLY = ("thickness", "density", "mass_per_area", "spring", "damping", "rest", "limits", "opening_rate")
HARMLESS = 0.3  # rad, an opening in place of one at fault


def read_flap(draft: Draft, table: Table, units: Units) -> Flap:
    """Return a flap; faults go to the draft."""
    mount = str(table.get("mount") or "fixed")
    name = str(table.get("name") or "")
    if table.sound("name") and not _NAME.fullmatch(name):
        remedy = 'Use letters, digits, _ and -, at most 40; for example "front".'
        draft.table_fault(table, "name", "is not usable as a column's name.", remedy)
    opening, motion = _opening(draft, table, mount, units)
    _check_free(draft, table, mount)
    return Flap(
        name=name,
        hinge=table.number("hinge"),
        side=str(table.get("side") or "upper"),
        length=table.number("length") or 0.1,
        mount=mount,
        opening=opening,
        on=str(table.get("on") or "plate"),
        motion=motion,
        thickness=table.optional("thickness"),
        density=table.optional("density"),
        mass_per_area=table.optional("mass_per_area"),
        spring=table.number("spring"),
        damping=table.number("damping"),
        rest=table.number("rest"),
        limits=table.get("limits"),
        opening_rate=table.number("opening_rate"),
    )


def _opening(draft: Draft, table: Table, mount: str, units: Units) -> tuple[float, Motion | None]:
    """Return the opening at the start and, for a driven flap, its motion."""
    if "opening" not in table.raw:
        return HARMLESS, None
    raw, key, place = table.raw["opening"], table.section.key("opening"), table.place + ("opening",)
    if not _is_motion(raw):
        value = _angle(draft, table, raw)
        return value, Motion("constant", value=value) if mount == "driven" else None
    if mount != "driven":
        problem = f'is a motion, but mount = "{mount}".'
        draft.table_fault(table, "opening", problem, 'Write mount = "driven", or an angle such as "20 deg".')
        return HARMLESS, None
    motion = read_motion(draft, place, raw, key, 0.0, units)
    if motion is None:
        table.bad.add("opening")
        return HARMLESS, None
    return start_value(motion), motion


def _is_motion(raw: object) -> bool:
    """Return whether an opening is written as a motion table or the name of a CSV file."""
    return isinstance(raw, dict) or (isinstance(raw, str) and raw.strip().lower().endswith((".csv", ".txt", ".dat")))


def start_value(motion: Motion) -> float:
    """Return the value of a motion at time 0, or for a ramp before it begins."""
    if motion.kind == "oscillation":
        return motion.value + motion.amplitude * math.sin(motion.phase)
    return motion.value


def _angle(draft: Draft, table: Table, raw: object) -> float:
    """Return a plain opening (rad)."""
    try:
        value = read_value(raw, replace(table.section.key("opening"), kind="quantity"))
    except ValueFault as error:
        draft.table_fault(table, "opening", error.problem, error.suggestion)
        return HARMLESS
    return float(value) if isinstance(value, float) else HARMLESS


def _check_free(draft: Draft, table: Table, mount: str) -> None:
    """Note keys of a free flap on one that is not free, and what a free flap lacks."""
    if not table.sound("mount"):
        return
    if mount != "free":
        for name in _FREE_ONLY:
            if table.given(name) and table.sound(name):
                problem = f'has no meaning for mount = "{mount}".'
                draft.table_fault(table, name, problem, 'Leave it out, or write mount = "free".')
        return
    if table.given("mass_per_area") and (table.given("thickness") or table.given("density")):
        problem = "is given beside thickness and density."
        draft.table_fault(table, "mass_per_area", problem, "Give either the one or the two.")
    elif table.given("thickness") != table.given("density"):
        missing = "density" if table.given("thickness") else "thickness"
        example = f"Write for example {missing} = {table.section.key(missing).example}."
        draft.table_fault(table, missing, "is missing; the mass of the flap is thickness times density.", example)
    elif not table.given("thickness") and not table.given("mass_per_area"):
        problem = "is missing; a free flap needs a mass (0 is allowed)."
        draft.table_fault(table, "mass_per_area", problem, 'Write for example mass_per_area = "1.1 kg/m2".')


