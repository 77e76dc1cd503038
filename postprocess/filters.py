"""The laboratory's low-pass filter, applied to a computed history.

Steps of a run are uneven; a trace is first resampled to an even rate by the shape-preserving cubic (Fritsch & Carlson
1980, SIAM J. Numer. Anal. 17, 238), then filtered.
"""

from __future__ import annotations

import math

import numpy as np
from scipy.interpolate import PchipInterpolator
from scipy.signal import bessel, butter, sosfilt, sosfilt_zi, sosfiltfilt

from ibsolver.errors import UsageError

KINDS = ("butterworth", "bessel", "moving average")
MOST_SAMPLES = 20_000_000
# Half-power width of a moving average: sin(pi x) / (pi x) = 1 / sqrt(2) at x = cut-off times length.
HALF_POWER = 0.442946470689452


def resample(time: np.ndarray, value: np.ndarray, rate: float) -> tuple[np.ndarray, np.ndarray]:
    """Return (time, value) at an even rate.

    Parameters
    ----------
    time, value : ndarray, shape (n,)
        Uneven trace, time increasing.
    rate : float
        Samples per unit of time, > 0.

    Raises
    ------
    UsageError
        If the trace is too short, the rate impossible, or the result would not fit into memory.
    """
    if time.size < 4:
        raise UsageError(f"A trace of {time.size} samples is too short to be filtered; at least 4 are needed.")
    if not (math.isfinite(rate) and rate > 0):
        raise UsageError(f"A rate of {rate:g} samples per unit of time is not possible; give one above 0.")
    samples = (time[-1] - time[0]) * rate
    if samples > MOST_SAMPLES:
        raise UsageError(f"A rate of {rate:g} gives {samples:.3g} samples; at most {MOST_SAMPLES:,} are allowed.")
    even = time[0] + np.arange(math.floor(samples) + 1) / rate
    return even, PchipInterpolator(time, value)(even)


def low_pass(
    value: np.ndarray,
    rate: float,
    cutoff: float,
    order: int = 4,
    kind: str = "butterworth",
    zero_phase: bool = True,
    pre_roll: float | None = None,
) -> np.ndarray:
    """Return an evenly sampled trace after a low-pass filter.

    Parameters
    ----------
    value : ndarray, shape (n,)
    rate, cutoff : float
        Samples and cycles per unit of time; the cut-off (half power of one pass) must lie below half the rate.
    order : int
        1 to 10; without meaning for a moving average. A zero-phase filter runs twice and so falls off twice as steeply.
    kind : {"butterworth", "bessel", "moving average"}
    zero_phase : bool
        Forward and backward, or centred: no delay. Otherwise causal, as a filter in the amplifier is.
    pre_roll : float, optional
        Length of the record before the trace (same unit of time as `rate`), still water that reads zero. Without it
        the filter starts settled on the first value.

    Raises
    ------
    UsageError
        If the cut-off, order, kind or pre-roll is impossible.
    """
    check(rate, cutoff, order, kind)
    before = _pre_roll_samples(pre_roll, rate)
    trace = np.concatenate([np.zeros(before), value])
    if kind == "moving average":
        smooth = _moving_average(trace, max(1, round(HALF_POWER * rate / cutoff)), zero_phase)
    else:
        make = {"butterworth": butter, "bessel": _bessel}[kind]
        smooth = _recursive(trace, make(order, cutoff, fs=rate, output="sos"), rate / cutoff, zero_phase)
    return smooth[before:]


def check(rate: float, cutoff: float, order: int, kind: str) -> None:
    """Refuse an impossible filter.

    Raises
    ------
    UsageError
        With what is allowed.
    """
    if not (math.isfinite(cutoff) and cutoff > 0):
        raise UsageError(f"A cut-off of {cutoff:g} cycles per unit of time is not possible; give one above 0.")
    if not cutoff < 0.5 * rate:
        raise UsageError(
            f"A cut-off of {cutoff:g} needs more than {2 * cutoff:g} samples per unit of time; there are {rate:g}."
        )
    if not 1 <= order <= 10:
        raise UsageError(f"A filter of order {order} is not possible; allowed are 1 to 10.")
    if kind not in KINDS:
        raise UsageError(f"{kind!r} is no filter known here; there are {', '.join(KINDS)}.")


def _pre_roll_samples(pre_roll: float | None, rate: float) -> int:
    length = 0.0 if pre_roll is None else pre_roll
    if not 0 <= length * rate <= MOST_SAMPLES:
        raise UsageError(
            f"A pre-roll of {length:g} is not possible; allowed are 0 to {MOST_SAMPLES:,} samples of it ({rate:g} per "
            "unit of time)."
        )
    return math.ceil(length * rate)


def _bessel(order: int, cutoff: float, fs: float, output: str) -> np.ndarray:
    return bessel(order, cutoff, fs=fs, output=output, norm="mag")


def _recursive(trace: np.ndarray, sections: np.ndarray, memory: float, zero_phase: bool) -> np.ndarray:
    """Run a recursive filter; `memory` is the number of samples in one period of the cut-off."""
    if zero_phase:
        return sosfiltfilt(sections, trace, padlen=min(trace.size - 1, 3 * math.ceil(memory)))
    settled = sosfilt_zi(sections) * trace[0]
    return sosfilt(sections, trace, zi=settled)[0]


def _moving_average(trace: np.ndarray, length: int, centred: bool) -> np.ndarray:
    """Return the mean over `length` samples around or up to each one; beyond the ends the last value holds."""
    ahead = (length - 1) // 2 if centred else 0
    padded = np.pad(trace, (length - 1 - ahead, ahead), mode="edge")
    total = np.concatenate([[0.0], np.cumsum(padded)])
    smooth = (total[length:] - total[:-length]) / length
    if centred and length % 2 == 0:  # an even mean lies half a sample early: take the one after it as well
        smooth = 0.5 * (smooth + np.append(smooth[1:], smooth[-1]))
    return smooth
