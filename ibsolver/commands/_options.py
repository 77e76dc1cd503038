"""What several verbs ask of their options; faults are told before any work is done."""

from __future__ import annotations

import argparse
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


def png_file(text: str) -> Path:
    """Return the name of a picture to write; `of_kind` tells why others are refused."""
    return of_kind(text, ".png")


def csv_file(text: str) -> Path:
    """Return the name of a table to write; `of_kind` tells why others are refused."""
    return of_kind(text, ".csv")


def of_kind(text: str, suffix: str) -> Path:
    """Return a file's name if it ends as its kind does: another ending is a slip, and might overwrite a case.

    Raises
    ------
    argparse.ArgumentTypeError
        With what is allowed.
    """
    file = Path(text)
    if file.suffix.lower() != suffix:
        raise argparse.ArgumentTypeError(f"{text!r} must end in {suffix} (a case or run comes before the options)")
    return file
