"""`history.csv`: one row a step, appended as the run goes; a torn last line is dropped on reading."""

from __future__ import annotations

import contextlib
import os
import time
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from ibsolver.errors import StorageError
from ibsolver.runfile.atomic import storage_error, write_bytes
from ibsolver.runfile.layout import SCHEMA

FLUSH_EVERY = 2.0  # s


class HistoryWriter:
    """Appends rows to a history file.

    Parameters
    ----------
    path : path
    columns : mapping of str to str
        Column name to meaning with its unit; the order is that of the file.
    comments : mapping of str to str
        Further facts for the head of the file.
    resume_after : int or None
        None begins a new file. Otherwise rows after this step are cut off, and writing goes on behind it.
    """

    def __init__(
        self,
        path: Path | str,
        columns: Mapping[str, str],
        comments: Mapping[str, str] | None = None,
        resume_after: int | None = None,
    ):
        self.path = Path(path)
        self._names = tuple(columns)
        self._lines: list[str] = []
        self._flushed = time.monotonic()
        if resume_after is None:
            write_bytes(self.path, _head(columns, comments or {}).encode())
        else:
            cut_after(self.path, resume_after)

    def append(self, row: Mapping[str, float]) -> None:
        """Add one row; it reaches the disk within about two seconds."""
        self._lines.append(",".join(_number(row[name]) for name in self._names) + "\n")
        if time.monotonic() - self._flushed > FLUSH_EVERY:
            self.flush()

    def flush(self, sync: bool = False) -> None:
        """Write what waits; with `sync` make it durable.

        Raises
        ------
        StorageError
            If the disk is full; what was half written is taken back, so that trying again leaves no damaged line.
        """
        text = "".join(self._lines)
        before = None
        try:
            with open(self.path, "ab") as file:
                before = file.tell()
                file.write(text.encode())
                file.flush()
                if sync:
                    os.fsync(file.fileno())
        except OSError as error:
            if before is not None:
                with contextlib.suppress(OSError):
                    os.truncate(self.path, before)
            raise storage_error(error, self.path, len(text)) from error
        self._lines.clear()
        self._flushed = time.monotonic()


def _head(columns: Mapping[str, str], comments: Mapping[str, str]) -> str:
    lines = [f"# ibsolver history, schema {SCHEMA}"]
    lines += [f"# {name}: {text}" for name, text in comments.items()]
    lines += [f"# {name}: {meaning}" for name, meaning in columns.items()]
    return "\n".join([*lines, ",".join(columns)]) + "\n"


def _number(value: float) -> str:
    return str(value) if isinstance(value, int) else format(value, ".17g")


@dataclass(frozen=True, eq=False)
class History:
    """A history read back.

    Parameters
    ----------
    columns : dict of str to ndarray
        One array a column, shape (rows,).
    meanings : dict of str to str
        Meaning and unit of each column.
    """

    columns: dict[str, np.ndarray]
    meanings: dict[str, str]

    def __getitem__(self, name: str) -> np.ndarray:
        if name not in self.columns:
            raise KeyError(f"{name}: no such column; there are {', '.join(self.columns)}.")
        return self.columns[name]

    def __contains__(self, name: str) -> bool:
        return name in self.columns

    def __len__(self) -> int:
        return len(next(iter(self.columns.values()), ()))


def read_history(path: Path | str) -> History:
    """Return the history in a file; a torn last line is dropped.

    Raises
    ------
    StorageError
        If the file is missing, or damaged elsewhere than in its last line (with the line's number).
    """
    path = Path(path)
    lines = _whole_lines(path)
    first = next((k for k, line in enumerate(lines) if not line.startswith("#")), len(lines))
    names = tuple(lines[first].split(",")) if first < len(lines) else ()
    meanings = {}
    for line in lines[:first]:
        name, _, meaning = line[1:].strip().partition(": ")
        meanings[name] = meaning
    if not names or names[0] != "step":
        raise StorageError(f"{path}: no header with column names; not a history of ours.")
    rows = np.empty((len(lines) - first - 1, len(names)))
    for k, line in enumerate(lines[first + 1 :]):
        values = line.split(",")
        try:
            if len(values) != len(names):
                raise ValueError
            rows[k] = [float(value) for value in values]
        except ValueError:
            raise StorageError(
                f"{path}:{first + 2 + k}: damaged line, {len(names)} numbers were expected: {line[:60]!r}."
            ) from None
    columns = {name: np.ascontiguousarray(rows[:, k]) for k, name in enumerate(names)}
    return History(columns, {name: meanings.get(name, "") for name in names})


def _whole_lines(path: Path) -> list[str]:
    """Return the lines that end with a line feed."""
    try:
        text = path.read_bytes().decode("utf-8", "replace")
    except FileNotFoundError:
        raise StorageError(f"{path}: no such file. Is this a run directory?") from None
    except OSError as error:
        raise storage_error(error, path) from error
    return text.split("\n")[:-1]


def cut_after(path: Path | str, step: int) -> None:
    """Rewrite a history without the rows after `step` and without a torn last line, atomically."""
    path = Path(path)
    kept = []
    for line in _whole_lines(path):
        first = line.split(",", 1)[0]
        if first.isdigit() and int(first) > step:
            break
        kept.append(line)
    write_bytes(path, ("\n".join(kept) + "\n").encode())
