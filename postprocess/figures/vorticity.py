"""Vorticity stills: one panel or several, equal scale, one symmetric colour range."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
from matplotlib.axes import Axes

from postprocess.figures import style

Region = tuple[float, float, float, float]


def draw_vorticity(
    frames: list[Any],
    info: dict[str, Any],
    path: Path | str,
    *,
    limit: float | None = None,
    region: Region | None = None,
) -> Path:
    """Draw the vorticity of frames and return the file.

    Parameters
    ----------
    frames : list
        Objects with x_faces, y_faces, vorticity, shapes, travel, time_s (`ibsolver.runfile.frame.Frame`).
    info : dict
        title, reynolds, chord_mm (or None), length_word.
    path : path
        PNG file.
    limit : float, optional
        Vorticity at the ends of the colour range (U/c).
    region : tuple, optional
        (x low, x high, y low, y high) in chords.
    """
    box = region or default_region(frames)
    limit = limit or default_limit(frames, box)
    columns = 1 if len(frames) == 1 else 2
    rows = math.ceil(len(frames) / columns)
    ratio = (box[3] - box[2]) / (box[1] - box[0])
    panel = 7.0 if columns == 1 else 4.4
    with style.style():
        figure = style.new_figure(panel * columns + 0.9, rows * (panel * ratio + 0.4) + 0.55, "compressed")
        axes = np.atleast_1d(figure.subplots(rows, columns, sharex=True, sharey=True)).ravel()
        for ax, frame in zip(axes, frames, strict=False):
            mesh = draw_panel(ax, frame, box, limit)
            ax.set_title(_heading(frame, info), loc="left", fontsize=9)
        for ax in axes[len(frames) :]:
            ax.set_visible(False)
        for k, ax in enumerate(axes[: len(frames)]):
            if k % columns == 0:
                ax.set_ylabel(f"y ({info['length_word']}s)")
            if k // columns == rows - 1:
                ax.set_xlabel(f"x ({info['length_word']}s)")
        if info.get("chord_mm"):
            draw_scale_bar(axes[0], box, info["chord_mm"])
        bar = figure.colorbar(mesh, ax=list(axes), shrink=0.8, aspect=32, pad=0.015, extend="both")
        bar.set_label("vorticity (U/c), counter-clockwise positive")
        figure.suptitle(style.heading(info), fontsize=10, x=0.01, ha="left")
        return style.save(figure, path)


def draw_panel(ax: Axes, frame: Any, box: Region, limit: float) -> Any:
    """Draw one frame into an axes and return the coloured mesh."""
    columns = _inside(frame.x_faces, box[0], box[1])
    rows = _inside(frame.y_faces, box[2], box[3])
    x, y = frame.x_faces[columns], frame.y_faces[rows]
    mesh = ax.pcolormesh(
        x, y, frame.vorticity[rows, columns],
        cmap=style.ROTATION, vmin=-limit, vmax=limit, shading="gouraud", rasterized=True,
    )  # fmt: skip
    draw_bodies(ax, frame.shapes)
    ax.set_aspect("equal")
    ax.set_xlim(box[0], box[1])
    ax.set_ylim(box[2], box[3])
    return mesh


def draw_bodies(ax: Axes, shapes: dict[str, np.ndarray]) -> None:
    """Draw plates and flaps as lines, closed bodies as filled outlines."""
    for outline in shapes.values():
        if len(outline) == 2:
            ax.plot(outline[:, 0], outline[:, 1], color=style.BODY, lw=2.2, solid_capstyle="round")
        else:
            ax.fill(outline[:, 0], outline[:, 1], color="#c9ccd1", ec=style.BODY, lw=1.0)


def draw_scale_bar(ax: Axes, box: Region, chord_mm: float) -> None:
    """Draw a bar of a round number of millimetres in the lower right corner."""
    length_mm = _round_number(0.25 * (box[1] - box[0]) * chord_mm)
    length = length_mm / chord_mm
    right, low = box[1] - 0.04 * (box[1] - box[0]), box[2] + 0.07 * (box[3] - box[2])
    ax.plot([right - length, right], [low, low], color=style.INK, lw=2.0, solid_capstyle="butt")
    gap = 0.02 * (box[3] - box[2])
    ax.text(right - 0.5 * length, low + gap, f"{length_mm:g} mm", ha="center", va="bottom", fontsize=8)


def default_region(frames: list[Any]) -> Region:
    """Return a window around the bodies and their near wake."""
    corners = np.concatenate(
        [np.concatenate(list(f.shapes.values())) for f in frames if f.shapes] or [np.zeros((0, 2))]
    )
    x, y = frames[0].x_faces, frames[0].y_faces
    if corners.size == 0:
        return (float(x[0]), float(x[-1]), float(y[0]), float(y[-1]))
    low, high = corners.min(axis=0), corners.max(axis=0)
    middle = 0.5 * (low[1] + high[1])
    half = max(0.75, 0.5 * (high[1] - low[1]) + 0.45)
    return (
        max(low[0] - 0.5, float(x[0])),
        min(high[0] + 1.6, float(x[-1])),
        max(middle - half, float(y[0])),
        min(middle + half, float(y[-1])),
    )


def default_limit(frames: list[Any], box: Region) -> float:
    """Return a round limit that shows vortices and not only the boundary layer."""
    strong = []
    for frame in frames:
        rows, columns = _inside(frame.y_faces, box[2], box[3]), _inside(frame.x_faces, box[0], box[1])
        size = np.abs(frame.vorticity[rows, columns]).ravel()
        size = size[size > 0.02 * size.max()] if size.size and size.max() > 0 else size
        if size.size:
            strong.append(np.quantile(size, 0.85))
    return _round_number(max(strong, default=1.0)) or 1.0


def _inside(faces: np.ndarray, low: float, high: float) -> slice:
    """Return the slice of faces that covers a range, one beyond each end."""
    first = max(0, int(np.searchsorted(faces, low)) - 1)
    last = min(faces.size, int(np.searchsorted(faces, high)) + 2)
    return slice(first, last)


def _round_number(value: float) -> float:
    """Return the nearest of 1, 2, 3, 5, 8 times a power of ten."""
    if not value > 0 or not math.isfinite(value):
        return 0.0
    power = 10.0 ** math.floor(math.log10(value))
    return power * min((1, 2, 3, 5, 8, 10), key=lambda m: abs(m - value / power))


def _heading(frame: Any, info: dict[str, Any]) -> str:
    words = f"travel {frame.travel:.2f} {info['length_word']}s"
    return words + (f"   t = {frame.time_s:.2f} s" if math.isfinite(frame.time_s) else f"   t = {frame.time:.2f} c/U")
