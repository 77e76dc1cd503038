"""`forces`: loads of a run as CSV, plot and summary, filtered as in the laboratory on request."""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from ibsolver.case import scales
from ibsolver.errors import StorageError, UsageError
from postprocess import filters
from postprocess.loads import CAUTION, load_table, write_table
from postprocess.run_view import RunView, open_run
from postprocess.spectrum import Spectrum, spectrum
from postprocess.statistics import Mean, peak, window_mean

START_ROWS = 3  # steps that an impulsive start fills with a spike
FILTERED = ("CL", "CD", "CM", "lift_mN", "drag_mN", "moment_mNm")


@dataclass(frozen=True)
class Filter:
    """A laboratory filter, frequencies in cycles per c/U."""

    cutoff: float
    order: int
    kind: str
    zero_phase: bool
    rate: float
    pre_roll: float

    def sentence(self) -> str:
        """Return the filter in words."""
        average = self.kind == "moving average"
        way = "causal" if not self.zero_phase else "centred" if average else "zero phase (run twice)"
        order = "" if average else f"order {self.order}, "
        before = f"{self.pre_roll:.4g} c/U of still water before the tow" if self.pre_roll else "settled on the start"
        return (
            f"{self.kind}, {order}cut-off {self.cutoff:.5g} U/c, {way}, {before}, resampled at {self.rate:.5g} U/c"
        )

    def apply(self, value: np.ndarray) -> np.ndarray:
        """Return a trace at the even rate, filtered."""
        return filters.low_pass(
            value, self.rate, self.cutoff, self.order, self.kind, self.zero_phase, self.pre_roll or None
        )


def forces(
    run_dir: Path | str,
    out_csv: Path | str | None = None,
    out_png: Path | str | None = None,
    *,
    cutoff: float | None = None,
    cutoff_hz: float | None = None,
    order: int = 4,
    kind: str = "butterworth",
    zero_phase: bool = True,
    rate_hz: float | None = None,
    pre_roll: float | None = None,
    window: tuple[float, float] | None = None,
) -> dict[str, Any]:
    """Write loads against time and return a summary.

    Parameters
    ----------
    run_dir : path
        Run directory, finished or not.
    out_csv, out_png : path, optional
        Files; `forces.csv` and `forces.png` in the run directory by default.
    cutoff, cutoff_hz : float, optional
        Cut-off of a low-pass filter, in U/c or in Hz; no filter without it.
    order, kind, zero_phase
        See `postprocess.filters.low_pass`.
    rate_hz : float, optional
        Sample rate of the laboratory (Hz); 20 to 200 times the cut-off by default.
    pre_roll : float, optional
        Still water, reading zero, before the tow (c/U), as the laboratory's record has it; five periods of the
        cut-off by default. 0 starts the filter settled on the first value, which an impulsive start makes a spike.
    window : tuple of float, optional
        Travel (chords) over which means are taken; the second half of the travel by default.

    Returns
    -------
    dict
        JSON-able: means with confidence, peaks (largest in size, with their sign, travel and time) as
        computed and filtered, Strouhal number, balance error relative to the lift's peak, files.
    """
    run = open_run(run_dir)
    table = load_table(run)
    if table["time"].size < 4:
        raise StorageError(
            f"{run_dir}: the history has {table['time'].size} rows, too few for a plot. Let it run longer."
        )
    chosen = None
    if cutoff is not None or cutoff_hz is not None:
        per_time, rate = _frequencies(run, table, cutoff, cutoff_hz, rate_hz)
        filters.check(rate, per_time, order, kind)
        chosen = Filter(per_time, order, kind, zero_phase, rate, 5.0 / per_time if pre_roll is None else pre_roll)
    filtered = _filtered(table, chosen) if chosen else None
    summary = _summary(run, table, window, chosen)
    summary["peaks_filtered"] = filtered and {
        name: _peak_entry(filtered, f"{name}_filtered") for name in FILTERED if name in filtered
    }
    csv = Path(out_csv) if out_csv else run.directory / "forces.csv"
    png = Path(out_png) if out_png else run.directory / "forces.png"
    write_table(csv, filtered or table, _comments(run, chosen))
    from postprocess.figures.forces import draw_forces

    draw_forces(table, _info(run), png, filtered=filtered)
    return {**summary, "files": [str(csv), str(png)]}


def _frequencies(
    run: RunView,
    table: dict[str, np.ndarray],
    cutoff: float | None,
    cutoff_hz: float | None,
    rate_hz: float | None,
) -> tuple[float, float]:
    """Return cut-off and sample rate in U/c."""
    seconds = scales.convective_time(run.case)
    if (cutoff_hz is not None or rate_hz is not None) and seconds is None:
        raise UsageError("Frequencies in Hz need a run with a fluid and a chord; give the cut-off in U/c.")
    if cutoff is not None and cutoff_hz is not None:
        raise UsageError("Give the cut-off in U/c or in Hz, not both.")
    if cutoff is None:
        cutoff = cutoff_hz * seconds
    if rate_hz is not None:
        return cutoff, rate_hz * seconds
    finest = 1.0 / float(np.median(np.diff(table["time"])))
    return cutoff, max(20.0 * cutoff, min(finest, 200.0 * cutoff))


