"""Go on with a run from its last checkpoint, to the same bits as an uninterrupted run.

The case must be the one it was begun with; only a longer travel and [output] may change: edit case.toml in DIR, or say
--travel. A run that was stopped before its first checkpoint begins anew.
"""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import Any

EXAMPLES = ("resume runs/plate", "resume runs/plate --travel 12")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    from ibsolver.commands._options import add_threads, run_directory

    parser.add_argument("directory", metavar="DIR", type=run_directory, help="run directory")
    parser.add_argument("--travel", type=float, metavar="S", help="longer travel in chords (default: as the case says)")
    add_threads(parser)
    parser.add_argument("--bare", action="store_true", help="write no plots and no forces.csv at the end")


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Resume the run and return how it ended."""
    from ibsolver.commands._progress import ProgressLine
    from ibsolver.commands.run import finish
    from ibsolver.run.loop import resume_case

    case = _longer(options.directory, options.travel) if options.travel is not None else None
    if not options.quiet:
        print(f"going on with {options.directory}", file=sys.stderr)
    with ProgressLine(options.quiet) as line:
        result = resume_case(options.directory, threads=options.threads, progress=line, case=case)
    return finish(result, options.bare, options.quiet or options.json)


def _longer(directory: Path, travel: float) -> Any:
    """Return the case of a run with another travel."""
    import dataclasses
    import math

    from ibsolver.errors import UsageError
    from ibsolver.run.directory import decoded
    from ibsolver.runfile import layout
    from ibsolver.runfile.atomic import read_json

    stored = decoded(read_json(directory / layout.RESOLVED), directory)
    if not (math.isfinite(travel) and travel >= stored.run.travel):
        raise UsageError(
            f"--travel {travel:g}: the run's travel is {stored.run.travel:g} chords; only a longer one is possible."
        )
    text = (directory / layout.CASE).read_text() if (directory / layout.CASE).is_file() else ""
    return dataclasses.replace(stored, run=dataclasses.replace(stored.run, travel=travel), text=text)
