"""The laboratory's low-pass filter, applied to a computed history.

Steps of a run are uneven; a trace is first resampled to an even rate by the shape-preserving cubic (Fritsch & Carlson
1980, SIAM J. Numer. Anal. 17, 238), then filtered.
"""

from __future__ import annotations

import numpy as np
from scipy.interpolate import PchipInterpolator
from scipy.signal import bessel, butter, sosfilt, sosfilt_zi, sosfiltfilt

from ibsolver.errors import UsageError

KINDS = ("butterworth", "bessel")


def resample(time: np.ndarray, value: np.ndarray, rate: float) -> tuple[np.ndarray, np.ndarray]:
    """Return (time, value) at an even rate.

    Parameters
    ----------
    time, value : ndarray, shape (n,)
        Uneven trace, time increasing.
    rate : float
        Samples per unit of time, > 0.
    """
    if time.size < 4:
        raise UsageError(f"A trace of {time.size} samples is too short to be filtered; at least 4 are needed.")
    even = np.arange(time[0], time[-1], 1.0 / rate)
    return even, PchipInterpolator(time, value)(even)


def low_pass(
    value: np.ndarray, rate: float, cutoff: float, order: int = 4, kind: str = "butterworth", zero_phase: bool = True
) -> np.ndarray:
    """Return an evenly sampled trace after a low-pass filter.

    Parameters
    ----------
    value : ndarray, shape (n,)
    rate, cutoff : float
        Samples and cycles per unit of time; the cut-off must lie below half the rate.
    order : int
        1 to 10. A zero-phase filter runs twice and so falls off twice as steeply.
    kind : {"butterworth", "bessel"}
    zero_phase : bool
        Forward and backward (no delay); otherwise causal, as a filter in the amplifier is, settled on the first value.

    Raises
    ------
    UsageError
        If the cut-off, order or kind is impossible.
    """
    if not 0 < cutoff < 0.5 * rate:
        raise UsageError(
            f"A cut-off of {cutoff:g} needs more than {2 * cutoff:g} samples per unit of time; there are {rate:g}."
        )
    if not 1 <= order <= 10:
        raise UsageError(f"A filter of order {order} is not possible; allowed are 1 to 10.")
    if kind not in KINDS:
        raise UsageError(f"{kind!r} is no filter known here; there are {', '.join(KINDS)}.")
    if kind == "butterworth":
        sections = butter(order, cutoff, fs=rate, output="sos")
    else:
        sections = bessel(order, cutoff, fs=rate, output="sos", norm="mag")
    if zero_phase:
        return sosfiltfilt(sections, value, padlen=min(value.size - 1, 3 * int(np.ceil(rate / cutoff))))
    settled = sosfilt_zi(sections) * value[0]
    return sosfilt(sections, value, zi=settled)[0]
