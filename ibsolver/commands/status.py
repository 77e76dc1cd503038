"""State, progress and time left of a run, from its files alone.

A run whose process is gone without a word (power cut, kill) is recognised on its own host.
"""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

EXAMPLES = ("status runs/plate", "status runs/plate --json")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    from ibsolver.commands._options import run_directory

    parser.add_argument("directory", metavar="DIR", type=run_directory, help="run directory")


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Return the status and print it."""
    from ibsolver.runfile.status import present_status

    status = present_status(options.directory)
    if not (options.json or options.quiet):
        print("\n".join(lines(status, options.directory)))
    return status


def lines(status: dict[str, Any], directory: Path) -> list[str]:
    """Return the status as lines for a terminal."""
    from ibsolver.commands._progress import duration

    travel, end = status.get("travel") or 0.0, status.get("travel_end") or 0.0
    share = f" ({100 * min(travel / end, 1):.0f} %)" if end else ""
    text = [f"{status.get('title', '')}", f"{status['state']}, as of {status.get('updated', '?')}"]
    text.append(
        f"travel {travel:.3f} of {end:g} chords{share}, step {status.get('step', 0):,}, {status.get('frames', 0)} frames"
    )
    if status["state"] == "running" and status.get("seconds_left") is not None:
        text.append(f"about {duration(status['seconds_left'])} left")
    if status.get("message"):
        text.append(status["message"])
    if status["state"] not in ("running", "finished"):
        text.append(f"Go on with `ibsolver resume {directory}`.")
    return text
