"""Motions of a case file: ``{kind = "ramp", ...}`` or the name of a CSV table, to a `Motion`.

Values are radians for incidence and opening, chords for heave. Times are convective, chord / speed.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from ibsolver.case.csv_columns import Columns, read_columns
from ibsolver.case.draft import Draft, Place, Table
from ibsolver.case.encoder import check_increasing, check_size
from ibsolver.case.files import file_beside
from ibsolver.case.model import Motion
from ibsolver.case.schema import SECTION, Key, allowed
from ibsolver.case.values import Length, ValueFault, read_value

MOST_BYTES = 16_000_000
MOST_ROWS = 20_000
MOST_TIME = 1e6  # convective times
_USED = {
    "constant": {"value"},
    "ramp": {"from", "to", "begin", "duration", "smoothing", "smoothing_parameter"},
    "ramp-hold-return": {"from", "to", "begin", "duration", "hold", "smoothing", "smoothing_parameter"},
    "oscillation": {"mean", "amplitude", "frequency", "reduced_frequency", "phase", "begin"},
    "table": {"file"},
}
_NEEDED = {
    "constant": ("value",),
    "ramp": ("to",),
    "ramp-hold-return": ("to",),
    "oscillation": ("amplitude",),
    "table": ("file",),
}
_DEGREE = math.pi / 180
_VALUE_COLUMNS = {
    "angle": {"incidence_deg": _DEGREE, "incidence_rad": 1.0, "opening_deg": _DEGREE, "opening_rad": 1.0,
              "angle_deg": _DEGREE, "angle_rad": 1.0},
    "length": {"heave_chords": None, "heave_m": 1.0, "heave_mm": 1e-3},
}  # fmt: skip


@dataclass(frozen=True)
class Units:
    """What turns SI into convective units; None where the case is dimensionless, or at fault (`sound` is False)."""

    chord: float | None  # m
    speed: float | None  # m/s
    sound: bool = True


def read_motion(draft: Draft, place: Place, raw: object, key: Key, start: float, units: Units) -> Motion | None:
    """Return the motion, or None after noting its faults.

    Parameters
    ----------
    draft : Draft
        Collects the faults.
    place : tuple
        Where the motion stands in the file.
    raw : object
        TOML value: a table, or the name of a CSV file.
    key : Key
        Its key in the schema: dimension "angle" or "length", and range of the values.
    start : float
        Value that ``from`` and ``mean`` take if left out (rad or chords).
    units : Units
        Chord and speed, where known.
    """
    if isinstance(raw, str):
        raw = {"kind": "table", "file": raw}
    if not isinstance(raw, dict):
        problem = "must be a motion table or the name of a CSV file."
        draft.fault(place, raw, problem, f"Write for example {key.example}.")
        return None
    before = len(draft.faults)
    table = draft.read_table(SECTION["motion table"], place, raw)
    if not table.sound("kind"):
        return None
    _check_keys(draft, table)
    motion = _build(draft, table, key, start, units)
    return motion if len(draft.faults) == before else None


def _check_keys(draft: Draft, table: Table) -> None:
    """Note keys that do not belong to the kind of motion, and those that are missing."""
    kind = str(table.get("kind"))
    for name in table.raw:
        if name != "kind" and name not in _USED[kind] and table.sound(name):
            used = ", ".join(sorted(_USED[kind]))
            draft.table_fault(table, name, f'has no meaning for kind = "{kind}".', f"That kind takes: {used}.")
    for name in _NEEDED[kind]:
        if not table.given(name):
            draft.table_fault(table, name, f'is missing; kind = "{kind}" needs it.', _example(table, name))
    if kind == "oscillation" and table.given("frequency") == table.given("reduced_frequency"):
        problem = "give frequency or reduced_frequency, one of the two."
        draft.table_fault(table, "frequency", problem, "Write for example reduced_frequency = 0.5.")


def _example(table: Table, name: str) -> str:
    return f"Write for example {name} = {table.section.key(name).example}."


def _build(draft: Draft, table: Table, key: Key, start: float, units: Units) -> Motion:
    kind = str(table.get("kind"))
    if kind == "table":
        return _read_csv_motion(draft, table, key, units)

    def moved(name: str, default: float) -> float:
        return _moved(draft, table, name, key, units) if name in table.raw else default

    if kind == "constant":
        return Motion("constant", value=moved("value", 0.0))
    if kind == "oscillation":
        return Motion(
            "oscillation",
            value=moved("mean", start),
            amplitude=moved("amplitude", 0.0),
            reduced_frequency=_reduced_frequency(draft, table, units),
            phase=_number(table, "phase"),
            begin=_number(table, "begin"),
        )
    return Motion(
        kind,
        value=moved("from", start),
        to=moved("to", 0.0),
        begin=_number(table, "begin"),
        duration=_number(table, "duration"),
        hold=_number(table, "hold"),
        smoothing=str(table.get("smoothing")),
        smoothing_parameter=_number(table, "smoothing_parameter"),
    )


def _number(table: Table, name: str) -> float:
    value = table.get(name)
    return float(value) if isinstance(value, (int, float)) else 0.0


def _moved(draft: Draft, table: Table, name: str, key: Key, units: Units) -> float:
    """Return a value of the moved quantity in radians or chords, 0 after noting a fault."""
    one = _moved_key(name, key)
    try:
        value = read_value(table.raw[name], one)
    except ValueFault as error:
        table.bad.add(name)
        draft.value_fault(table.place + (name,), table.raw[name], error)
        return 0.0
    if isinstance(value, Length):
        return _chords(draft, table, name, value, key, units)
    return float(value) if isinstance(value, float) else 0.0


def _chords(draft: Draft, table: Table, name: str, length: Length, key: Key, units: Units) -> float:
    """Return a length of either sign in chords, 0 after noting a fault."""
    chords = length.in_chords(units.chord)
    if chords is None:
        if units.sound:
            problem = "is a length, but the case has no chord to divide it by."
            draft.table_fault(table, name, problem, "Write it in chords.")
        return 0.0
    if not abs(chords) <= key.high:
        problem = f"is {chords:.4g} chords; at most {key.high:g} are taken."
        draft.table_fault(table, name, problem, "Check its unit.")
        return 0.0
    return chords


def _moved_key(name: str, key: Key) -> Key:
    """Return the key of one value of a motion: an angle, or a length in chords that may be negative."""
    if key.dimension == "angle":
        return Key(name, "quantity", "", "angle", "deg", low=key.low, high=key.high, example='"10 deg"')
    return Key(name, "signed length", "", "length", "mm", low=key.low, high=key.high, example="0.1")


def _reduced_frequency(draft: Draft, table: Table, units: Units) -> float:
    """Return k = pi f c / U."""
    if not table.given("frequency"):
        return _number(table, "reduced_frequency")
    if units.chord is None or units.speed is None:
        if table.sound("frequency") and units.sound:
            problem = "needs a chord and a speed in SI units, and the case is dimensionless."
            draft.table_fault(table, "frequency", problem, "Write for example reduced_frequency = 0.5.")
        return 0.0
    reduced = math.pi * _number(table, "frequency") * units.chord / units.speed
    key = table.section.key("reduced_frequency")
    if table.sound("frequency") and not key.low <= reduced <= key.high:
        problem = f"gives a reduced frequency pi f chord / speed of {reduced:.4g}; {allowed(key)} is taken."
        draft.table_fault(table, "frequency", problem, "Check its unit.")
        return 0.0
    return reduced


def _read_csv_motion(draft: Draft, table: Table, key: Key, units: Units) -> Motion:
    name = table.get("file")
    if not isinstance(name, str):
        return Motion("table")
    try:
        return csv_motion(draft, name, key, units)
    except ValueFault as error:
        draft.value_fault(table.place + ("file",), name, error)
        return Motion("table")


def csv_motion(draft: Draft, name: str, key: Key, units: Units) -> Motion:
    """Return the motion of a CSV file whose header names the units, such as ``time_s, incidence_deg``.

    Raises
    ------
    ValueFault
        With file and line.
    """
    example = "0.5, 12.0" if key.dimension == "angle" else "0.5, 0.02"
    columns = read_columns(file_beside(name, draft.folder, MOST_BYTES), name, example)
    if not 2 <= len(columns.rows) <= MOST_ROWS:
        raise ValueFault(f"has {len(columns.rows)} rows; 2 to {MOST_ROWS} are read.", "Thin the table out.", name)
    times = _times(columns, units)
    check_increasing(columns, times)
    check_size(columns, times, MOST_TIME, "Check the unit of the time.")
    values = _values(columns, key, units)
    return Motion("table", value=values[0], times=tuple(times), values=tuple(values), file=name)


def _times(columns: Columns, units: Units) -> list[float]:
    """Return the times in convective units."""
    for index, title in enumerate(columns.header):
        if title == "time":
            return columns.column(index)
        if title in ("time_s", "time_ms"):
            if not units.sound:
                return columns.column(index)
            if units.chord is None or units.speed is None:
                raise _header_fault(columns, "has times in seconds, but the case is dimensionless.")
            factor = (1.0 if title == "time_s" else 1e-3) * units.speed / units.chord
            return [time * factor for time in columns.column(index)]
    raise _header_fault(columns, "has no header that names the time.")


def _values(columns: Columns, key: Key, units: Units) -> list[float]:
    """Return the values in radians or chords."""
    known = _VALUE_COLUMNS[key.dimension]
    for index, title in enumerate(columns.header):
        if title in known:
            factor = known[title] if title != "heave_chords" else 1.0
            if key.dimension == "length" and title != "heave_chords" and units.sound:
                if units.chord is None:
                    raise _header_fault(columns, "has heights in SI units, but the case has no chord.")
                factor = factor / units.chord
            return _in_range(columns, index, factor, key)
    raise _header_fault(columns, f"has no column that names the value: one of {', '.join(known)}.")


def _in_range(columns: Columns, index: int, factor: float, key: Key) -> list[float]:
    most = key.high * (_DEGREE if key.dimension == "angle" else 1.0)
    values = [value * factor for value in columns.column(index)]
    for row, value in enumerate(values):
        if abs(value) > most * (1 + 1e-12):
            unit = "deg" if key.dimension == "angle" else "chords"
            raise columns.fault(row, f"leaves the range -{key.high:g} to {key.high:g} {unit}.", "Check the units.")
    return values


def _header_fault(columns: Columns, problem: str) -> ValueFault:
    remedy = 'Head the columns with their units, such as "time_s, incidence_deg", or "time" in chords / speed.'
    return ValueFault(problem, remedy, columns.file, max(columns.lines[0] - 1, 1), ", ".join(columns.header)[:60])
