"""Power spectrum of a history, and the Strouhal number."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.signal import welch

from postprocess.filters import resample


@dataclass(frozen=True, eq=False)
class Spectrum:
    """Welch's estimate of a power spectral density (Welch 1967, IEEE Trans. Audio 15, 70).

    Parameters
    ----------
    frequency, density : ndarray, shape (n,)
        Cycles per unit of time; value squared per cycle.
    dominant : float
        Frequency of the greatest peak, refined by a parabola through the logarithms; nan without one.
    resolution : float
        Width of a frequency bin.
    """

    frequency: np.ndarray
    density: np.ndarray
    dominant: float
    resolution: float


def spectrum(time: np.ndarray, value: np.ndarray, segments: int = 1) -> Spectrum:
    """Return the spectrum of an uneven trace; time in c/U gives a Strouhal number as frequency.

    Parameters
    ----------
    time, value : ndarray, shape (n,)
    segments : int
        Number of half-overlapping pieces to average over.
    """
    rate = 1.0 / np.median(np.diff(time))
    even, trace = resample(time, value, rate)
    length = max(8, 2 * even.size // (segments + 1))
    frequency, density = welch(trace, fs=rate, window="hann", nperseg=length, nfft=4 * length, detrend="linear")
    power = float(density.sum() * (frequency[1] - frequency[0]))
    still = power < 1e-16 * float(np.mean(trace**2))  # nothing left after the trend but round-off
    dominant = float("nan") if still else _dominant(frequency, density)
    return Spectrum(frequency, density, dominant, float(rate / length))


def _dominant(frequency: np.ndarray, density: np.ndarray) -> float:
    """Return the frequency of the greatest inner peak that stands out tenfold over the median."""
    k = int(np.argmax(density))
    if not 0 < k < density.size - 1 or density[k] < 10 * np.median(density) or density[k] <= 0:
        return float("nan")
    low, middle, high = np.log(np.maximum(density[k - 1 : k + 2], 1e-300))
    shift = 0.5 * (low - high) / (low - 2 * middle + high)
    return float(frequency[k] + shift * (frequency[1] - frequency[0]))
