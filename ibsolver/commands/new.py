"""Write a commented starter case.

Without --out the case goes to standard output. Nothing is overwritten. With --out the kind "outline" comes with an
outline.csv to replace by your own.
"""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

from ibsolver.errors import StorageError

EXAMPLES = ("new plate-with-flap --out plate.toml", "new cylinder")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    from ibsolver.case.template import KINDS
    from ibsolver.commands._options import named

    parser.add_argument("kind", metavar="KIND", help=f"what to start from: {', '.join(KINDS)}")
    parser.add_argument("--out", metavar="FILE", type=named, help="case file to write; must not exist")


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Write the case, and what it names, and return where."""
    from ibsolver.case.template import OUTLINE_CSV, new_case

    text = new_case(options.kind)
    if options.out is None:
        if not options.json:
            print(text, end="")
        return {"kind": options.kind, "text": text}
    files = {options.out: text}
    if options.kind == "outline":
        files[options.out.with_name("outline.csv")] = OUTLINE_CSV
    _write(files)
    if not (options.json or options.quiet):
        names = " and ".join(str(file) for file in files)
        print(f"{names} written. Look at it, then: ibsolver check {options.out}")
    return {"kind": options.kind, "files": [str(file) for file in files]}


def _write(files: dict[Path, str]) -> None:
    """Write new files, all or none of them.

    Raises
    ------
    StorageError
        If one of them exists, or its folder does not.
    """
    from ibsolver.runfile.atomic import write_bytes

    for file in files:
        if file.exists():
            raise StorageError(f"{file}: exists already and is not overwritten. Choose another name or folder with --out.")
        if not file.parent.is_dir():
            raise StorageError(f"{file}: there is no folder {file.parent}. Make it first, or choose another name.")
    for file, text in files.items():
        write_bytes(file, text.encode())
