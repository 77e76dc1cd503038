"""The carriage's own speed, from its encoder: CSV ``time_s, speed_m_s`` to (t U / c, u / U)."""

from __future__ import annotations

from bisect import bisect_left
from dataclasses import dataclass
from pathlib import Path

from ibsolver.case.csv_columns import Columns, read_columns
from ibsolver.case.files import file_beside
from ibsolver.case.values import ValueFault

MOST_BYTES = 64_000_000
FEWEST_ROWS = 4
MOST_POINTS = 4000
LEAST_STEP = 1e-9  # s
MOST_TIME = 1e10  # s
MOST_SPEED = 1000.0  # m/s
EXAMPLE = "0.125, 0.0473"
_TIME = {"time_s": 1.0, "time_ms": 1e-3}
_SPEED = {"speed_m_s": 1.0, "speed_mm_s": 1e-3}


@dataclass(frozen=True)
class Record:
    """What the encoder wrote: times from 0 (s), speeds (m/s), both as tuples."""

    times: tuple[float, ...]
    speeds: tuple[float, ...]

    @property
    def final_speed(self) -> float:
        """Mean speed over the last tenth of the time (m/s), by the trapezoidal rule."""
        end = self.times[-1]
        return mean_between(self.times, self.speeds, 0.9 * end, end)


def read_encoder(name: str, folder: Path | None) -> Record:
    """Read an encoder file.

    Parameters
    ----------
    name : str
        As the case names it; below the case's folder.
    folder : Path or None
        Folder of the case.

    Raises
    ------
    ValueFault
        With file, line, what is wrong and what to do.
    """
    path = file_beside(name, folder, MOST_BYTES)
    columns = read_columns(path, name, EXAMPLE)
    times, speeds = _named(columns)
    if len(times) < FEWEST_ROWS:
        raise ValueFault(f"has {len(times)} rows; at least {FEWEST_ROWS} are needed.", "Export more of it.", name)
    check_increasing(columns, times)
    check_size(columns, times, MOST_TIME, "Check the unit of the time.")
    check_size(columns, speeds, MOST_SPEED, "Check the unit of the speed: m/s is due.")
    return Record(tuple(time - times[0] for time in times), tuple(speeds))


def check_increasing(columns: Columns, times: list[float]) -> None:
    """Raise a fault at the first time that is not later than the one before."""
    for row in range(1, len(times)):
        step = times[row] - times[row - 1]
        if step < -LEAST_STEP:
            raise columns.fault(row, "is earlier than the row before.", "Sort the rows by time.")
        if step < LEAST_STEP:
            raise columns.fault(row, "repeats the time of the row before.", "Keep one row for each time.")


def check_size(columns: Columns, values: list[float], most: float, remedy: str) -> None:
    """Raise a fault at the first value whose size is beyond `most`."""
    for row, value in enumerate(values):
        if abs(value) > most:
            raise columns.fault(row, f"holds {value:.4g}; at most {most:g} is taken.", remedy)


def _named(columns: Columns) -> tuple[list[float], list[float]]:
    """Return times (s) and speeds (m/s), by the header where there is one."""
    if not columns.header:
        if len(columns.rows[0]) != 2:
            problem = "needs two columns, or a header time_s, speed_m_s."
            raise columns.fault(0, problem, f"Write rows such as: {EXAMPLE}")
        return columns.column(0), columns.column(1)
    time = [(i, _TIME[title]) for i, title in enumerate(columns.header) if title in _TIME]
    speed = [(i, _SPEED[title]) for i, title in enumerate(columns.header) if title in _SPEED]
    if len(time) != 1 or len(speed) != 1:
        found = ", ".join(columns.header)[:60]
        raise ValueFault(
            "has a header without one time and one speed column.",
            "Name them time_s (or time_ms) and speed_m_s (or speed_mm_s).",
            columns.file,
            columns.lines[0] - 1,
            found,
        )
    (time_index, to_seconds), (speed_index, to_metres) = time[0], speed[0]
    times = [value * to_seconds for value in columns.column(time_index)]
    return times, [value * to_metres for value in columns.column(speed_index)]


def normalised(record: Record, speed: float, chord: float, most: int = MOST_POINTS) -> tuple[tuple[float, float], ...]:
    """Return (t U / c, u / U), thinned to at most `most` points.

    A longer record is averaged over equal spans of time around each kept time (its first and last are kept as they
    are), so that noise is averaged and neither an overshoot nor a new extreme is invented. Times stay increasing.

    Parameters
    ----------
    record : Record
        The encoder's own rows.
    speed : float
        Reference speed U (m/s).
    chord : float
        Reference length c (m).
    most : int
        Greatest number of points.
    """
    times, speeds = record.times, record.speeds
    if len(times) > most:
        times, speeds = thinned(times, speeds, most)
    return tuple((time * speed / chord, value / speed) for time, value in zip(times, speeds, strict=True))


def thinned(
    times: tuple[float, ...], values: tuple[float, ...], most: int
) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return evenly spaced times and the means of `values` (linear between rows) around them."""
    end = times[-1]
    step = end / (most - 1)
    kept = [index * step for index in range(most)]
    kept[-1] = end
    integral = _integral(times, values)
    means = [values[0]]
    for time in kept[1:-1]:
        low, high = time - 0.5 * step, time + 0.5 * step
        area = _integral_at(times, values, integral, high) - _integral_at(times, values, integral, low)
        means.append(area / (high - low))
    return tuple(kept), tuple(means + [values[-1]])


def mean_between(times: tuple[float, ...], values: tuple[float, ...], low: float, high: float) -> float:
    """Return the mean of a piecewise linear curve between two times."""
    integral = _integral(times, values)
    area = _integral_at(times, values, integral, high) - _integral_at(times, values, integral, low)
    return area / (high - low)


def _integral(times: tuple[float, ...], values: tuple[float, ...]) -> list[float]:
    """Return the running integral at each time, trapezoidal."""
    total, running = 0.0, [0.0]
    for i in range(1, len(times)):
        total += 0.5 * (values[i] + values[i - 1]) * (times[i] - times[i - 1])
        running.append(total)
    return running


def _integral_at(times: tuple[float, ...], values: tuple[float, ...], integral: list[float], time: float) -> float:
    """Return the running integral at any time within the record."""
    i = min(max(bisect_left(times, time), 1), len(times) - 1)
    fraction = (time - times[i - 1]) / (times[i] - times[i - 1])
    value = values[i - 1] + fraction * (values[i] - values[i - 1])
    return integral[i - 1] + 0.5 * (values[i - 1] + value) * (time - times[i - 1])
