"""A case before it is run: domain and boundaries, plate with its points and cells, tow law."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle

from postprocess.figures import style
from postprocess.figures.vorticity import Region, draw_bodies

MOST_LINES = 65  # grid lines across a panel that is to show how the grid is spread
CLOSE_CELLS = (44, 26)  # cells across the closest view, few enough to be counted


def draw_case(picture: dict[str, Any], path: Path | str) -> Path:
    """Draw a case and return the file.

    Parameters
    ----------
    picture : dict
        title; x_faces, y_faces (chords); shapes (name to (k, 2)); points (n, 2); core (x low, x high, y low, y high);
        sides (left, right, bottom, top to a phrase); tow_times (c/U), tow_speeds (U). Optional: tow_seconds (s),
        notes (small print), length_word ("chord" or "diameter").
    path : path
        PNG file.
    """
    close = close_region(picture)
    with style.style():
        if close is None:
            figure, domain, tow = _without_body(picture)
        else:
            figure = style.new_figure(10.0, 7.4)
            (domain, core), (tow, cells) = figure.subplots(2, 2, width_ratios=[1, 1.12], height_ratios=[1.35, 1])
            _core(core, picture, close)
            _cells(cells, picture, close)
        figure.get_layout_engine().set(hspace=0.07)
        _domain(domain, picture)
        _tow(tow, picture)
        style.put_heading(figure, picture["title"])
        style.put_small_print(figure, "\n".join(picture.get("notes", [])))
        return style.save(figure, path)


def _without_body(picture: dict[str, Any]) -> tuple[Figure, Axes, Axes]:
    """Return a figure as high as the domain asks for, with a panel for the domain and one for the tow."""
    x, y = picture["x_faces"], picture["y_faces"]
    height = min(4.5, 6.0 * float((y[-1] - y[0]) / (x[-1] - x[0])))
    figure = style.new_figure(7.0, height + 3.8)
    domain, tow = figure.subplots(2, 1, height_ratios=[height, 1.9])
    return figure, domain, tow


def close_region(picture: dict[str, Any]) -> Region | None:
    """Return a window of few cells at the first flap's hinge, else at the leading end of the first body.

    A body's leading end is its most upstream corner. None where there is no body.
    """
    shapes = list(picture["shapes"].values())
    if not shapes:
        return None
    x, y, core = picture["x_faces"], picture["y_faces"], picture["core"]
    wide = min(0.5 * CLOSE_CELLS[0] * float(np.diff(x).min()), 0.3 * (core[1] - core[0]))
    high = min(0.5 * CLOSE_CELLS[1] * float(np.diff(y).min()), 0.3 * (core[3] - core[2]))
    flap = next((shape for shape in shapes[1:] if len(shape) == 2), None)
    place = shapes[0][np.argmin(shapes[0][:, 0])] if flap is None else flap[0]
    shift = 0.7 if flap is None else 0.0  # a leading end sits near the left rim, so that more of the body is seen
    x_middle = float(np.clip(place[0] + shift * wide, x[0] + wide, max(x[-1] - wide, x[0] + wide)))
    y_middle = float(np.clip(place[1], y[0] + high, max(y[-1] - high, y[0] + high)))
    return (x_middle - wide, x_middle + wide, y_middle - high, y_middle + high)


def _grid(ax: Axes, picture: dict[str, Any], box: Region, most: int | None) -> int:
    """Draw the grid lines in a window, thinned to at most about `most` across; return one in how many is drawn."""
    x, y = picture["x_faces"], picture["y_faces"]
    x, y = x[(x >= box[0]) & (x <= box[1])], y[(y >= box[2]) & (y <= box[3])]
    every = 1 if most is None else max(1, -(-max(x.size, y.size) // most))
    look = {"color": style.GRID, "lw": 0.4, "zorder": 1}
    ax.vlines(_thinned(x, every), y[0], y[-1], **look)
    ax.hlines(_thinned(y, every), x[0], x[-1], **look)
    return every


def _thinned(faces: np.ndarray, every: int) -> np.ndarray:
    """Return one face in `every`, the outermost ones included."""
    return np.unique(np.concatenate([faces[::every], faces[-1:]]))


def _frame(ax: Axes, picture: dict[str, Any], box: Region, title: str) -> None:
    word = picture.get("length_word", "chord")
    ax.set(xlim=box[:2], ylim=box[2:], xlabel=f"x ({word}s)", ylabel=f"y ({word}s)")
    ax.set_aspect("equal", anchor="N")
    style.label_panel(ax, title)


def _box(ax: Axes, box: Region, colour: str, word: str, inside: bool = False) -> None:
    corner, size = (box[0], box[2]), (box[1] - box[0], box[3] - box[2])
    ax.add_patch(Rectangle(corner, *size, fill=False, ec=colour, lw=1.3, zorder=5))
    ax.annotate(
        word, (box[1], box[3]), (-4, -4) if inside else (0, 2), textcoords="offset points", ha="right",
        va="top" if inside else "bottom", fontsize=8, zorder=6,
        bbox={"boxstyle": "round,pad=0.12", "fc": "white", "ec": "none", "alpha": 0.85},
    )  # fmt: skip


def _domain(ax: Axes, picture: dict[str, Any]) -> None:
    x, y = picture["x_faces"], picture["y_faces"]
    whole = (x[0], x[-1], y[0], y[-1])
    every = _grid(ax, picture, whole, MOST_LINES)
    draw_bodies(ax, picture["shapes"], width=1.6)
    if picture["shapes"]:
        _box(ax, picture["core"], style.DRAG, "fine core")
    _sides(ax, picture["sides"])
    _frame(ax, picture, whole, f"domain, {x.size - 1} x {y.size - 1} cells{_drawn(every)}")


def _sides(ax: Axes, sides: dict[str, str]) -> None:
    """Write the condition of each side along it, inside the domain."""
    places = {"left": (0.0, 0.5, 6, 0), "right": (1.0, 0.5, -6, 0), "bottom": (0.5, 0.0, 0, 6), "top": (0.5, 1.0, 0, -6)}
    for name, (x, y, right, up) in places.items():
        ax.annotate(
            sides[name], (x, y), (right, up), xycoords="axes fraction", textcoords="offset points", fontsize=8,
            rotation=90 if right else 0, ha="center" if not right else "left" if right > 0 else "right",
            va="center" if not up else "bottom" if up > 0 else "top", zorder=6,
            bbox={"boxstyle": "round,pad=0.2", "fc": "white", "ec": style.GRID, "lw": 0.5},
        )  # fmt: skip


def _core(ax: Axes, picture: dict[str, Any], close: Region) -> None:
    every = _grid(ax, picture, picture["core"], 2 * MOST_LINES)
    draw_bodies(ax, picture["shapes"], width=1.6)
    _box(ax, close, style.LIFT, "view below", inside=True)
    _frame(ax, picture, picture["core"], f"fine core{_drawn(every)}")


def _cells(ax: Axes, picture: dict[str, Any], close: Region) -> None:
    """Draw every cell and every Lagrangian point in a small window."""
    margin = 2.0 * float(np.diff(picture["x_faces"]).min())
    wider = (close[0] - margin, close[1] + margin, close[2] - margin, close[3] + margin)
    _grid(ax, picture, wider, None)
    for outline in picture["shapes"].values():
        ax.plot(outline[:, 0], outline[:, 1], color=style.BODY, lw=0.9, zorder=3)
        if len(outline) > 2:
            ax.fill(outline[:, 0], outline[:, 1], fc="#eceef0", ec="none", zorder=0)
    points = np.asarray(picture["points"], dtype=float).reshape(-1, 2)
    ax.plot(points[:, 0], points[:, 1], "o", color=style.DRAG, mec="white", mew=0.4, ms=4.2, zorder=4)
    _frame(ax, picture, close, f"every cell; dots: Lagrangian points ({len(points)})")


def _drawn(every: int) -> str:
    return "" if every == 1 else f", one line in {every} drawn"


def _tow(ax: Axes, picture: dict[str, Any]) -> None:
    times, speeds = np.asarray(picture["tow_times"]), np.asarray(picture["tow_speeds"])
    ax.fill_between(times, 0, speeds, color=style.GRID, alpha=0.5, lw=0)
    ax.plot(times, speeds, color=style.LIFT, lw=1.8)
    low, high = min(float(speeds.min()), 0.0), max(float(speeds.max()), 1.0)
    ax.set(xlabel="time (c/U)", ylabel="tow speed (U)", ylim=(1.1 * low, high + 0.12 * (high - low)))
    if times[-1] > times[0]:
        ax.set_xlim(times[0], times[-1])
    seconds = picture.get("tow_seconds")
    if seconds is not None and times[-1] > 0 and np.isfinite(seconds[-1]):
        factor = seconds[-1] / times[-1]
        ax.secondary_xaxis("top", functions=(lambda t: t * factor, lambda s: s / factor)).set_xlabel("time (s)")
