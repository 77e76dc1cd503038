"""Lift and drag against travel, seconds and millinewtons."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from matplotlib.axes import Axes

from postprocess.figures import style

Table = dict[str, np.ndarray]

LOADS = (
    ("CL", "lift_mN", "lift coefficient $C_L$", "lift (mN)", style.LIFT),
    ("CD", "drag_mN", "drag coefficient $C_D$", "drag (mN)", style.DRAG),
)
SHORT_SHARE = 0.01  # a spike narrower than this share of the panel does not set the scale,
SPIKE = 1.35  # unless the rest needs a panel almost as high: less than this factor lower
STANDSTILL = 0.05  # with more of the time at rest than this, loads are drawn against time


def draw_forces(table: Table, info: dict[str, Any], path: Path | str, *, filtered: Table | None = None) -> Path:
    """Draw C_L and C_D against travel and return the file.

    Parameters
    ----------
    table : dict of ndarray, each of shape (steps,)
        travel (chords), time (c/U), time_s (s; nan in a dimensionless run), tow_speed (U), CL, CD, CL_momentum,
        CD_momentum; optional: lift_mN, drag_mN (mN), opening_deg_NAME and incidence_deg (deg).
    info : dict
        title, reynolds; optional: flaps (names), caution (small print), length_word ("chord" or "diameter").
    path : path
        PNG file.
    filtered : dict of ndarray, optional
        Table at an even rate with columns ``CL_filtered`` and ``CD_filtered``.

    Notes
    -----
    Loads are drawn against travel; against time where travel does not grow all the while (a carriage that waits,
    stops or returns), since the curve would fold onto itself.
    """
    by_travel = grows(table)
    unit = f"{info.get('length_word', 'chord')}s" if by_travel else "c/U"
    angles = moving_angles(table, info.get("flaps", ()))
    tow = "tow_speed" in table and np.ptp(table["tow_speed"]) > 1e-6
    heights = [3.0, 2.4] + [1.3] * bool(angles) + [0.42] * bool(tow)
    with style.style():
        figure = style.new_figure(7.2, 2.0 + 0.82 * sum(heights))
        axes = figure.subplots(len(heights), 1, sharex=True, height_ratios=heights)
        for ax, (name, newtons, label, newtons_label, colour) in zip(axes, LOADS, strict=False):
            _coefficient(ax, table, filtered, name, by_travel, unit, label, colour)
            if newtons in table:
                _millinewtons(ax, table, name, newtons, by_travel, newtons_label)
        if angles:
            _angles(axes[2], table, angles, by_travel)
        if tow:
            _tow_speed(axes[-1], table, by_travel)
        _abscissae(axes, table, by_travel, unit)
        style.put_heading(figure, style.heading(info))
        style.put_small_print(figure, info.get("caution", ""))
        figure.align_ylabels(axes)
        return style.save(figure, path)


def grows(table: Table) -> bool:
    """Return whether travel grows all the while, so that it can serve as abscissa."""
    travel, time = table["travel"], table["time"]
    steps, spans = np.diff(travel), np.diff(time)
    if steps.size == 0 or not travel[-1] > 0 or np.any(steps < 0):
        return False
    return bool(spans[steps < 1e-3 * spans].sum() <= STANDSTILL * (time[-1] - time[0]))


def moving_angles(table: Table, flaps: tuple[str, ...] | list[str]) -> dict[str, str]:
    """Return the columns of angles that vary, each with its name in the legend."""
    columns = {f"opening_deg_{name}": f"opening of flap {name}" for name in flaps}
    columns["incidence_deg"] = "incidence"
    return {column: word for column, word in columns.items() if column in table and np.ptp(table[column]) > 1e-6}


def load_limits(value: np.ndarray, x: np.ndarray) -> tuple[float, float, int | None]:
    """Return limits that a narrow spike does not spoil, and the index of the peak left out if there is one.

    Steps count by the width they take in the panel, since a run takes its shortest steps where the load is largest.

    Parameters
    ----------
    value, x : ndarray, shape (steps,)
        Load and abscissa, in any units.
    """
    index = np.flatnonzero(np.isfinite(value))
    if index.size == 0:
        return -1.0, 1.0, None
    order = index[np.argsort(value[index], kind="stable")]
    width = np.abs(np.gradient(x))[order] if x.size > 1 else np.ones(1)
    share = np.cumsum(width) / width.sum() if width.sum() > 0 else np.linspace(0.0, 1.0, order.size)
    first, last = np.searchsorted(share, [SHORT_SHARE, 1.0 - SHORT_SHARE])
    low, high = min(value[order[first]], 0.0), max(value[order[min(last, order.size - 1)]], 0.0)
    least, most = min(value[order[0]], 0.0), max(value[order[-1]], 0.0)
    if most - least <= SPIKE * (high - low) or high == low:
        low, high = least, most
    room = 0.06 * (high - low) or 0.1
    outside = [k for k in (order[0], order[-1]) if not low - room <= value[k] <= high + room]
    worst = max(outside, key=lambda k: abs(value[k]), default=None)
    return low - room, high + room, None if worst is None else int(worst)


def _x(table: Table, by_travel: bool) -> np.ndarray:
    return table["travel"] if by_travel else table["time"]


def _coefficient(
    ax: Axes, table: Table, filtered: Table | None, name: str, by_travel: bool, unit: str, label: str, colour: str
) -> None:
    x, value = _x(table, by_travel), table[name]
    ax.axhline(0, color=style.FAINT, lw=0.6, zorder=0)
    if filtered is not None:
        ax.plot(x, value, color=colour, lw=0.8, alpha=0.45, label="as computed", zorder=2)
        ax.plot(_x(filtered, by_travel), filtered[f"{name}_filtered"], color=colour, label="filtered", zorder=4)
    else:
        ax.plot(x, value, color=colour, lw=2.4, label="force on the bodies", zorder=2)
    if f"{name}_momentum" in table:
        # Over the solid line, not under it: where the two agree, dashes inside the line are what shows it.
        balance = table[f"{name}_momentum"]
        ax.plot(x, balance, color=style.INK, lw=0.8, ls=(0, (5, 4)), label="momentum balance", zorder=3)
    low, high, peak = load_limits(value, x)
    ax.set_ylim(low, high + 0.13 * (high - low))  # a strip on top for legend and note
    ax.set_ylabel(label)
    if peak is not None:
        _note_peak(ax, x[peak], value[peak], unit)
    ax.legend(loc="upper right", ncols=3, handlelength=2.6, borderaxespad=0.25)


def _note_peak(ax: Axes, x: float, value: float, unit: str) -> None:
    """Say that a spike leaves the panel, how high it is and where."""
    ax.text(
        0.012, 0.97, f"peak {value:.3g} at {x:.2g} {unit}, outside", transform=ax.transAxes, va="top", fontsize=8,
        zorder=6, bbox={"boxstyle": "round,pad=0.15", "fc": "white", "ec": "none", "alpha": 0.85},
    )  # fmt: skip
    edge, marker = (1.0, "^") if value > 0 else (0.0, "v")
    ax.plot([x], [edge], marker=marker, ms=5, color=style.INK, transform=ax.get_xaxis_transform(), clip_on=False)


def _millinewtons(ax: Axes, table: Table, name: str, newtons: str, by_travel: bool, label: str) -> None:
    """Add an axis of mN; where the coefficient refers to the momentary speed, also a curve, for there is no one scale."""
    factor = _common_factor(table[name], table[newtons])
    if factor is not None:
        ax.secondary_yaxis("right", functions=(lambda c: c * factor, lambda f: f / factor)).set_ylabel(label)
        return
    right = ax.twinx()
    x = _x(table, by_travel)
    right.plot(x, table[newtons], color=style.FOURTH, lw=1.2, ls="-.")
    low, high, _ = load_limits(table[newtons], x)
    right.set_ylim(low, high + 0.13 * (high - low))
    right.set_ylabel(f"{label}, dash-dotted", color=style.FOURTH)
    right.tick_params(axis="y", colors=style.FOURTH)


def _common_factor(coefficient: np.ndarray, load: np.ndarray) -> float | None:
    """Return the one number that turns a coefficient into mN, or None if there is none."""
    good = np.isfinite(coefficient) & np.isfinite(load)
    square = float(np.dot(coefficient[good], coefficient[good]))
    if square == 0.0:
        return None
    factor = float(np.dot(coefficient[good], load[good])) / square
    apart = np.abs(load[good] - factor * coefficient[good]).max()
    return factor if factor > 0 and apart <= 1e-6 * np.abs(load[good]).max() else None


def _angles(ax: Axes, table: Table, columns: dict[str, str], by_travel: bool) -> None:
    looks = [(colour, dash) for dash in ("-", "--", ":") for colour in (style.THIRD, style.FOURTH, style.LIFT)]
    for k, (column, word) in enumerate(columns.items()):
        colour, dash = looks[k % len(looks)]
        ax.plot(_x(table, by_travel), table[column], color=colour, ls=dash, label=word)
    ax.set_ylabel("angle (deg)")
    low, high = ax.get_ylim()
    ax.set_ylim(low, high + 0.35 * (high - low))
    ax.legend(loc="upper right", ncols=3, borderaxespad=0.25)


def _tow_speed(ax: Axes, table: Table, by_travel: bool) -> None:
    """Draw the speed of the carriage as a thin grey band, for orientation."""
    speed = table["tow_speed"]
    ax.fill_between(_x(table, by_travel), 0, speed, color=style.GRID, lw=0)
    ax.plot(_x(table, by_travel), speed, color=style.QUIET, lw=0.8)
    low, high = min(speed.min(), 0.0), max(speed.max(), 0.0)
    ax.set_ylim(low, high + 0.15 * (high - low))
    ax.set_yticks([0, 1] if high > 0.6 else [0])
    ax.set_ylabel("tow (U)")


def _abscissae(axes: np.ndarray, table: Table, by_travel: bool, unit: str) -> None:
    """Label the abscissa and add one in seconds where the run has them."""
    x, seconds = _x(table, by_travel), table["time_s"]
    axes[-1].set_xlabel(f"{'travel' if by_travel else 'time'} ({unit})")
    axes[-1].set_xlim(min(0.0, float(x[0])), float(x[-1]) if x[-1] > x[0] else None)
    if np.isfinite(seconds).all():
        rising = np.concatenate([[x[0] > 0], np.diff(x) > 0])
        _seconds(axes[0], np.concatenate([[0.0], x[rising]]), np.concatenate([[0.0], seconds[rising]]))


def _seconds(ax: Axes, x: np.ndarray, seconds: np.ndarray) -> None:
    """Add an axis of seconds; against travel it is uneven while the carriage accelerates."""
    if x.size < 2:
        return
    slope = (seconds[-1] - seconds[-2]) / (x[-1] - x[-2])

    def forward(value: np.ndarray) -> np.ndarray:
        return np.where(value <= x[-1], np.interp(value, x, seconds), seconds[-1] + (value - x[-1]) * slope)

    def backward(value: np.ndarray) -> np.ndarray:
        return np.where(value <= seconds[-1], np.interp(value, seconds, x), x[-1] + (value - seconds[-1]) / slope)

    ax.secondary_xaxis("top", functions=(forward, backward)).set_xlabel("time (s)")
