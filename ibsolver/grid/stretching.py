"""One-dimensional face positions: a uniform core, geometric growth to the ends.

The core's faces lie on whole multiples of the spacing, so that the same body in another domain sits at the
same place between the faces.
"""

from __future__ import annotations

import math

import numpy as np
from scipy.optimize import brentq


def growing_widths(first: float, distance: float, ratio: float, largest: float) -> np.ndarray:
    """Return cell widths that grow from `first` and fill `distance` exactly.

    Widths grow by `ratio` up to `largest` and stay there; the ratio is then lowered a little (never raised
    above the one asked for by more than round-off) so that a whole number of cells fits.

    Parameters
    ----------
    first : float
        Width of the uniform cells next door (chords), > 0.
    distance : float
        Length to fill (chords), >= 0.
    ratio : float
        Growth from cell to cell, >= 1.
    largest : float
        Greatest width (chords), >= first.

    Returns
    -------
    ndarray, shape (n,)
        Widths from the core outward; empty where `distance` is 0.
    """
    if distance <= 1e-9 * first:
        return np.zeros(0)
    if distance < first:
        return np.array([distance])
    count = 1
    while _widths(first, count, ratio, largest).sum() < distance * (1 - 1e-12):
        count += 1
    if count * first >= distance:  # too short to grow: spread evenly
        count = max(1, round(distance / first))
        return np.full(count, distance / count)

    def excess(candidate: float) -> float:
        return _widths(first, count, candidate, largest).sum() - distance

    fitted = brentq(excess, 1.0, ratio * (1 + 1e-12) + 1e-15, xtol=1e-15) if excess(ratio) > 0 else ratio
    widths = _widths(first, count, fitted, largest)
    return widths * (distance / widths.sum())


def _widths(first: float, count: int, ratio: float, largest: float) -> np.ndarray:
    """Return `count` widths growing by `ratio` from the first cell outside the core, capped at `largest`."""
    return np.minimum(first * ratio ** np.arange(1, count + 1), max(largest, first))


def stretched_faces(
    low: float, core_low: float, core_high: float, high: float, spacing: float, ratio: float, largest: float
) -> np.ndarray:
    """Return face positions with a uniform core and cells that grow outside it.

    Parameters
    ----------
    low, high : float
        Ends of the domain (chords).
    core_low, core_high : float
        The core must at least cover this range (chords); it is widened to whole multiples of `spacing`.
    spacing : float
        Cell width in the core (chords).
    ratio, largest : float
        Growth ratio and greatest width outside the core.

    Returns
    -------
    ndarray, shape (n + 1,)
        Increasing face positions; the first is `low`, the last `high`.
    """
    first = math.floor(core_low / spacing + 1e-9)
    last = math.ceil(core_high / spacing - 1e-9)
    first = max(first, math.ceil(low / spacing - 1e-9))
    last = min(last, math.floor(high / spacing + 1e-9))
    core = spacing * np.arange(first, last + 1)
    below = growing_widths(spacing, core[0] - low, ratio, largest)
    above = growing_widths(spacing, high - core[-1], ratio, largest)
    faces = np.concatenate([core[0] - np.cumsum(below)[::-1], core, core[-1] + np.cumsum(above)])
    faces[0], faces[-1] = low, high
    return faces


def uniform_faces(low: float, high: float, spacing: float) -> np.ndarray:
    """Return evenly spaced faces from `low` to `high`, about `spacing` apart."""
    count = max(1, round((high - low) / spacing))
    return np.linspace(low, high, count + 1)
