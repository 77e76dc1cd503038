"""A case while it is being read: raw values, checked values, lines, and every fault found so far."""

from __future__ import annotations

import difflib
from collections.abc import Iterable
from dataclasses import dataclass, field
from pathlib import Path

from ibsolver.case.lines import line_of
from ibsolver.case.schema import FILE_SECTIONS, Key, Section
from ibsolver.case.values import ValueFault, printable, read_value, show
from ibsolver.errors import Fault

Place = tuple[str | int, ...]

MOST_FAULTS = 200


@dataclass
class Table:
    """One table of the file: what was written (`raw`), what it means (`values`), which keys are at fault (`bad`).

    `meant` holds keys that were probably meant by unknown ones: they are not reported as missing on top.
    """

    section: Section
    place: Place
    raw: dict[str, object]
    values: dict[str, object] = field(default_factory=dict)
    bad: set[str] = field(default_factory=set)
    meant: set[str] = field(default_factory=set)

    def given(self, *names: str) -> bool:
        """Return whether every one of the keys is written in the file, if only with a slip in its name."""
        return all(name in self.raw or name in self.meant for name in names)

    def sound(self, *names: str) -> bool:
        """Return whether none of the keys is at fault."""
        return not self.bad.intersection(names)

    def get(self, name: str) -> object:
        """Return the checked value, the default, or None."""
        return self.values.get(name)

    def optional(self, name: str) -> float | None:
        """Return a checked number, or None where it is absent or at fault."""
        value = self.values.get(name)
        return float(value) if isinstance(value, (int, float)) else None

    def number(self, name: str) -> float:
        """Return a checked number, or 0 where it is absent or at fault."""
        return self.optional(name) or 0.0

    def fields(self) -> dict[str, object]:
        """Return the checked values by key, for a dataclass whose fields are named like the keys."""
        return {key.name: self.values[key.name] for key in self.section.keys if key.name in self.values}


class Draft:
    """Collects faults for one file."""

    def __init__(self, file: str, folder: Path | None, lines: dict[Place, int]):
        self.file = file
        self.folder = folder
        self.lines = lines
        self.faults: list[Fault] = []
        self.places: set[Place] = set()
        self.untold = 0

    def fault(self, place: Place, value: object, problem: str, suggestion: str = "") -> None:
        """Note a fault at `place`; `value` is raw, or `ABSENT`."""
        if place:
            self.places.add(place)
        found = "" if value is ABSENT else show(value)
        self.faults.append(Fault(self.file, line_of(self.lines, place), dotted(place), found, problem, suggestion))

    def at_fault(self, *places: Place) -> bool:
        """Return whether a fault lies at or below one of the places, or at a parent of it."""
        return any(_related(bad, place) for bad in self.places for place in places)

    def flooded(self) -> bool:
        """Return whether there are more faults than are shown; one more is then counted, and need not be told."""
        if len(self.faults) < MOST_FAULTS:
            return False
        self.untold += 1
        return True

    def limited(self) -> list[Fault]:
        """Return the faults in the order of the file; a flood of them is cut with a last one that says so."""
        ordered = sorted(self.faults, key=lambda fault: (fault.file != self.file, fault.line))
        rest = max(0, len(ordered) - MOST_FAULTS) + self.untold
        if not rest:
            return ordered
        return ordered[:MOST_FAULTS] + [Fault(self.file, 0, "", "", f"{rest} more faults are not shown.")]

    def read_table(self, section: Section, place: Place, raw: dict[str, object]) -> Table:
        """Check every key of a table against its section; unknown keys are faults."""
        table = Table(section, place, raw)
        known = {key.name: key for key in section.keys}
        for name, value in raw.items():
            if name in known:
                self._read_key(table, known[name], value)
            elif not self.flooded():
                meant = near_key(name, section)
                table.meant.update(meant)
                table.bad.update([name, *meant])
                self.fault(place + (name,), value, *unknown_key(name, section))
                self.places.update(place + (one,) for one in meant)
        for key in section.keys:
            if key.name not in raw:
                self._read_absent(table, key)
        return table

    def _read_key(self, table: Table, key: Key, value: object) -> None:
        try:
            table.values[key.name] = read_value(value, key)
        except ValueFault as error:
            table.bad.add(key.name)
            self.value_fault(table.place + (key.name,), value, error)

    def _read_absent(self, table: Table, key: Key) -> None:
        if key.name in table.meant:
            return
        if key.required:
            table.bad.add(key.name)
            remedy = f"Write for example {key.name} = {key.example}."
            self.fault(table.place + (key.name,), ABSENT, "is missing.", remedy)
        elif key.default is not None:
            default = list(key.default) if isinstance(key.default, tuple) else key.default
            table.values[key.name] = read_value(default, key)

    def value_fault(self, place: Place, value: object, error: ValueFault) -> None:
        """Note a fault of a value, or of the other file that the value names."""
        if error.file:
            self.places.add(place)
            key = "row" if error.found else ""
            self.faults.append(Fault(error.file, error.line, key, error.found, error.problem, error.suggestion))
        else:
            self.fault(place, value, error.problem, error.suggestion)

    def table_fault(self, table: Table, name: str, problem: str, suggestion: str = "") -> None:
        """Note a fault of one key of a table."""
        table.bad.add(name)
        self.fault(table.place + (name,), table.raw.get(name, ABSENT), problem, suggestion)


class _Absent:
    """Marks a value that is missing from the file."""


ABSENT = _Absent()


def dotted(place: Place) -> str:
    """Return a place as text: ``flap[0].hinge``."""
    text = ""
    for part in place:
        if isinstance(part, int):
            text += f"[{part}]"
        else:
            text += ("." if text else "") + printable(part[:60])
    return text


def _related(one: Place, other: Place) -> bool:
    size = min(len(one), len(other))
    return one[:size] == other[:size]


def unknown_key(name: str, section: Section) -> tuple[str, str]:
    """Return problem and suggestion for a key that the section does not have."""
    where = f"[{section.name}]" if section.name and not section.nested else "this place"
    problem = f"is not a key of {where if not section.nested else 'a ' + section.name}."
    near = near_key(name, section)
    if near:
        return problem, f"Did you mean {near[0]}?"
    if not section.nested and homes(name):
        return problem, homes(name)
    return problem, f"Known keys: {', '.join(key.name for key in section.keys)}."


def near_key(name: str, section: Section) -> list[str]:
    """Return the key of the section that `name` probably means, in a list, or nothing."""
    synonym = [key.name for key in section.keys if name.lower() in key.synonyms]
    return synonym[:1] or closest(name, [key.name for key in section.keys])


def homes(name: str) -> str:
    """Return a sentence that tells in which sections a key, or the key it is a synonym of, belongs; or nothing."""
    found = [
        f"[{section.name}]" + ("" if key.name == name else f" as {key.name}")
        for section in FILE_SECTIONS
        for key in section.keys
        if section.name and (key.name == name or name.lower() in key.synonyms)
    ]
    return f"It belongs to {' or '.join(found)}." if found else ""


def closest(name: str, known: Iterable[str]) -> list[str]:
    """Return the known name most like `name`, in a list, or nothing."""
    return difflib.get_close_matches(name[:60].lower(), list(known), 1, 0.6)
