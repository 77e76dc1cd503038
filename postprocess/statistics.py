"""Means with their statistical uncertainty, and peaks."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.stats import t as student

BATCHES = 15  # common practice: 10 to 20 batches


@dataclass(frozen=True)
class Mean:
    """A time mean.

    Parameters
    ----------
    value : float
    half_width : float
        Half the 95 % confidence interval by batch means; nan where it cannot be told.
    batches : int
    rms : float
        Root mean square of the deviation from the mean.
    trusted : bool
        Whether every batch is at least five periods of the dominant oscillation long.
    """

    value: float
    half_width: float
    batches: int
    rms: float
    trusted: bool


def window_mean(time: np.ndarray, value: np.ndarray, window: tuple[float, float], period: float | None = None) -> Mean:
    """Return the time-weighted mean over a window with its confidence interval.

    Batch means: the window is cut into batches, whose means scatter as independent values if each batch is long
    against the correlation time (at least 5 to 10 periods, common practice).

    Parameters
    ----------
    time, value : ndarray, shape (n,)
        Uneven trace.
    window : tuple of float
        First and last time.
    period : float, optional
        Period of the dominant oscillation, if any.
    """
    length = window[1] - window[0]
    edges = np.linspace(*window, BATCHES + 1)
    means = np.array([_mean(time, value, a, b) for a, b in zip(edges[:-1], edges[1:], strict=True)])
    average = _mean(time, value, *window)
    scatter = means.std(ddof=1) / np.sqrt(BATCHES)
    trusted = period is not None and bool(length / BATCHES >= 5 * period)
    rms = np.sqrt(max(_mean(time, (value - average) ** 2, *window), 0.0))
    return Mean(float(average), float(student.ppf(0.975, BATCHES - 1) * scatter), BATCHES, float(rms), trusted)


def _mean(time: np.ndarray, value: np.ndarray, start: float, end: float) -> float:
    """Return the mean of the piecewise linear trace between two times."""
    inside = (time > start) & (time < end)
    t = np.concatenate([[start], time[inside], [end]])
    return float(np.trapezoid(np.interp(t, time, value), t) / (end - start))


@dataclass(frozen=True)
class Peak:
    """Greatest or least value of a trace and its time."""

    time: float
    value: float


def peak(time: np.ndarray, value: np.ndarray, sign: int = 1) -> Peak:
    """Return the greatest (sign 1) or least (sign -1) value, refined by a parabola through its neighbours."""
    k = int(np.nanargmax(sign * value))
    if not 0 < k < value.size - 1:
        return Peak(float(time[k]), float(value[k]))
    t, v = time[k - 1 : k + 2] - time[k], value[k - 1 : k + 2]
    a, b, c = np.polyfit(t, v, 2)
    if a == 0 or not t[0] <= -b / (2 * a) <= t[2]:
        return Peak(float(time[k]), float(value[k]))
    return Peak(float(time[k] - b / (2 * a)), float(c - b * b / (4 * a)))
