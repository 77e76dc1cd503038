"""Columns of numbers from a CSV file: comma between fields, point in numbers, ``#`` before comments."""

from __future__ import annotations

import csv
import math
import re
from dataclasses import dataclass
from pathlib import Path

from ibsolver.case.files import read_text_file
from ibsolver.case.values import ValueFault, printable, show

_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?$")
_NOT_FINITE = re.compile(r"[+-]?(nan|inf|infinity)$", re.IGNORECASE)


@dataclass(frozen=True)
class Columns:
    """Rows of numbers, the line each stands on, and the header (empty where the file has none)."""

    file: str
    header: tuple[str, ...]
    rows: list[tuple[float, ...]]
    lines: list[int]

    def column(self, index: int) -> list[float]:
        """Return one column."""
        return [row[index] for row in self.rows]

    def fault(self, row: int, problem: str, suggestion: str = "") -> ValueFault:
        """Return a fault at a row, to be raised."""
        found = ", ".join(f"{number:g}" for number in self.rows[row])
        return ValueFault(problem, suggestion, self.file, self.lines[row], found)


def read_columns(path: Path, name: str, example: str) -> Columns:
    """Read a CSV file.

    Parameters
    ----------
    path : Path
        File, already known to be plain and of an acceptable size.
    name : str
        As the case names it, for messages.
    example : str
        A correct row, for messages.

    Raises
    ------
    ValueFault
        With file, line and what is wrong: separators, decimal commas, fields that are no numbers, ragged rows.
    """
    try:
        text = read_text_file(path)
    except ValueFault as error:
        raise ValueFault(error.problem, error.suggestion, name) from None
    columns = Columns(name, (), [], [])
    for number, line in enumerate(text.splitlines(), 1):
        content = line.strip()
        if not content or content.startswith("#"):
            continue
        fields = _fields(content, name, number, example)
        if not columns.rows and not columns.header and _is_header(fields):
            columns = Columns(name, tuple(field.lower() for field in fields), [], [])
            continue
        columns.rows.append(_numbers(fields, columns, number, example))
        columns.lines.append(number)
    if not columns.rows:
        raise ValueFault("holds no rows of numbers.", f"Write rows such as: {example}", name)
    return columns


def _fields(line: str, name: str, number: int, example: str) -> list[str]:
    remedy = f"Write rows such as: {example}"
    if ";" in line.split("#")[0]:
        raise ValueFault("has semicolons between its fields.", remedy, name, number, show(line))
    try:
        fields = next(csv.reader([line], strict=True, skipinitialspace=True))
    except (csv.Error, StopIteration):
        raise ValueFault("has quotes that do not match.", remedy, name, number, show(line)) from None
    fields[-1] = fields[-1].split("#")[0]
    return [field.strip() for field in fields]


def _is_header(fields: list[str]) -> bool:
    """Return whether the first row names the columns; words for missing numbers do not make a header."""
    return all(re.match(r"[A-Za-z_]", field) and not _NOT_FINITE.match(field) for field in fields)


def _numbers(fields: list[str], columns: Columns, number: int, example: str) -> tuple[float, ...]:
    width = len(columns.header) or (len(columns.rows[0]) if columns.rows else len(fields))
    remedy = f"Write rows such as: {example}"
    found = printable(", ".join(fields))[:60]
    if any(re.fullmatch(r"[+-]?[0-9]+,[0-9]+", field) for field in fields) or _halves(fields, columns, example):
        raise ValueFault("has decimal commas.", f"Write decimal points. {remedy}", columns.file, number, found)
    if len(fields) != width:
        raise ValueFault(f"has {len(fields)} fields where {width} are due.", remedy, columns.file, number, found)
    return tuple(_number(field, columns.file, number, remedy) for field in fields)


def _halves(fields: list[str], columns: Columns, example: str) -> bool:
    """Return whether a row looks like numbers cut in two at their decimal commas."""
    doubled = len(fields) == 2 * (example.count(",") + 1) and len(fields) != len(columns.header)
    return doubled and all(re.fullmatch(r"[+-]?[0-9]+", field) for field in fields)


def _number(field: str, name: str, line: int, remedy: str) -> float:
    if _NOT_FINITE.match(field):
        raise ValueFault("is not a finite number.", "Leave such rows out.", name, line, show(field))
    if not _NUMBER.match(field):
        raise ValueFault("is not a number.", remedy, name, line, show(field))
    value = float(field)
    if not math.isfinite(value):
        raise ValueFault("is too large to be a number.", remedy, name, line, show(field))
    return value
