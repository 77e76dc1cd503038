"""The lines that `check` prints for a terminal of 80 columns."""

from __future__ import annotations

import math
import textwrap
from typing import Any

from ibsolver.case.model import Case, Flap
from ibsolver.case.placement import has_body, motion_range, opening_range
from ibsolver.commands._audit import DOMAIN_TRAVEL
from ibsolver.commands._progress import duration

WIDTH = 79
NAME = 27  # columns of a row's name, its indent aside
Row = tuple[str, str]
ALIASING = "above twice the natural frequency where no analogue filter comes first (sampling theorem)"


def report(case: Case, result: dict[str, Any]) -> list[str]:
    """Return a check as lines, none wider than `WIDTH` but paths and single words.

    Parameters
    ----------
    case : Case
    result : dict
        What `ibsolver.commands.check.collect` returns.
    """
    lines = [*textwrap.wrap(case.title or case.file, WIDTH), ""]
    for heading, rows in (
        ("Set-up", _set_up(case, result)),
        ("Resolution", _resolution(case, result)),
        ("Cost on this machine", _cost(result["cost"])),
        ("What the tank must be ready for", _tank(result)),
    ):
        if rows:
            lines += [heading, *(line for row in rows for line in _columns(*row)), ""]
    if result["cautions"]:
        lines.append("Cautions")
    for caution in result["cautions"]:
        lines += textwrap.wrap(caution, WIDTH - 1, initial_indent="  - ", subsequent_indent="    ")
    if "picture" in result:
        lines += ["", result["picture"]]
    return lines


def _columns(name: str, value: str) -> list[str]:
    """Return one row, its value wrapped within its own column."""
    wrapped = textwrap.wrap(value, WIDTH - NAME - 2, break_on_hyphens=False)
    return [f"  {'' if k else name:<{NAME}}{line}" for k, line in enumerate(wrapped)]


def length_word(case: Case) -> str:
    """Return what the reference length is called."""
    return "diameter" if case.cylinder is not None else "chord"


def _set_up(case: Case, result: dict[str, Any]) -> list[Row]:
    rows = [("Reynolds number", f"{result['reynolds']:,.6g}")]
    if result["speed_m_s"] is not None:
        rows.append(("final tow speed", f"{1e3 * result['speed_m_s']:.4g} mm/s"))
    if result["reference_length_m"] is not None:
        rows.append((length_word(case), f"{1e3 * result['reference_length_m']:.4g} mm"))
    if result["span_m"] is not None:
        rows.append(("span", f"{1e3 * result['span_m']:.4g} mm"))
    if case.fluid is not None:
        fluid = case.fluid
        rows.append(("fluid", f"{fluid.kind}, {fluid.density:.5g} kg/m3, nu {fluid.kinematic_viscosity:.4g} m2/s"))
        rows.append(("from", fluid.source))
    rows += _body(case)
    rows += _tow(case, result)
    return rows


def _body(case: Case) -> list[Row]:
    rows = []
    body = case.plate or case.outline
    if body is not None:
        rows.append(("incidence", f"{_angles(case.incidence_motion, body.incidence)}, pivot at {body.pivot:g} chords"))
    if case.heave_motion is not None:
        low, high = motion_range(case.heave_motion, 0.0)
        rows.append(("heave", f"{low:.4g} to {high:.4g} chords, {case.heave_motion.kind}"))
    for flap in case.flaps:
        place = f"{flap.mount}, hinge at {flap.hinge:g}, length {flap.length:g} chords, {flap.side} side, "
        rows.append((f"flap {flap.name}", f"{place}opening {_opening(flap)}"))
    return rows


def _angles(motion: Any, fixed: float) -> str:
    low, high = (math.degrees(value) for value in motion_range(motion, fixed))
    return f"{low:.4g} deg" if low == high else f"{low:.4g} to {high:.4g} deg ({motion.kind})"


def _opening(flap: Flap) -> str:
    if flap.mount == "free":
        low, high = (math.degrees(value) for value in opening_range(flap))
        return f"{math.degrees(flap.opening):.4g} deg at the start, free from {low:.4g} to {high:.4g} deg"
    return _angles(flap.motion, flap.opening)


def _tow(case: Case, result: dict[str, Any]) -> list[Row]:
    tow, length = case.tow, length_word(case) + "s"
    if tow.profile:
        words = "as recorded by the encoder"
    elif tow.start == "still":
        words = "none: the carriage stays, and travel counts c/U"
    elif tow.start in ("linear", "smooth"):
        words = f"{tow.start} over {tow.start_distance:g} {length}"
    else:
        words = tow.start
    rows = [("start", words), ("travel", f"{case.run.travel:g} {length}, {result['cost']['duration']:.4g} c/U")]
    above, below = case.tank.wall_above, case.tank.wall_below
    if above is not None or below is not None:
        parts = [f"{wall:.4g} {length} {side}" for wall, side in ((above, "above"), (below, "below")) if wall is not None]
        rows.append(("tank walls", ", ".join(parts)))
    return rows


