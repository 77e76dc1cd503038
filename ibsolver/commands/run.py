"""March a case to the end of its travel.

Writes a run directory with history, frames and checkpoints, and at the end forces.csv, forces.png and vorticity.png.
Safe to interrupt: the step is finished, a checkpoint is written, and `ibsolver resume` goes on to the same bits.
"""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import Any

EXAMPLES = ("run cases/towed_plate_with_flap.toml", "run plate.toml --out runs/plate-a --threads 1 --bare")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    from ibsolver.commands._options import add_threads, named

    parser.add_argument("case", metavar="CASE", type=named, help="case file (TOML)")
    parser.add_argument("--out", metavar="DIR", type=named, help="run directory (default: runs/ and the case's name)")
    add_threads(parser)
    parser.add_argument("--bare", action="store_true", help="write no plots and no forces.csv at the end")
    parser.add_argument("--overwrite", action="store_true", help="replace an earlier run in DIR (default: refuse)")


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Run the case and return how it ended."""
    from ibsolver.case import load_case

    case = load_case(options.case)
    out = options.out or Path("runs") / options.case.stem
    if options.overwrite:
        _refuse_other_folders(out)
    from ibsolver.commands._progress import ProgressLine
    from ibsolver.run.loop import run_case

    if not options.quiet:
        print(f"{case.title or options.case}\nwriting {out}", file=sys.stderr)
    with ProgressLine(options.quiet) as line:
        result = run_case(case, out, threads=options.threads, progress=line, overwrite=options.overwrite)
    return finish(result, options.bare, options.quiet or options.json)


def _refuse_other_folders(out: Path) -> None:
    """Raise a StorageError if a folder holds something, but no run: a case.toml of the user's own would be lost."""
    from ibsolver.commands._options import holds_a_run
    from ibsolver.errors import StorageError

    if out.is_dir() and any(out.iterdir()) and not holds_a_run(out):
        raise StorageError(f"{out}: no run is in this folder, and --overwrite replaces nothing else. Choose another --out.")


def finish(result: Any, bare: bool, silent: bool) -> dict[str, Any]:
    """Draw the closing plots of a run and tell what was made; a run resumed at its end has no cost to tell."""
    files = [] if bare else closing_plots(result.directory)
    marched = result.solves_per_step > 0
    if not silent:
        print("\n".join([_ending(result, marched), *(files or [str(result.directory)])]))
    return {
        "directory": str(result.directory),
        "state": result.state,
        "steps": result.steps,
        "travel": result.travel,
        "seconds": result.seconds,
        "ns_per_cell_step": result.ns_per_cell_step if marched else None,
        "solves_per_step": result.solves_per_step if marched else None,
        "files": files,
    }


def _ending(result: Any, marched: bool) -> str:
    from ibsolver.commands._progress import duration

    way = f"{result.travel:.3g} chords in {result.steps:,} steps"
    if not marched:
        return f"{way}: finished earlier, nothing was left to march"
    cost = f"{result.ns_per_cell_step:.0f} ns a cell and step, {result.solves_per_step:.2f} Poisson solves a step"
    return f"{way}, {duration(result.seconds)}\n{cost}"


def closing_plots(directory: Path) -> list[str]:
    """Write forces.csv, forces.png and vorticity.png into a run directory; without a body only the last."""
    import postprocess

    files = []
    if postprocess.open_run(directory).has_body:
        files += postprocess.forces(directory)["files"]
    return [*files, str(postprocess.picture(directory))]
