"""Read a case and tell what a run would be, before any run.

Set-up in SI and dimensionless, resolution and blockage, cost on this machine (from 20 timed steps), what the tank must be
ready for, and cautions. --picture draws plate, flaps, grid, boundaries and the tow law.
"""

from __future__ import annotations

import argparse
import math
from pathlib import Path
from typing import Any

EXAMPLES = ("check cases/towed_plate_with_flap.toml", "check plate.toml --picture plate.png --no-timing")

SAFETY = (
    "A laser sheet of class 3B or 4 can blind: IEC 60825-1 or ANSI Z136.1, and whoever is responsible for lasers on your "
    "site, decide what is safe; nothing here does.",
    "A towing carriage crushes: keep clear of its track, follow the tank's own rules, have a stop within reach.",
    "Whether a part is strong enough where its failure could hurt someone is for licensed practice to say.",
)
SMALL_LOADS = (
    "The expected loads are small: a usual load cell resolves 1 to 2 mN (common practice). At one Reynolds number they "
    "depend neither on chord nor on speed, only on the fluid and on span over chord: more span or a more viscous fluid "
    "raises them."
)
COARSE_SHARE = 0.05  # of the peak: resolution of the load cell above which `SMALL_LOADS` is told
_ABSENT = object()


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    from ibsolver.commands._options import named, png_file

    parser.add_argument("case", metavar="CASE", type=named, help="case file (TOML)")
    parser.add_argument(
        "--picture", metavar="FILE", type=png_file, nargs="?", const=_ABSENT, default=None,
        help="draw the case (default FILE: the case's name with .png, in this folder)",
    )  # fmt: skip
    parser.add_argument("--no-timing", action="store_true", help="do not time steps; the wall time stays unknown")


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Return everything that is told, and print it."""
    from ibsolver.case import load_case

    target = None
    if options.picture is not None:
        target = Path(options.case.stem + ".png") if options.picture is _ABSENT else options.picture
    case = load_case(options.case)
    from ibsolver.run.assemble import assemble
    from ibsolver.run.forecast import forecast

    problem = assemble(case)
    cost = forecast(case, 0 if options.no_timing else 20, problem)
    result = collect(case, cost)
    if target is not None:
        result["picture"] = str(draw(case, problem, target))
    if not options.json:
        from ibsolver.commands._check_report import report

        print("\n".join(report(case, result)))
    return result


def collect(case: Any, cost: Any) -> dict[str, Any]:
    """Return the numbers of a check as plain data: SI where the key names a unit, else in chords, U and c/U."""
    from dataclasses import asdict

    from ibsolver.case import scales
    from ibsolver.case.cautions import blockage, boundary_layer_cells
    from ibsolver.case.placement import has_body
    from ibsolver.commands import _audit
    from ibsolver.runfile.atomic import finite

    band, tank = _audit.normal_force(case), _audit.tank_numbers(case)
    numbers = {
        "title": case.title,
        "reynolds": case.tow.reynolds,
        "speed_m_s": scales.velocity_scale(case),
        "reference_length_m": scales.reference_length(case),
        "span_m": scales.span(case),
        "fluid": None if case.fluid is None else asdict(case.fluid),
        "incidence_deg": math.degrees(_audit.greatest_incidence(case)),
        "cells_per_chord": case.grid.cells_per_chord,
        "boundary_layer_cells": boundary_layer_cells(case) if has_body(case) else None,
        "flap_cells": {flap.name: flap.length * case.grid.cells_per_chord for flap in case.flaps},
        "blockage": blockage(case),
        "least_tank_width": _audit.least_tank_width(case),
        "domain_effect": _audit.domain_effect(case),
        "normal_force": None if band is None else asdict(band),
        "added_mass_coefficient": _audit.added_mass_coefficient(case),
        "cost": asdict(cost),
        "tank": asdict(tank),
        "cautions": all_cautions(case, tank),
    }
    return finite(numbers)


def all_cautions(case: Any, tank: Any) -> list[str]:
    """Return what to bear in mind: of the case, of its loads, and of work at a tank; of a box without a body nothing."""
    from ibsolver.case.cautions import cautions
    from ibsolver.case.placement import has_body

    if not has_body(case):
        return list(cautions(case))
    small = tank.resolution_share is not None and tank.resolution_share[0] > COARSE_SHARE
    return [*cautions(case), *([SMALL_LOADS] if small else []), *SAFETY]


def draw(case: Any, problem: Any, target: Path) -> Path:
    """Draw the case and return the file."""
    import numpy as np

    from ibsolver.case import scales
    from ibsolver.commands._check_report import length_word
    from postprocess.figures.case_picture import draw_case

    end = problem.time_end
    times = np.linspace(0.0, end, 400)
    seconds = scales.convective_time(case)
    grid, word = problem.grid, length_word(case)
    notes = [
        f"Re = {case.tow.reynolds:,.0f}, {case.grid.cells_per_chord:g} cells per {word}, {grid.nx} x {grid.ny} cells, "
        f"{problem.rig.size} Lagrangian points.",
        f"Travel {case.run.travel:g} {word}s in {end:.3g} c/U" + (f" = {end * seconds:.3g} s." if seconds else "."),
    ]
    picture = {
        "title": case.title,
        "x_faces": grid.x_faces,
        "y_faces": grid.y_faces,
        "shapes": problem.shapes,
        "points": problem.points,
        "core": grid.core,
        "sides": problem.sides.describe(),
        "tow_times": times,
        "tow_speeds": np.array([problem.tow_speed(t) for t in times]),
        "tow_seconds": None if seconds is None else times * seconds,
        "notes": notes,
        "length_word": word,
    }
    return draw_case(picture, target)


