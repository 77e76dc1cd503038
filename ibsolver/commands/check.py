"""Read a case and tell what a run would be, before any run.

Set-up in SI and dimensionless, resolution and blockage, cost on this machine (from 20 timed steps), what the tank must be
ready for, and cautions. --picture draws plate, flaps, grid, boundaries and the tow law.
"""

from __future__ import annotations

import argparse
import math
import textwrap
from pathlib import Path
from typing import Any

EXAMPLES = ("check cases/towed_plate_with_flap.toml", "check plate.toml --picture plate.png --no-timing")

SAFETY = (
    "A laser sheet of class 3B or 4 can blind: IEC 60825-1 or ANSI Z136.1, and whoever is responsible for lasers on your "
    "site, decide what is safe; nothing here does.",
    "A towing carriage crushes: keep clear of its track, follow the tank's own rules, have a stop within reach.",
    "Loads are for choosing tests and load cells, not for the strength of parts that people depend on.",
)
_ABSENT = object()


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the verb's arguments."""
    parser.add_argument("case", metavar="CASE", help="case file (TOML)")
    parser.add_argument(
        "--picture", metavar="FILE", type=Path, nargs="?", const=_ABSENT, default=None,
        help="draw the case (default FILE: the case's name with .png, in this folder)",
    )  # fmt: skip
    parser.add_argument("--no-timing", action="store_true", help="do not time steps; the wall time stays unknown")


def execute(options: argparse.Namespace) -> dict[str, Any]:
    """Return everything that is told, and print it."""
    from ibsolver.case import load_case

    case = load_case(options.case)
    from ibsolver.run.assemble import assemble
    from ibsolver.run.forecast import forecast

    problem = assemble(case)
    cost = forecast(case, 0 if options.no_timing else 20, problem)
    result = collect(case, cost)
    if options.picture is not None:
        target = Path(Path(options.case).stem + ".png") if options.picture is _ABSENT else options.picture
        result["picture"] = str(draw(case, problem, target))
    if not options.json:
        print("\n".join(report(case, result)))
    return result


def collect(case: Any, cost: Any) -> dict[str, Any]:
    """Return the numbers of a check as plain data."""
    from dataclasses import asdict

    from ibsolver.case import scales
    from ibsolver.case.cautions import cautions
    from ibsolver.commands import _audit
    from ibsolver.runfile.atomic import finite

    numbers = {
        "title": case.title,
        "reynolds": case.tow.reynolds,
        "speed_m_s": scales.velocity_scale(case),
        "reference_length_m": scales.reference_length(case),
        "fluid": None if case.fluid is None else asdict(case.fluid),
        "incidence_deg": math.degrees(_audit.greatest_incidence(case)),
        "cells_per_chord": case.grid.cells_per_chord,
        "boundary_layer_cells": _audit.boundary_layer_cells(case),
        "flap_cells": {flap.name: flap.length * case.grid.cells_per_chord for flap in case.flaps},
        "blockage": _audit.blockage(case),
        "domain_effect": _audit.domain_effect(case),
        "normal_force_band": _audit.normal_force_band(case),
        "added_mass_coefficient": _audit.added_mass_coefficient(case),
        "cost": asdict(cost),
        "tank": asdict(_audit.tank_numbers(case)),
        "cautions": [*cautions(case), *SAFETY],
    }
    return finite(numbers)


def draw(case: Any, problem: Any, target: Path) -> Path:
    """Draw the case and return the file."""
    import numpy as np

    from ibsolver.case import scales
    from postprocess.figures.case_picture import draw_case

    end = problem.time_end
    times = np.linspace(0.0, end, 400)
    seconds = scales.convective_time(case)
    grid = problem.grid
    notes = [
        f"Re = {case.tow.reynolds:,.0f}, {case.grid.cells_per_chord:g} cells per chord, {grid.nx} x {grid.ny} cells, "
        f"{problem.rig.size} Lagrangian points.",
        f"Travel {case.run.travel:g} chords in {end:.3g} c/U" + (f" = {end * seconds:.3g} s." if seconds else "."),
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
        "length_word": "diameter" if case.cylinder is not None else "chord",
    }
    return draw_case(picture, target)


def report(case: Any, result: dict[str, Any]) -> list[str]:
    """Return the check as lines for a terminal."""
    lines = [result["title"], ""]
    for heading, rows in (
        ("Set-up", _set_up(case, result)),
        ("Resolution", _resolution(result)),
        ("Cost on this machine", _cost(result["cost"])),
        ("What the tank must be ready for", _tank(result)),
    ):
        if rows:
            lines += [heading, *[f"  {name:<26} {value}" for name, value in rows], ""]
    lines.append("Cautions")
    for caution in result["cautions"]:
        lines += textwrap.wrap(caution, 78, initial_indent="  - ", subsequent_indent="    ")
    if "picture" in result:
        lines += ["", result["picture"]]
    return lines


