"""Vorticity stills: one panel or several, equal scale, one symmetric colour range."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from matplotlib.patheffects import Normal, Stroke

from ibsolver.errors import UsageError
from postprocess.figures import style

Region = tuple[float, float, float, float]

PANEL_WIDTH = {1: 7.0, 2: 4.4, 3: 3.7}  # inches, by the number of columns
TALLEST = 5.5  # inches, of one panel
NEAR = 0.04  # chords: the boundary layer's own vorticity does not set the colours
SHARE = 0.75  # of the circulation away from the bodies lies within the colour range


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
        Objects with x_faces, y_faces (chords), vorticity (U/c, at cell corners, shape (y_faces, x_faces)), shapes
        (name to (k, 2)), travel (chords), time (c/U), time_s (s or nan): `ibsolver.runfile.frame.Frame`.
    info : dict
        title, reynolds; optional: chord_mm (for a scale bar), length_word ("chord" or "diameter").
    path : path
        PNG file.
    limit : float, optional
        Vorticity at the ends of the colour range (U/c).
    region : tuple, optional
        (x low, x high, y low, y high) in chords.

    Raises
    ------
    UsageError
        If there is no frame, the limit is not positive, or the region shows no part of the domain.
    """
    _require(frames, limit, region)
    box = default_region(frames) if region is None else region
    limit = default_limit(frames, box) if limit is None else limit
    columns = 1 if len(frames) == 1 else 2 if len(frames) <= 6 else 3
    rows = math.ceil(len(frames) / columns)
    ratio = (box[3] - box[2]) / (box[1] - box[0])
    width = min(PANEL_WIDTH[columns], max(TALLEST / ratio, 2.6))
    with style.style():
        figure = style.new_figure(width * columns + 1.3, rows * (width * ratio + 0.38) + 0.95, "compressed")
        axes = figure.subplots(rows, columns, squeeze=False)
        for ax, frame in zip(axes.flat, frames, strict=False):
            mesh = draw_panel(ax, frame, box, limit)
            style.label_panel(ax, _heading(frame, info))
        _tidy(axes, len(frames), info.get("length_word", "chord"))
        if info.get("chord_mm"):
            draw_scale_bar(axes[0, 0], box, info["chord_mm"])
        extend = _extend(frames, box, limit)
        bar = figure.colorbar(mesh, ax=list(axes.flat), shrink=0.85, aspect=32, pad=0.015, extend=extend)
        bar.set_label("vorticity (U/c), counter-clockwise positive")
        style.put_heading(figure, style.heading(info))
        style.trim_height(figure)
        return style.save(figure, path)


def draw_panel(ax: Axes, frame: Any, box: Region, limit: float) -> Any:
    """Draw one frame into an axes and return the coloured mesh.

    Colours run linearly between the corners, at the corners' own places: a stretched grid is not squeezed.
    """
    rows, columns = _window(frame, box)
    mesh = ax.pcolormesh(
        frame.x_faces[columns], frame.y_faces[rows], np.nan_to_num(frame.vorticity[rows, columns]),
        cmap=style.ROTATION, vmin=-limit, vmax=limit, shading="gouraud", rasterized=True,
    )  # fmt: skip
    draw_bodies(ax, frame.shapes)
    ax.set_aspect("equal")
    ax.set_xlim(box[0], box[1])
    ax.set_ylim(box[2], box[3])
    return mesh


def draw_bodies(ax: Axes, shapes: dict[str, np.ndarray], width: float = 2.2) -> None:
    """Draw plates and flaps as lines, closed bodies as filled outlines.

    A white rim keeps them apart from dark vorticity; all rims lie under all bodies, so that a hinge has none.
    """
    thin = [outline for outline in shapes.values() if len(outline) == 2]
    rims = LineCollection(thin, colors="white", linewidths=width + 1.2, capstyle="round", zorder=3)
    ax.add_collection(rims, autolim=False)
    for outline in shapes.values():
        if len(outline) == 2:
            ax.plot(outline[:, 0], outline[:, 1], color=style.BODY, lw=width, solid_capstyle="round", zorder=4)
        elif len(outline) > 2:
            ax.fill(
                outline[:, 0], outline[:, 1], fc="#c9ccd1", ec=style.BODY, lw=1.0, zorder=4,
                path_effects=[Stroke(linewidth=2.2, foreground="white"), Normal()],
            )  # fmt: skip


def draw_scale_bar(ax: Axes, box: Region, chord_mm: float) -> None:
    """Draw a bar of a round number of millimetres in the lower right corner."""
    length_mm = _round_number(0.25 * (box[1] - box[0]) * chord_mm)
    length = length_mm / chord_mm
    right, low = box[1] - 0.04 * (box[1] - box[0]), box[2] + 0.07 * (box[3] - box[2])
    rim = [Stroke(linewidth=3.0, foreground="white"), Normal()]
    ax.plot([right - length, right], [low, low], color=style.INK, lw=2.0, solid_capstyle="butt", zorder=5)
    ax.annotate(
        f"{length_mm:g} mm", (right - 0.5 * length, low), (0, 3), textcoords="offset points", ha="center", va="bottom",
        fontsize=8, zorder=5, path_effects=rim,
    )  # fmt: skip


def default_region(frames: list[Any]) -> Region:
    """Return a window around the bodies and their near wake, at most the whole domain."""
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
        max(float(low[0]) - 0.5, float(x[0])),
        min(float(high[0]) + 1.6, float(x[-1])),
        max(float(middle - half), float(y[0])),
        min(float(middle + half), float(y[-1])),
    )


