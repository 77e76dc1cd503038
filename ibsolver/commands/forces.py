"""Loads of a run against travel and time: CSV, plot, means, peaks, spectrum.

Coefficients, and millinewtons where the case has a fluid, chord and span. With --cutoff or --cutoff-hz the loads are
filtered as in the laboratory: resampled at an even rate, then low-passed; raw and filtered stand side by side.
"""

from __future__ import annotations

import argparse
import textwrap
from typing import Any

EXAMPLES = ("forces runs/plate", "forces runs/plate --cutoff-hz 2 --rate-hz 100 --causal --window 2 8")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    from ibsolver.commands._options import csv_file, png_file, positive, run_directory

    parser.add_argument("directory", metavar="DIR", type=run_directory, help="run directory, finished or not")
    parser.add_argument("--csv", metavar="FILE", type=csv_file, help="CSV file (default: DIR/forces.csv)")
    parser.add_argument("--plot", metavar="FILE", type=png_file, help="PNG file (default: DIR/forces.png)")
    parser.add_argument(
        "--window", nargs=2, type=float, metavar=("FROM", "TO"), help="travel for means, chords (default: second half)"
    )
    parser.add_argument(
        "--cutoff-hz", type=positive, metavar="F", help="cut-off of the low-pass filter, Hz (default: no filter)"
    )
    parser.add_argument("--cutoff", type=positive, metavar="F", help="the same in U/c, for dimensionless runs")
    parser.add_argument("--order", type=int, metavar="N", help="order of the filter, 1 to 10 (default: 4)")
    parser.add_argument(
        "--filter", metavar="KIND", help="butterworth, bessel or 'moving average' (default: butterworth)"
    )
    parser.add_argument(
        "--causal", action="store_true", help="run the filter once, with its delay (default: zero phase)"
    )
    parser.add_argument(
        "--rate-hz", type=positive, metavar="F", help="sample rate of the laboratory, Hz (default: fine enough)"
    )


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Write the files and return the summary."""
    import postprocess

    window = tuple(options.window) if options.window else None
    summary = postprocess.forces(options.directory, options.csv, options.plot, window=window, **low_pass(options))
    if not (options.json or options.quiet):
        for line in lines(summary):
            print(textwrap.fill(line, 79, subsequent_indent="  ", break_on_hyphens=False))
        print("\n".join(summary["files"]))
    return summary


def low_pass(options: argparse.Namespace) -> dict[str, Any]:
    """Return what `postprocess.forces` is to know of the filter.

    Raises
    ------
    UsageError
        If the filter is described but not asked for: silently unfiltered loads would be taken for filtered ones.
    """
    from ibsolver.errors import UsageError

    details = {"order": options.order, "kind": options.filter, "rate_hz": options.rate_hz}
    given = {name: value for name, value in details.items() if value is not None}
    if options.causal:
        given["zero_phase"] = False
    if given and options.cutoff is None and options.cutoff_hz is None:
        raise UsageError("--order, --filter, --causal and --rate-hz describe the low-pass filter: add --cutoff-hz or --cutoff.")
    return {"cutoff": options.cutoff, "cutoff_hz": options.cutoff_hz, **given}


def lines(summary: dict[str, Any]) -> list[str]:
    """Return the summary as lines for a terminal."""
    low, high = summary["window_travel"]
    text = [f"{summary['title']}", f"mean over travel {low:.3g} to {high:.3g} chords, and peak of the whole run:"]
    units = {"lift_mN": "lift (mN)", "drag_mN": "drag (mN)", "CL": "C_L", "CD": "C_D", "CM": "C_M"}
    for name, mean in summary["means"].items():
        peak = summary["peaks"][name]
        text.append(
            f"  {units[name]:<10} {mean['mean']:9.4f} +- {mean['half_width_95']:.4f}   peak {peak['value']:9.4f} "
            f"at {peak['travel']:.2f} chords"
        )
    if not all(mean["interval_trusted"] for mean in summary["means"].values()):
        text.append("  The +- is 95 % by batch means; the window is short against the shedding, so take it as a guess.")
    if summary["strouhal"]:
        text.append(
            f"Strouhal number {summary['strouhal']['value']:.4f} (resolution {summary['strouhal']['resolution']:.4f})"
        )
    text.append(
        f"lift on the bodies against momentum balance: within {100 * summary['balance_error']:.2g} % of the peak"
    )
    if summary["filter"]:
        text.append(f"filter: {summary['filter']}")
    return [*text, summary["caution"]]
