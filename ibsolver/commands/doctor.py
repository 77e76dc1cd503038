"""Is this machine set up to run overnight?

Looks at threads, at whether two are faster than one, at BLAS, the folder of compiled kernels, the disk, the movie encoder and
sleep settings, and says what to do about each. Changes nothing.
"""

from __future__ import annotations

import argparse
import textwrap
from pathlib import Path
from typing import Any

EXAMPLES = ("doctor", "doctor --folder /data/runs --json")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    parser.add_argument(
        "--folder", metavar="DIR", type=Path, default=Path("."), help="where runs will be written (default: here)"
    )


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Return all findings and print them."""
    from dataclasses import asdict

    from ibsolver.commands._machine import examine
    from ibsolver.errors import UsageError

    if not options.folder.is_dir():
        raise UsageError(f"{options.folder}: no such folder.")
    findings = examine(options.folder)
    if not options.json:
        for finding in findings:
            print(f"{'good' if finding.good else 'look'}   {finding.name}: {finding.found}")
            if finding.advice and not options.quiet:
                print(textwrap.fill(finding.advice, 78, initial_indent="       ", subsequent_indent="       "))
    return {"findings": [asdict(finding) for finding in findings]}
