"""A case before it is run: domain and boundaries, plate with its points and cells, tow law."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.patches import Rectangle

from postprocess.figures import style
from postprocess.figures.vorticity import draw_bodies

MOST_LINES = 70


def draw_case(picture: dict[str, Any], path: Path | str) -> Path:
    """Draw a case and return the file.

    Parameters
    ----------
    picture : dict
        title; x_faces, y_faces (chords); shapes (name to (k, 2)); points (n, 2); core (x low, x high, y low, y high);
        sides (left, right, bottom, top to a phrase); tow_times (c/U), tow_speeds (U); tow_seconds, notes (optional).
    path : path
        PNG file.
    """
    with style.style():
        figure = style.new_figure(9.6, 6.8)
        (domain, close_up), (tow, notes) = figure.subplots(2, 2, width_ratios=[1, 1.1], height_ratios=[2, 1])
        _domain(domain, picture)
        _close_up(close_up, picture)
        _tow(tow, picture)
        _notes(notes, picture)
        figure.suptitle(picture["title"], fontsize=10.5, x=0.01, ha="left")
        return style.save(figure, path)


def _lines(ax: Axes, faces: np.ndarray, low: float, high: float, upright: bool, every: int) -> None:
    draw = ax.vlines if upright else ax.hlines
    draw(faces[::every], low, high, color=style.FAINT, lw=0.3)


def _domain(ax: Axes, picture: dict[str, Any]) -> None:
    x, y, core = picture["x_faces"], picture["y_faces"], picture["core"]
    _lines(ax, x, y[0], y[-1], True, max(1, x.size // MOST_LINES))
    _lines(ax, y, x[0], x[-1], False, max(1, y.size // MOST_LINES))
    ax.add_patch(Rectangle((core[0], core[2]), core[1] - core[0], core[3] - core[2], fill=False, ec=style.DRAG, lw=1.2))
    ax.text(core[1], core[3], " fine core", color=style.DRAG, fontsize=8, va="bottom")
    draw_bodies(ax, picture["shapes"])
    middle = (0.5 * (x[0] + x[-1]), 0.5 * (y[0] + y[-1]))
    box = {"boxstyle": "round,pad=0.25", "fc": "white", "ec": "none", "alpha": 0.85}
    common = {"fontsize": 8, "ha": "center", "va": "center", "bbox": box}
    sides = picture["sides"]
    inset_x, inset_y = 0.05 * (x[-1] - x[0]), 0.06 * (y[-1] - y[0])
    ax.text(x[0] + inset_x, middle[1], sides["left"], rotation=90, **common)
    ax.text(x[-1] - inset_x, middle[1], sides["right"], rotation=90, **common)
    ax.text(middle[0], y[0] + inset_y, sides["bottom"], **common)
    ax.text(middle[0], y[-1] - inset_y, sides["top"], **common)
    ax.set(xlim=(x[0], x[-1]), ylim=(y[0], y[-1]), xlabel="x (chords)", ylabel="y (chords)")
    ax.set_aspect("equal")
    ax.set_title(f"domain, {x.size - 1} x {y.size - 1} cells (lines thinned)", loc="left")


def _close_up(ax: Axes, picture: dict[str, Any]) -> None:
    x, y, core, points = picture["x_faces"], picture["y_faces"], picture["core"], picture["points"]
    inside_x, inside_y = x[(x >= core[0]) & (x <= core[1])], y[(y >= core[2]) & (y <= core[3])]
    every = max(1, int(np.ceil(inside_x.size / 160)))
    _lines(ax, inside_x, core[2], core[3], True, every)
    _lines(ax, inside_y, core[0], core[1], False, every)
    draw_bodies(ax, picture["shapes"])
    if len(points):
        ax.plot(points[:, 0], points[:, 1], ".", color=style.LIFT, ms=2.5, label="Lagrangian points")
        ax.legend(loc="upper right", handletextpad=0.2)
    words = "every cell" if every == 1 else f"one cell line in {every}"
    ax.set(xlim=core[:2], ylim=core[2:], xlabel="x (chords)", title="")
    ax.set_title(f"core, {words}", loc="left")
    ax.set_aspect("equal")


def _tow(ax: Axes, picture: dict[str, Any]) -> None:
    ax.plot(picture["tow_times"], picture["tow_speeds"], color=style.LIFT)
    ax.set(xlabel="time (c/U)", ylabel="tow speed (U)", ylim=(0, 1.15 * max(1.0, np.max(picture["tow_speeds"]))))
    ax.set_xlim(picture["tow_times"][0], picture["tow_times"][-1])
    seconds = picture.get("tow_seconds")
    if seconds is not None and picture["tow_times"][-1] > 0:
        factor = seconds[-1] / picture["tow_times"][-1]
        ax.secondary_xaxis("top", functions=(lambda t: t * factor, lambda s: s / factor)).set_xlabel("time (s)")


def _notes(ax: Axes, picture: dict[str, Any]) -> None:
    ax.axis("off")
    text = "\n".join(style.wrapped(note, 62) for note in picture.get("notes", []))
    ax.text(0.0, 1.0, text, transform=ax.transAxes, va="top", fontsize=8.5, linespacing=1.4, in_layout=False)
