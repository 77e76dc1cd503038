"""What the loop tells whoever watches."""

from __future__ import annotations

import time
from dataclasses import dataclass


@dataclass(frozen=True)
class Progress:
    """State of a run in a few numbers.

    Parameters
    ----------
    step : int
    time, travel, travel_end : float
        Convective time; chords.
    lift, drag : float
        Coefficients of the last step.
    courant, slip : float
    seconds_left : float
        Estimated wall time to the end (s); nan before it can be told.
    """

    step: int
    time: float
    travel: float
    travel_end: float
    lift: float
    drag: float
    courant: float
    slip: float
    seconds_left: float


class Clock:
    """Wall time of a run, and how long the rest may take.

    Parameters
    ----------
    time_end : float
        Convective time at the end of the travel.
    """

    def __init__(self, time_end: float):
        self._begin = time.monotonic()
        self._end = time_end
        self._first: tuple[float, float] | None = None

    @property
    def elapsed(self) -> float:
        """Wall time since the start or resumption (s)."""
        return time.monotonic() - self._begin

    def seconds_left(self, now: float) -> float:
        """Return the estimated wall time to the end, given the convective time reached.

        The first call only starts the estimate (the first step may compile): nan.
        """
        if self._first is None:
            self._first = (self.elapsed, now)
        wall, done = self.elapsed - self._first[0], now - self._first[1]
        return wall / done * max(self._end - now, 0.0) if done > 0 else float("nan")
