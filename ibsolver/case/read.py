"""Read a case file: text to `Case`, or every fault of it at once."""

from __future__ import annotations

import os
import re
import stat
import tomllib
from pathlib import Path

from ibsolver.case.build import build_case
from ibsolver.case.consistency import problems
from ibsolver.case.draft import ABSENT, Draft, Place, Table, closest, homes
from ibsolver.case.files import decoded, reason
from ibsolver.case.lines import scan_lines
from ibsolver.case.model import Case
from ibsolver.case.schema import FILE_SECTIONS, SECTION, Section
from ibsolver.case.values import ValueFault, printable, show
from ibsolver.errors import CaseError, Fault

MOST_BYTES = 1_000_000
MOST_LINE = 4000
MOST_DOTS = 60  # dotted keys cost the parser time with the square of their depth
MOST_FLAPS = 20
_QUOTED = re.compile(r'"[^"]*"|\'[^\']*\'|#.*')
_ALWAYS = ("tow", "tank", "domain", "initial", "grid", "run", "output")


def load_case(path: str | os.PathLike[str]) -> Case:
    """Read a case file.

    Parameters
    ----------
    path : str or path
        TOML file in UTF-8, at most 1 MB. Files it names are looked for beside it.

    Returns
    -------
    Case
        Complete and checked.

    Raises
    ------
    CaseError
        With every fault found: file, line, key, value, what is allowed, what to try.
    """
    name = os.fspath(path)
    try:
        text = decoded(_bytes_of(name))
    except ValueFault as error:
        raise CaseError([Fault(name, 0, "", "", error.problem, error.suggestion)]) from None
    return read_case_text(text, name, Path(name).parent)


def _bytes_of(name: str) -> bytes:
    """Return the bytes of a plain file of acceptable size; devices and pipes are not opened."""
    try:
        status = os.stat(name)
        if stat.S_ISDIR(status.st_mode):
            raise ValueFault("is a folder.", "Name a case file, such as cases/towed_plate.toml.")
        if not stat.S_ISREG(status.st_mode):
            raise ValueFault("is not a plain file.", "Name a case file, such as cases/towed_plate.toml.")
        if status.st_size > MOST_BYTES:
            problem = f"has {status.st_size} bytes; a case file has at most {MOST_BYTES}."
            raise ValueFault(problem, "Is this a case file?")
        with open(name, "rb") as file:
            return file.read(MOST_BYTES + 1)
    except FileNotFoundError:
        raise ValueFault("is not there.", "Check the name; `ibsolver new plate` writes a case to start from.") from None
    except (OSError, ValueError) as error:
        raise ValueFault(f"cannot be read: {reason(error)}.", "Check its name and rights.") from None


def read_case_text(text: str, name: str = "case.toml", folder: str | os.PathLike[str] | None = None) -> Case:
    """Read a case from a text.

    Parameters
    ----------
    text : str
        TOML.
    name : str
        Name for messages.
    folder : path, optional
        Where the files it names lie; without it a case must name none.

    Raises
    ------
    CaseError
        With every fault found.
    """
    data = _parsed(text, name)
    draft = Draft(name, None if folder is None else Path(folder), scan_lines(text))
    tables = _read_sections(draft, data)
    flap_tables = _read_flaps(draft, data)
    case = build_case(draft, tables, flap_tables)
    for found in problems(case, draft.at_fault):
        draft.fault(found.place, _written(data, found.place), found.problem, found.suggestion)
    if draft.faults:
        raise CaseError(draft.limited())
    object.__setattr__(case, "text", text)
    object.__setattr__(case, "file", name)
    return case


def _parsed(text: str, name: str) -> dict[str, object]:
    """Return the plain TOML data."""
    _guard(text, name)
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise CaseError([_syntax_fault(text, name, str(error))]) from None
    except RecursionError:
        raise CaseError([Fault(name, 0, "", "", "is nested too deeply.", "A case needs two levels.")]) from None
    except (ValueError, OverflowError):
        raise CaseError([_huge_number(text, name)]) from None


def _guard(text: str, name: str) -> None:
    """Refuse texts that would keep the parser busy for long."""
    if len(text) > MOST_BYTES:
        raise CaseError([Fault(name, 0, "", "", "is longer than a million characters.", "Is this a case file?")])
    for number, line in enumerate(text.split("\n"), 1):
        if len(line) > MOST_LINE:
            problem = f"the line has {len(line)} characters; at most {MOST_LINE} are read."
            raise CaseError([Fault(name, number, "", show(line, 30), problem, "Break it up.")])
        if line.count(".") > MOST_DOTS and _QUOTED.sub("", line).count(".") > MOST_DOTS:
            problem = "is nested too deeply."
            raise CaseError([Fault(name, number, "", show(line, 30), problem, "A case needs two levels.")])


def _huge_number(text: str, name: str) -> Fault:
    lines = text.split("\n")
    number = next((i for i, line in enumerate(lines, 1) if re.search(r"[0-9_]{300,}", line)), 0)
    return Fault(name, number, "", "", "holds a number that is too large.", "Write a number of a few digits.")


