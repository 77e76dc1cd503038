"""Write a commented starter case.

Without --out the case goes to standard output. Nothing is overwritten.
"""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

from ibsolver.errors import StorageError, UsageError

EXAMPLES = ("new plate-with-flap --out plate.toml", "new cylinder")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    from ibsolver.case.template import KINDS

    parser.add_argument("kind", metavar="KIND", help=f"what to start from: {', '.join(KINDS)}")
    parser.add_argument("--out", metavar="FILE", type=Path, help="case file to write; must not exist")


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Write the case and return its place."""
    import difflib

    from ibsolver.case.template import KINDS, new_case
    from ibsolver.runfile.atomic import write_bytes

    if options.kind not in KINDS:
        near = difflib.get_close_matches(options.kind, list(KINDS), 1)
        hint = f"Did you mean {near[0]!r}?" if near else f"There are: {', '.join(KINDS)}."
        raise UsageError(f"{options.kind!r} is not a kind of case. {hint}")
    text = new_case(options.kind)
    if options.out is None:
        if not options.json:
            print(text, end="")
        return {"kind": options.kind, "text": text}
    if options.out.exists():
        raise StorageError(f"{options.out}: exists already and is not overwritten. Choose another name.")
    write_bytes(options.out, text.encode())
    if not (options.json or options.quiet):
        print(f"{options.out} written. Look at it, then: ibsolver check {options.out}")
    return {"kind": options.kind, "file": str(options.out)}