def default_limit(frames: list[Any], box: Region) -> float:
    """Return a round limit that shows vortices and not only the boundary layer.

    Three quarters of the circulation (of either sign) in the window, further than `NEAR` from the bodies and over all
    frames, lie in vorticity weaker than the limit before it is rounded up. Weighing by circulation makes it independent of
    how the grid crowds its points.
    """
    parts = [_away(frame, box) for frame in frames]
    strength = np.concatenate([strength for strength, _ in parts])
    circulation = np.concatenate([strength * area for strength, area in parts])
    if not circulation.sum() > 0:  # at the start, all vorticity is still at the bodies
        everything = [np.abs(np.nan_to_num(frame.vorticity[_window(frame, box)])).max() for frame in frames]
        return _round_up(0.25 * float(max(everything))) or 1.0
    order = np.argsort(strength)
    share = np.cumsum(circulation[order])
    return _round_up(float(strength[order][np.searchsorted(share, SHARE * share[-1])])) or 1.0


def _away(frame: Any, box: Region) -> tuple[np.ndarray, np.ndarray]:
    """Return |vorticity| and area of the corners in the window that lie away from the bodies."""
    rows, columns = _window(frame, box)
    x, y = frame.x_faces[columns].astype(float), frame.y_faces[rows].astype(float)
    strength = np.abs(np.nan_to_num(frame.vorticity[rows, columns].astype(float)))
    area = np.outer(np.gradient(y), np.gradient(x))
    far = np.ones(strength.shape, dtype=bool)
    for outline in frame.shapes.values():
        far &= _distance(x, y, outline) > NEAR
    return strength[far], area[far]


def _distance(x: np.ndarray, y: np.ndarray, outline: np.ndarray) -> np.ndarray:
    """Return the distance of grid points from a line of at most about sixty straight pieces, shape (y, x)."""
    every = max(1, len(outline) // 60)
    corners = np.concatenate([outline[:-1:every], outline[-1:]]).astype(float)
    least = np.full((y.size, x.size), np.inf)
    for start, end in zip(corners[:-1], corners[1:], strict=True):
        side = end - start
        along = (x - start[0]) * side[0] + (y[:, None] - start[1]) * side[1]
        share = np.clip(along / max(float(side @ side), 1e-30), 0.0, 1.0)
        least = np.minimum(least, np.hypot(x - start[0] - share * side[0], y[:, None] - start[1] - share * side[1]))
    return least


def _require(frames: list[Any], limit: float | None, region: Region | None) -> None:
    """Refuse what cannot be drawn."""
    if not frames:
        raise UsageError("No frame to draw: the list of frames is empty.")
    if limit is not None and not 0 < limit < math.inf:
        raise UsageError(f"The colour limit {limit:g} U/c cannot be used: give a number above 0.")
    if region is None:
        return
    x, y = frames[0].x_faces, frames[0].y_faces
    if not (max(region[0], x[0]) < min(region[1], x[-1]) and max(region[2], y[0]) < min(region[3], y[-1])):
        raise UsageError(
            f"The region x {region[0]:g} to {region[1]:g}, y {region[2]:g} to {region[3]:g} shows no part of the domain, "
            f"x {x[0]:.3g} to {x[-1]:.3g}, y {y[0]:.3g} to {y[-1]:.3g} chords. Give X0 < X1 and Y0 < Y1 within it."
        )


def _tidy(axes: np.ndarray, panels: int, length_word: str) -> None:
    """Label outer panels only and take empty ones away."""
    rows, columns = axes.shape
    for k, ax in enumerate(axes.flat):
        if k >= panels:
            ax.set_visible(False)
        lowest, leftmost = k + columns >= panels, k % columns == 0
        ax.tick_params(labelbottom=lowest, labelleft=leftmost)
        ax.set_xlabel(f"x ({length_word}s)" if lowest else "")
        ax.set_ylabel(f"y ({length_word}s)" if leftmost else "")


def _extend(frames: list[Any], box: Region, limit: float) -> str:
    """Return at which ends the colour bar carries an arrow: where vorticity goes beyond."""
    windows = [np.nan_to_num(frame.vorticity[_window(frame, box)]) for frame in frames]
    below, above = any(w.min() < -limit for w in windows), any(w.max() > limit for w in windows)
    return "both" if below and above else "min" if below else "max" if above else "neither"


def _window(frame: Any, box: Region) -> tuple[slice, slice]:
    """Return the rows and columns of corners that cover a region."""
    return _inside(frame.y_faces, box[2], box[3]), _inside(frame.x_faces, box[0], box[1])


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


def _round_up(value: float) -> float:
    """Return the least of 1, 1.5, 2, 3, 5, 8 times a power of ten that is not below a value."""
    if not value > 0 or not math.isfinite(value):
        return 0.0
    power = 10.0 ** math.floor(math.log10(value))
    return power * min(m for m in (1, 1.5, 2, 3, 5, 8, 10) if m >= value / power * (1 - 1e-9))


def _heading(frame: Any, info: dict[str, Any]) -> str:
    words = f"travel {frame.travel:.2f} {info.get('length_word', 'chord')}s"
    return words + (f"   t = {frame.time_s:.2f} s" if math.isfinite(frame.time_s) else f"   t = {frame.time:.2f} c/U")
