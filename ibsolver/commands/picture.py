"""Vorticity stills at chosen travels, with plate and flap.

All panels share one scale and one symmetric colour range; counter-clockwise rotation is rust, clockwise teal.
"""

from __future__ import annotations

import argparse
from typing import Any

EXAMPLES = ("picture runs/plate", "picture runs/plate --travel 1 2 4 --limit 15 --out lev.png")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    from ibsolver.commands._options import png_file, positive, run_directory

    parser.add_argument("directory", metavar="DIR", type=run_directory, help="run directory, finished or not")
    parser.add_argument("--out", metavar="FILE", type=png_file, help="PNG file (default: DIR/vorticity.png)")
    parser.add_argument(
        "--travel", nargs="+", type=float, metavar="S", help="travels in chords (default: four, evenly spaced)"
    )
    parser.add_argument(
        "--limit", type=positive, metavar="W",
        help="vorticity at the ends of the colours, U/c (default: a round number)",
    )  # fmt: skip
    parser.add_argument(
        "--region", nargs=4, type=float, metavar=("X0", "X1", "Y0", "Y1"),
        help="what to show, chords from the pivot (default: bodies and near wake)",
    )  # fmt: skip


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Draw the picture and return its place."""
    import postprocess
    from ibsolver.errors import UsageError

    region = tuple(options.region) if options.region else None
    if region and not (region[0] < region[1] and region[2] < region[3]):
        raise UsageError("--region: X0 must be less than X1, and Y0 less than Y1.")
    file = postprocess.picture(
        options.directory, options.out, travels=options.travel, limit=options.limit, region=region
    )
    if not (options.json or options.quiet):
        print(file)
    return {"files": [str(file)]}
