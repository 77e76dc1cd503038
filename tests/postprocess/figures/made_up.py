"""Invented frames, loads and cases of known form, so that what a figure shows can be told beforehand.

The frames hold Lamb-Oseen vortices (Lamb, Hydrodynamics, 1932, art. 334a): vorticity Gamma / (pi a^2) exp(-r^2 / a^2).
"""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any

import numpy as np

INCIDENCE = np.radians(18.0)
PIVOT = 0.25


def along_plate(place: float, above: float = 0.0) -> np.ndarray:
    """Return the point at a place along the chord (from the leading edge) and a height above the plate (chords)."""
    along, across = np.array([np.cos(INCIDENCE), -np.sin(INCIDENCE)]), np.array([np.sin(INCIDENCE), np.cos(INCIDENCE)])
    return (place - PIVOT) * along + above * across


def plate_and_flap(opening_deg: float = 25.0) -> dict[str, np.ndarray]:
    """Return plate and flap as end points."""
    hinge, opening = along_plate(0.12), np.radians(opening_deg) - INCIDENCE
    tip = hinge + 0.2 * np.array([np.cos(opening), np.sin(opening)])
    return {"plate": np.array([along_plate(0.0), along_plate(1.0)]), "front": np.array([hinge, tip])}


def circle() -> dict[str, np.ndarray]:
    """Return the outline of a cylinder of unit diameter."""
    angle = np.linspace(0.0, 2.0 * np.pi, 121)
    return {"cylinder": 0.5 * np.column_stack([np.cos(angle), np.sin(angle)])}


def stretched(low: float, high: float, core: float, spacing: float, ratio: float = 1.07) -> np.ndarray:
    """Return faces, even within +- core and growing outside it, that reach at least from low to high."""
    middle = np.arange(-core, core + 0.5 * spacing, spacing)
    widths = spacing * ratio ** np.arange(1, 400)
    out = np.cumsum(widths)
    below, above = out[: np.searchsorted(out, -low - core) + 1], out[: np.searchsorted(out, high - core) + 1]
    return np.concatenate([-core - below[::-1], middle, core + above])


def vortex(x: np.ndarray, y: np.ndarray, place: np.ndarray, circulation: float, radius: float) -> np.ndarray:
    """Return the vorticity of one vortex on corners, shape (y, x)."""
    square = (x - place[0]) ** 2 + (y[:, None] - place[1]) ** 2
    return circulation / (np.pi * radius**2) * np.exp(-square / radius**2)


def frame(
    travel: float = 2.0, shapes: dict[str, np.ndarray] | None = None, seconds: float = 3.0, spacing: float = 1 / 48
) -> SimpleNamespace:
    """Return a frame with a clockwise vortex over the plate and a counter-clockwise one behind it."""
    shapes = plate_and_flap() if shapes is None else shapes
    x, y = stretched(-3.0, 6.0, 1.0, spacing), stretched(-3.0, 3.0, 1.0, spacing)
    leading = vortex(x, y, along_plate(0.15 + 0.15 * travel, 0.2), -1.6, 0.09 + 0.03 * travel)
    starting = vortex(x, y, np.array([0.6 + 0.6 * travel, -0.15]), 1.2, 0.12 + 0.02 * travel)
    return SimpleNamespace(
        x_faces=x.astype(np.float32),
        y_faces=y.astype(np.float32),
        vorticity=(leading + starting).astype(np.float32),
        shapes=shapes,
        travel=travel,
        time=travel + 0.5,
        time_s=seconds * (travel + 0.5),
    )


def smooth_start(time: np.ndarray, ramp: float = 1.0) -> tuple[np.ndarray, np.ndarray]:
    """Return speed and travel of a tow that starts along 10 x^3 - 15 x^4 + 6 x^5."""
    x = np.clip(time / ramp, 0.0, 1.0)
    travel = ramp * (2.5 * x**4 - 3.0 * x**5 + x**6) + np.maximum(time - ramp, 0.0)
    return 10 * x**3 - 15 * x**4 + 6 * x**5, travel


def loads(kind: str = "smooth", *, dimensional: bool = True, flaps: bool = False, steps: int = 1500) -> dict[str, Any]:
    """Return a table of loads over 8 c/U: smooth or impulsive start, or a carriage that stops half-way."""
    time = 8.0 * (np.arange(1, steps + 1) / steps) ** 1.3
    speed, travel = smooth_start(time)
    lift = speed * (1.5 + 0.6 * np.sin(0.9 * travel)) + 0.4 * np.gradient(speed, time)
    if kind == "impulsive":
        speed, travel = np.ones_like(time), time
        lift = 1.5 + 0.6 * np.sin(0.9 * time) + 0.25 / np.sqrt(time) + 30.0 * np.exp(-time / 0.004)
    if kind == "stops":
        speed = np.where(time < 4.0, speed, np.maximum(0.0, 1.0 - (time - 4.0)))
        travel = np.cumsum(speed * np.gradient(time))
        lift = lift * speed
    drag = 0.33 * lift
    table = {
        "travel": travel, "time": time, "time_s": 3.06 * time if dimensional else np.full(steps, np.nan),
        "tow_speed": speed, "incidence_deg": np.full(steps, 18.0), "CL": lift, "CD": drag,
        "CL_momentum": 1.004 * lift, "CD_momentum": 0.997 * drag,
    }  # fmt: skip
    if dimensional:
        table |= {"lift_mN": 2.3 * lift, "drag_mN": 2.3 * drag}
    if flaps:
        table |= {"opening_deg_front": 25.0 + 8.0 * np.sin(2.5 * time), "opening_deg_rear": np.full(steps, 12.0)}
    return table


def case_picture(body: bool = True, *, seconds: bool = True) -> dict[str, Any]:
    """Return what `check --picture` hands over, with a flapped plate or without any body."""
    x, y = stretched(-6.0, 10.0, 1.0, 1 / 64), stretched(-6.0, 6.0, 0.5, 1 / 64)
    shapes = plate_and_flap() if body else {}
    points = [start + (end - start) * np.linspace(0, 1, 90)[:, None] for start, end in shapes.values()]
    time = np.linspace(0.0, 6.5, 400)
    return {
        "title": "Invented plate at 18 deg with a flap, Re 1200",
        "x_faces": x, "y_faces": y, "shapes": shapes,
        "points": np.concatenate(points) if body else np.zeros((0, 2)),
        "core": (-1.0, 1.0, -0.5, 0.5),
        "sides": {"left": "inflow", "right": "outflow", "bottom": "tank wall, slides past the carriage", "top": "slip"},
        "tow_times": time, "tow_speeds": smooth_start(time)[0],
        "tow_seconds": 3.06 * time if seconds else None,
        "notes": ["Re = 1,200, 64 cells per chord.", "Travel 6 chords in 6.5 c/U."],
    }  # fmt: skip
