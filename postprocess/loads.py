"""Loads of a run against travel and time, as coefficients and in millinewtons."""

from __future__ import annotations

import io
from pathlib import Path

import numpy as np

from ibsolver.case import scales
from ibsolver.case.model import Case
from ibsolver.runfile.atomic import write_bytes
from postprocess.run_view import RunView

CAUTION = (
    "Two-dimensional, laminar computation: a real plate's wake is three-dimensional, so loads here are rather too high and "
    "too regular. For choosing tests and load cells, not for strength or certification."
)


def load_table(run: RunView) -> dict[str, np.ndarray]:
    """Return the loads of every step.

    Returns
    -------
    dict of ndarray, each of shape (steps,)
        travel [chords], time [c/U], time_s [s], tow_speed [U], CL, CD, CM and those by momentum balance [1], the
        columns of every flap, and lift_mN, drag_mN [mN], moment_mNm [mN m] where the case is dimensional.
    """
    history, case = run.history, run.case
    names = ["travel", "time", "time_s", "tow_speed", "incidence_deg", "CL", "CD", "CM", "CL_momentum", "CD_momentum"]
    names += [name for name in history.columns if name.startswith(("opening_deg_", "CH_"))]
    table = {name: history[name] for name in names}
    force, moment = force_scale(case), scales.moment_scale(case)
    if force is not None and moment is not None:
        square = np.ones_like(table["time"])
        if case.tow.coefficient_speed == "instantaneous":
            square = table["tow_speed"] ** 2
        table["lift_mN"] = 1e3 * force * table["CL"] * square
        table["drag_mN"] = 1e3 * force * table["CD"] * square
        table["moment_mNm"] = 1e3 * moment * table["CM"] * square
    return table


def force_scale(case: Case) -> float | None:
    """Return rho U^2 c span / 2 (N), or None in a dimensionless run."""
    return scales.force_scale(case)


UNITS = {
    "travel": "chords", "time": "c/U", "time_s": "s", "tow_speed": "U", "incidence_deg": "deg",
    "lift_mN": "mN", "drag_mN": "mN", "moment_mNm": "mN m",
}  # fmt: skip


def write_table(path: Path | str, table: dict[str, np.ndarray], comments: list[str]) -> Path:
    """Write a table as CSV: comment lines, a header with units, rows. Returns the path."""
    text = io.StringIO()
    for comment in comments:
        text.write(f"# {comment}\n")
    text.write(",".join(f"{name} [{_unit(name)}]" for name in table) + "\n")
    np.savetxt(text, np.column_stack(list(table.values())), fmt="%.9g", delimiter=",")
    write_bytes(path, text.getvalue().encode())
    return Path(path)


def _unit(name: str) -> str:
    plain = name.removesuffix("_filtered")
    return "deg" if plain.startswith("opening_deg_") else UNITS.get(plain, "1")