def _set_up(case: Any, result: dict[str, Any]) -> list[tuple[str, str]]:
    rows = [("Reynolds number", f"{result['reynolds']:,.6g}")]
    if result["speed_m_s"] is not None:
        rows.append(("final tow speed", f"{1e3 * result['speed_m_s']:.4g} mm/s"))
    if result["reference_length_m"] is not None:
        word = "diameter" if case.cylinder is not None else "chord"
        rows.append((word, f"{1e3 * result['reference_length_m']:.4g} mm"))
    if case.fluid is not None:
        fluid = case.fluid
        rows.append(("fluid", f"{fluid.kind}, {fluid.density:.5g} kg/m3, nu {fluid.kinematic_viscosity:.4g} m2/s"))
        rows += [("" if k else "from", text) for k, text in enumerate(textwrap.wrap(fluid.source, 50))]
    if case.plate is not None:
        rows.append(("incidence", f"{result['incidence_deg']:.4g} deg, pivot at {case.plate.pivot:g} chords"))
    for flap in case.flaps:
        rows.append(
            (
                f"flap {flap.name}",
                f"{flap.mount}, hinge {flap.hinge:g}, length {flap.length:g} chords, {flap.side} side",
            )
        )
        rows.append(("", f"opening {math.degrees(flap.opening):.4g} deg"))
    tow = case.tow
    words = "as recorded by the encoder" if tow.profile else tow.start
    if not tow.profile and tow.start in ("linear", "smooth"):
        words += f" over {tow.start_distance:g} chords"
    rows.append(("start", words))
    rows.append(("travel", f"{case.run.travel:g} chords, {result['cost']['duration']:.4g} c/U"))
    return rows


def _resolution(result: dict[str, Any]) -> list[tuple[str, str]]:
    rows = [("cells per chord", f"{result['cells_per_chord']:g}")]
    rows.append(
        ("cells per boundary layer", f"{result['boundary_layer_cells']:.1f} (5 c / sqrt Re at the trailing edge)")
    )
    rows += [(f"cells along flap {name}", f"{cells:.0f}") for name, cells in result["flap_cells"].items()]
    if result["blockage"] is not None:
        rows.append(("blockage", f"{100 * result['blockage']:.1f} % (keep under 5 %, Maskell 1963)"))
    if result["domain_effect"] is not None:
        rows.append(("finite domain", f"lift too high by about {100 * result['domain_effect']:.1f} %"))
    return rows


def _cost(cost: dict[str, Any]) -> list[tuple[str, str]]:
    from ibsolver.commands._progress import duration

    rows = [
        ("grid", f"{cost['nx']} x {cost['ny']} = {cost['cells']:,} cells, {cost['points']} points"),
        ("steps", f"about {cost['steps']:,}"),
    ]
    if cost["seconds"] is not None:
        rows.append(
            ("wall time", f"about {duration(cost['seconds'])} ({cost['ns_per_cell_step']:.0f} ns a cell and step)")
        )
    rows += [
        ("memory", f"{cost['memory_bytes'] / 1e6:,.0f} MB"),
        ("disk", f"{cost['disk_bytes'] / 1e6:,.0f} MB"),
        ("Poisson equation", cost["plan"]),
        ("diffusion", "explicit" if cost["explicit_diffusion"] else "Crank-Nicolson"),
    ]
    return rows


def _tank(result: dict[str, Any]) -> list[tuple[str, str]]:
    tank = result["tank"]
    if tank["convective_time"] is None:
        return []
    rows = [
        ("convective time c/U", f"{tank['convective_time']:.4g} s"),
        ("tow", f"{tank['tow_length']:.4g} m in {tank['tow_time']:.4g} s, start {tank['start_time']:.3g} s"),
    ]
    if tank["force_scale"] is not None:
        rows.append(("force at coefficient 1", f"{1e3 * tank['force_scale']:.4g} mN"))
    if tank["load_low"] is not None:
        rows.append(
            ("expected normal force", f"{1e3 * tank['load_low']:.3g} to {1e3 * tank['load_high']:.3g} mN, flap aside")
        )
        rows.append(("", "(separated plate, Lamb art. 76, to vortex lift 2 pi sin a)"))
    rows.append(("added mass at the start", _added_mass(tank, result)))
    low, high = tank["natural_frequency"]
    rows += [
        ("highest frequency", f"{tank['highest_frequency']:.3g} Hz worth resolving (common practice)"),
        ("balance, wet, natural", f"at least {low:.3g} to {high:.3g} Hz"),
        (
            "sample rate",
            f"{tank['sample_rate'][0]:.3g} to {tank['sample_rate'][1]:.3g} Hz, filter below 0.4 of the natural one",
        ),
        ("load cell", "3 to 5 times the expected peak (common practice)"),
    ]
    return rows


def _added_mass(tank: dict[str, Any], result: dict[str, Any]) -> str:
    if result["incidence_deg"] and tank["added_mass_load"] is None:
        return "unbounded: an impulsive start asks for an infinite force"
    if tank["added_mass_load"] is None:
        return "none"
    return f"{1e3 * tank['added_mass_load']:.3g} mN peak, normal to the plate (potential flow)"