def _resolution(case: Case, result: dict[str, Any]) -> list[Row]:
    rows = [(f"cells per {length_word(case)}", f"{result['cells_per_chord']:g}")]
    if has_body(case):
        layer = "front, 1.2 D / sqrt Re" if case.cylinder is not None else "trailing edge, 5 c / sqrt Re"
        rows.append(("cells per boundary layer", f"{result['boundary_layer_cells']:.1f} ({layer})"))
    rows += [(f"cells along flap {name}", f"{cells:.0f}") for name, cells in result["flap_cells"].items()]
    if result["blockage"] is not None:
        rows.append(("blockage", f"{100 * result['blockage']:.1f} % (keep under 5 %, Maskell 1963)"))
    elif result["least_tank_width"]:
        rows.append(("blockage", _width_to_have(case, result)))
    if result["domain_effect"] is not None:
        effect = f"lift too high by about {100 * result['domain_effect']:.1f} % after {DOMAIN_TRAVEL:g} chords, "
        rows.append(("finite domain", f"{effect}growing with travel"))
    return rows


def _width_to_have(case: Case, result: dict[str, Any]) -> str:
    """Return what open water leaves to the reader: how wide the tank must be."""
    width, length = result["least_tank_width"], result["reference_length_m"]
    size = f"{width:.3g} {length_word(case)}s" + ("" if length is None else f" = {1e3 * width * length:.3g} mm")
    return f"unknown without both walls in [tank]; under 5 % in a tank wider than {size} (Maskell 1963)"


def _cost(cost: dict[str, Any]) -> list[Row]:
    rows = [
        ("grid", f"{cost['nx']} x {cost['ny']} = {cost['cells']:,} cells, {cost['points']} points"),
        ("steps", f"about {cost['steps']:,}"),
    ]
    if cost["seconds"] is not None:
        took = f"about {duration(cost['seconds'])} ({cost['ns_per_cell_step']:.0f} ns a cell and step)"
        rows.append(("wall time", took))
    return [
        *rows,
        ("memory", f"{cost['memory_bytes'] / 1e6:,.0f} MB"),
        ("disk", f"{cost['disk_bytes'] / 1e6:,.0f} MB"),
        ("Poisson equation", cost["plan"]),
        ("diffusion", "explicit" if cost["explicit_diffusion"] else "Crank-Nicolson"),
    ]


def _tank(result: dict[str, Any]) -> list[Row]:
    tank = result["tank"]
    if tank["convective_time"] is None:
        return []
    rows = [
        ("convective time c/U", f"{tank['convective_time']:.4g} s"),
        ("tow", f"{tank['tow_length']:.4g} m in {tank['tow_time']:.4g} s, its start {tank['start_time']:.3g} s"),
    ]
    if tank["force_scale"] is not None:
        rows.append(("force at coefficient 1", f"{_mn(tank['force_scale'])} mN"))
    if tank["load_peak"] is not None:
        rows += _loads(tank)
    low, high = tank["natural_frequency"]
    slow, fast = tank["sample_rate"]
    return [
        *rows,
        ("highest frequency", f"{tank['highest_frequency']:.3g} Hz worth resolving (common practice)"),
        ("balance, wet, natural", f"at least {low:.3g} to {high:.3g} Hz, 5 to 10 times that"),
        ("sample rate", f"{slow:.3g} to {fast:.3g} Hz, 10 to 20 times that; {ALIASING}"),
        ("low-pass filter", f"below 0.4 of the natural frequency, {tank['filter_below']:.3g} Hz for the lower one"),
    ]


def _loads(tank: dict[str, Any]) -> list[Row]:
    """Return the expected loads; all normal to the plate, flap and pitch rate aside."""
    rows = [
        ("normal force, separated", f"{_mn(tank['load_separated'])} mN or more (dead wake: Kirchhoff, Rayleigh)"),
        ("normal force, attached", f"{_mn(tank['load_attached'])} mN (thin aerofoil, 2 pi sin a cos a)"),
        ("normal force, peak", f"up to {_mn(tank['load_peak'])} mN (its suction turned by the vortex: Polhamus)"),
        ("added mass at the start", _added_mass(tank)),
    ]
    if tank["load_cell"] is not None:
        low, high = tank["load_cell"]
        fine, coarse = tank["resolution_share"]
        cell = f"range {_mn(low)} to {_mn(high)} mN, 3 to 5 times the peak; its usual 1 to 2 mN of resolution are "
        rows.append(("load cell", f"{cell}{100 * fine:.2g} to {100 * coarse:.2g} % of the peak (common practice)"))
    return [*rows, ("", "Flap, pitch rate and heave come on top.")]


def _added_mass(tank: dict[str, Any]) -> str:
    load = tank["added_mass_load"]
    if load is None:
        return "unbounded: an impulsive start asks for an infinite force"
    return f"{_mn(load)} mN at most (potential flow)" if load else "none"


def _mn(newtons: float) -> str:
    """Return a force in mN, three digits."""
    return f"{1e3 * newtons:.3g}"
