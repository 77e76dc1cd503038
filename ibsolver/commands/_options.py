"""What several verbs ask of their options; faults are told before any work is done."""

from __future__ import annotations

import argparse
import math
import os
from pathlib import Path


def add_threads(parser: argparse.ArgumentParser) -> None:
    """Add --threads."""
    parser.add_argument(
        "--threads", metavar="N", type=threads, help="threads (default: every core, one on a small grid)"
    )


def threads(text: str) -> int:
    """Return a number of threads that this machine can give.

    Raises
    ------
    argparse.ArgumentTypeError
        With what is allowed.
    """
    cores = _cores()
    try:
        number = int(text)
    except ValueError:
        number = 0
    if not 1 <= number <= cores:
        raise argparse.ArgumentTypeError(f"{text!r} threads asked for; this machine has 1 to {cores} for this process")
    return number


def _cores() -> int:
    """Return the cores of this process, as `ibsolver.kernels._jit` does, which would load the compiler."""
    try:
        return len(os.sched_getaffinity(0))
    except AttributeError:
        return os.cpu_count() or 1


def named(text: str) -> Path:
    """Return a path that is not empty: an unset shell variable would otherwise mean this very folder.

    Raises
    ------
    argparse.ArgumentTypeError
        If it is.
    """
    if not text.strip():
        raise argparse.ArgumentTypeError("an empty name was given; is a shell variable not set?")
    return Path(text)


def positive(text: str) -> float:
    """Return a finite number above 0.

    Raises
    ------
    argparse.ArgumentTypeError
        With what is allowed.
    """
    try:
        number = float(text)
    except ValueError:
        number = math.nan
    if not (math.isfinite(number) and number > 0):
        raise argparse.ArgumentTypeError(f"{text!r} must be a number above 0")
    return number


def run_directory(text: str) -> Path:
    """Return the directory of a run, finished or not.

    Raises
    ------
    argparse.ArgumentTypeError
        If there is none; damage within it is found later, by whoever reads it.
    """
    folder = named(text)
    if not folder.exists():
        raise argparse.ArgumentTypeError(f"{text!r}: no such run directory; runs are in runs/ unless --out said otherwise")
    if not folder.is_dir():
        raise argparse.ArgumentTypeError(f"{text!r} is a file; name the directory of a run")
    if not holds_a_run(folder):
        raise argparse.ArgumentTypeError(f"{text!r}: there is no run in this folder; name the one that was given as --out")
    return folder


def holds_a_run(folder: Path) -> bool:
    """Return whether a run was begun in a folder."""
    from ibsolver.runfile import layout

    return any((folder / name).is_file() for name in (layout.RESOLVED, layout.STATUS, layout.MANIFEST))


def png_file(text: str) -> Path:
    """Return the name of a picture to write; `of_kind` tells why others are refused."""
    return of_kind(text, ".png")


def csv_file(text: str) -> Path:
    """Return the name of a table to write; `of_kind` tells why others are refused."""
    return of_kind(text, ".csv")


def of_kind(text: str, suffix: str) -> Path:
    """Return a file's name if it ends as its kind does and its folder exists; another ending might overwrite a case.

    Raises
    ------
    argparse.ArgumentTypeError
        With what is allowed.
    """
    file = Path(text)
    if file.suffix.lower() != suffix:
        raise argparse.ArgumentTypeError(f"{text!r} must end in {suffix} (a case or run comes before the options)")
    if not file.parent.is_dir():
        raise argparse.ArgumentTypeError(f"{text!r}: there is no folder {file.parent}; make it first")
    return file