def _filtered(table: dict[str, np.ndarray], chosen: Filter) -> dict[str, np.ndarray]:
    """Return the table at the even rate of the filter, with raw and filtered loads."""
    time, _ = filters.resample(table["time"], table["CL"], chosen.rate)
    result = {}
    for name, column in table.items():
        even = time if name == "time" else np.interp(time, table["time"], column)
        if name in FILTERED:
            even = filters.resample(table["time"], column, chosen.rate)[1]
            result[name], result[name + "_filtered"] = even, chosen.apply(even)
        else:
            result[name] = even
    return result


def _summary(
    run: RunView, table: dict[str, np.ndarray], window: tuple[float, float] | None, chosen: Filter | None
) -> dict[str, Any]:
    """Return means, peaks and checks as plain numbers."""
    travel, time = table["travel"], table["time"]
    low, high = window or (0.5 * travel[-1], travel[-1])
    if not travel[0] <= low < high <= travel[-1] * (1 + 1e-9):
        raise UsageError(
            f"The window {low:g} to {high:g} chords does not lie in the travel, {travel[0]:.3g} to {travel[-1]:.3g}."
        )
    span = tuple(np.interp([low, high], travel, time))
    inside = (time >= span[0]) & (time <= span[1])
    waves = spectrum(time[inside], table["CL"][inside]) if inside.sum() > 16 else None
    period = 1 / waves.dominant if waves and math.isfinite(waves.dominant) else None
    names = [name for name in ("CL", "CD", "CM", "lift_mN", "drag_mN") if name in table]
    return {
        "title": run.case.title,
        "reynolds": run.case.tow.reynolds,
        "window_travel": [float(low), float(high)],
        "means": {name: _mean_entry(window_mean(time, table[name], span, period)) for name in names},
        "peaks": {name: _peak_entry(table, name) for name in names},
        "strouhal": _strouhal(waves, span),
        "balance_error": _balance_error(table),
        "filter": chosen.sentence() if chosen else None,
        "caution": CAUTION,
    }


def _mean_entry(mean: Mean) -> dict[str, Any]:
    return {"mean": mean.value, "half_width_95": mean.half_width, "rms": mean.rms, "interval_trusted": mean.trusted}


def _balance_error(table: dict[str, np.ndarray]) -> float:
    """Return the greatest difference of lift and momentum balance over the peak lift, both after the spike of the start."""
    settled = slice(START_ROWS, None)
    largest = float(np.nanmax(np.abs(table["CL"][settled]))) or 1.0
    return float(np.nanmax(np.abs(table["CL"] - table["CL_momentum"])[settled]) / largest)


def _peak_entry(table: dict[str, np.ndarray], name: str) -> dict[str, float | None]:
    """Return the value largest in size, with its sign, after the spike of the start."""
    time, value = table["time"][START_ROWS:], table[name][START_ROWS:]
    top = peak(time, value, 1 if np.nanmax(value) >= -np.nanmin(value) else -1)
    travel = float(np.interp(top.time, table["time"], table["travel"]))
    seconds = float(np.interp(top.time, table["time"], table["time_s"]))
    return {"value": top.value, "travel": travel, "time_s": seconds if math.isfinite(seconds) else None}


def _strouhal(waves: Spectrum | None, span: tuple[float, float]) -> dict[str, float] | None:
    """Return the shedding frequency where the window holds at least three periods of it."""
    if waves is None or not math.isfinite(waves.dominant) or waves.dominant * (span[1] - span[0]) < 3:
        return None
    return {"value": waves.dominant, "resolution": waves.resolution}


def _comments(run: RunView, chosen: Filter | None) -> list[str]:
    case = run.case
    speed = "final tow speed" if case.tow.coefficient_speed == "final" else "momentary tow speed"
    lines = [case.title, f"Re = {case.tow.reynolds:g}; coefficients on rho U^2/2 times chord per span, U the {speed}"]
    lines += ["each row is the mean over the step that ends at its time; lift, drag, nose-up moment on the body"]
    if chosen:
        lines.append(f"filter: {chosen.sentence()}")
    return [*lines, CAUTION]


def _info(run: RunView) -> dict[str, Any]:
    case = run.case
    return {
        "title": case.title,
        "reynolds": case.tow.reynolds,
        "length_word": "diameter" if case.cylinder is not None else "chord",
        "dimensional": scales.force_scale(case) is not None,
        "convective_time": scales.convective_time(case),
        "mN_per_coefficient": None if scales.force_scale(case) is None else 1e3 * scales.force_scale(case),
        "flaps": [flap.name for flap in case.flaps],
        "caution": CAUTION,
    }
