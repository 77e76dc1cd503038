"""Lift and drag against travel, seconds and millinewtons."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from matplotlib.axes import Axes

from postprocess.figures import style

Table = dict[str, np.ndarray]


def draw_forces(table: Table, info: dict[str, Any], path: Path | str, *, filtered: Table | None = None) -> Path:
    """Draw C_L and C_D against travel and return the file.

    Parameters
    ----------
    table : dict of ndarray
        `postprocess.loads.load_table`.
    info : dict
        title, reynolds, convective_time (s or None), mN_per_coefficient (or None), flaps (names), caution.
    path : path
        PNG file.
    filtered : dict of ndarray, optional
        Table at an even rate with columns ``CL_filtered`` and ``CD_filtered``.
    """
    moving = [name for name in info["flaps"] if np.ptp(table.get(f"opening_deg_{name}", np.zeros(1))) > 1e-6]
    with style.style():
        figure = style.new_figure(7.2, 5.6 + (1.5 if moving else 0.0))
        heights = [3, 2.4] + ([1.6] if moving else [])
        axes = figure.subplots(len(heights), 1, sharex=True, height_ratios=heights)
        _coefficient(axes[0], table, filtered, "CL", "lift coefficient $C_L$", style.LIFT)
        _coefficient(axes[1], table, filtered, "CD", "drag coefficient $C_D$", style.DRAG)
        if info.get("mN_per_coefficient"):
            for ax, word in zip(axes, ("lift (mN)", "drag (mN)"), strict=False):
                _millinewtons(ax, info["mN_per_coefficient"], word)
        if moving:
            _openings(axes[2], table, moving)
        _tow_speed(axes[0], table)
        axes[-1].set_xlabel("travel (chords)")
        axes[-1].set_xlim(0, table["travel"][-1])
        if np.isfinite(table["time_s"]).all():
            _seconds(axes[0], table)
        figure.suptitle(style.heading(info), fontsize=10, x=0.01, ha="left")
        axes[-1].annotate(
            style.wrapped(info["caution"], 100), (0, 0), (0, -40), "axes fraction", "offset points",
            fontsize=8, color=style.FAINT, va="top", annotation_clip=False,
        )  # fmt: skip
        return style.save(figure, path)


def _coefficient(ax: Axes, table: Table, filtered: Table | None, name: str, label: str, colour: str) -> None:
    travel, value = table["travel"], table[name]
    balance = table[f"{name}_momentum"]
    ax.plot(travel, balance, color=style.FAINT, lw=0.9, ls=(0, (4, 3)), label="by momentum balance", zorder=3)
    if filtered is not None:
        ax.plot(travel, value, color=colour, lw=0.8, alpha=0.4, label="as computed", zorder=1)
        ax.plot(filtered["travel"], filtered[f"{name}_filtered"], color=colour, label="filtered", zorder=2)
    else:
        ax.plot(travel, value, color=colour, lw=1.6, label="on the bodies", zorder=2)
    low, high, clipped = _limits(value)
    ax.set_ylim(low, high)
    ax.set_ylabel(label)
    ax.axhline(0, color=style.FAINT, lw=0.6, zorder=0)
    if clipped:
        ax.text(0.012, 0.97, f"peak {clipped:.3g} outside the frame", transform=ax.transAxes, va="top", fontsize=8)
    ax.legend(loc="lower right", ncols=3, handlelength=1.8)


def _limits(value: np.ndarray) -> tuple[float, float, float | None]:
    """Return limits that a short spike at the start does not spoil, and the clipped peak if there is one."""
    finite = value[np.isfinite(value)]
    settled = finite[max(3, finite.size // 100) :] if finite.size > 400 else finite
    low, high = min(settled.min(), 0.0), max(settled.max(), 0.0)
    room = 0.08 * (high - low) or 0.1
    extreme = finite[np.argmax(np.abs(finite))]
    outside = extreme > high + room or extreme < low - room
    return low - 2.2 * room, high + 1.5 * room, float(extreme) if outside else None


def _millinewtons(ax: Axes, factor: float, label: str) -> None:
    right = ax.secondary_yaxis("right", functions=(lambda c: c * factor, lambda f: f / factor))
    right.set_ylabel(label)


def _seconds(ax: Axes, table: Table) -> None:
    """Add an axis of seconds; time runs ahead of travel while the carriage accelerates."""
    travel, seconds = table["travel"], table["time_s"]
    keep = np.concatenate([[True], np.diff(travel) > 0])
    travel, seconds = np.concatenate([[0.0], travel[keep]]), np.concatenate([[0.0], seconds[keep]])

    def forward(x: np.ndarray) -> np.ndarray:
        slope = (seconds[-1] - seconds[-2]) / (travel[-1] - travel[-2])
        return np.where(x <= travel[-1], np.interp(x, travel, seconds), seconds[-1] + (x - travel[-1]) * slope)

    def backward(s: np.ndarray) -> np.ndarray:
        slope = (travel[-1] - travel[-2]) / (seconds[-1] - seconds[-2])
        return np.where(s <= seconds[-1], np.interp(s, seconds, travel), travel[-1] + (s - seconds[-1]) * slope)

    top = ax.secondary_xaxis("top", functions=(forward, backward))
    top.set_xlabel("time (s)")


def _tow_speed(ax: Axes, table: Table) -> None:
    """Shade the start, while the carriage is not yet at its final speed."""
    starting = table["tow_speed"] < 0.999
    if starting.any() and not starting.all():
        end = table["travel"][np.flatnonzero(starting)[-1]]
        ax.axvspan(0, end, color=style.FAINT, alpha=0.13, lw=0)
        ax.text(end, 0.02, " carriage at speed", transform=ax.get_xaxis_transform(), fontsize=8, color=style.FAINT)


def _openings(ax: Axes, table: Table, names: list[str]) -> None:
    for name, colour in zip(names, (style.THIRD, style.FOURTH, style.LIFT, style.DRAG) * 9, strict=False):
        ax.plot(table["travel"], table[f"opening_deg_{name}"], color=colour, label=f"flap {name}")
    ax.set_ylabel("opening (deg)")
    ax.legend(loc="lower right", ncols=3)