def _syntax_fault(text: str, name: str, message: str) -> Fault:
    """Return the parser's complaint as a fault, with a remedy where the line shows a usual slip."""
    place = re.search(r" \(at line (\d+), column (\d+)\)$", message)
    lines = text.split("\n")
    number = int(place.group(1)) if place else max(len(lines), 1)
    problem = re.sub(r" \(at [^()]*\)$", "", message)
    line = lines[number - 1] if number <= len(lines) else ""
    slip = _slip(line)
    if slip is None:
        problem = f"is not valid TOML: {problem[:1].lower()}{problem[1:]}."
        return Fault(name, number, "text" if line.strip() else "", show(line.strip())[1:-1], problem)
    key, value, problem, suggestion = slip
    return Fault(name, number, key, show(value)[1:-1], problem, suggestion)


def _slip(line: str) -> tuple[str, str, str, str] | None:
    """Return (key, value, problem, suggestion) for slips that happen often, or None."""
    match = re.match(r"\s*([A-Za-z_]+)\s*=\s*([-+]?[0-9]+),([0-9]+)\s*(#.*)?$", line)
    if match:
        remedy = f"Write {match[1]} = {match[2]}.{match[3]}."
        return match[1], f"{match[2]},{match[3]}", "has a decimal comma.", remedy
    match = re.match(r"\s*([A-Za-z_]+)\s*=\s*([-+.,0-9eE]+\s*[A-Za-zµ°%][^\"#=]*?)\s*(#.*)?$", line)
    if match:
        remedy = f'Write {match[1]} = "{printable(match[2].replace(",", "."))}".'
        return match[1], match[2], "is a value with a unit without quotes.", remedy
    match = re.match(r"\s*([A-Za-z_]+)\s*=\s*([A-Za-z][^\"'#=]*?)\s*(#.*)?$", line)
    if match:
        return match[1], match[2], "is a text without quotes.", f'Write {match[1]} = "{printable(match[2])}".'
    return None


def _read_sections(draft: Draft, data: dict[str, object]) -> dict[str, Table]:
    """Return the tables of all sections but [[flap]]; those with defaults throughout are always there."""
    top = {name: value for name, value in data.items() if name not in SECTION or name == ""}
    tables = {"": _read_top(draft, top)}
    for section in FILE_SECTIONS:
        if not section.name or section.array:
            continue
        raw = data.get(section.name)
        if raw is None and section.name not in _ALWAYS:
            continue
        if raw is not None and not isinstance(raw, dict):
            draft.fault((section.name,), raw, "must be a section of its own.", f"Write [{section.name}] once.")
            raw = {} if section.name in _ALWAYS else None
        if raw is not None or section.name in _ALWAYS:
            tables[section.name] = draft.read_table(section, (section.name,), raw or {})
    return tables


def _read_top(draft: Draft, top: dict[str, object]) -> Table:
    """Read the top of the file; unknown sections are told apart from unknown keys."""
    known = [section.name for section in FILE_SECTIONS if section.name]
    section: Section = SECTION[""]
    for name, value in list(top.items()):
        if name == "title":
            continue
        del top[name]
        if draft.flooded():
            continue
        written = "section" if isinstance(value, dict) else "list of sections" if isinstance(value, list) else "key"
        draft.fault((name,), ABSENT if written == "section" else value, *_unknown_top(name, written, known))
    return draft.read_table(section, (), top)


def _unknown_top(name: str, written: str, known: list[str]) -> tuple[str, str]:
    problem = f"is not a {written} of a case."
    if written == "key":
        if closest(name, ["title"]) or name == "name":
            return problem, "Did you mean title?"
        if homes(name):
            return problem, homes(name)
    near = closest(name, known)
    if near:
        return problem, f"Did you mean [{near[0]}]?" if near[0] != "flap" else "Did you mean [[flap]]?"
    return problem, f"Known sections: {', '.join(known)}."


def _read_flaps(draft: Draft, data: dict[str, object]) -> list[Table]:
    raw = data.get("flap")
    if raw is None:
        return []
    if not isinstance(raw, list) or not all(isinstance(item, dict) for item in raw):
        draft.fault(("flap",), ABSENT, "must be written as a list of sections.", "Write [[flap]], with two brackets.")
        raw = [raw] if isinstance(raw, dict) else []
    if len(raw) > MOST_FLAPS:
        draft.fault(("flap",), ABSENT, f"{len(raw)} flaps are too many; at most {MOST_FLAPS}.", "Leave some out.")
    section = SECTION["flap"]
    return [draft.read_table(section, ("flap", index), item) for index, item in enumerate(raw[:MOST_FLAPS])]


def _written(data: object, place: Place) -> object:
    """Return the raw value at a place, or `ABSENT` where there is none or the place is a whole section."""
    if len(place) < 2 or isinstance(place[-1], int):
        return ABSENT
    for part in place:
        if isinstance(data, dict) and part in data:
            data = data[part]
        elif isinstance(data, list) and isinstance(part, int) and part < len(data):
            data = data[part]
        else:
            return ABSENT
    return data
