"""The law of the carriage: tow speed, acceleration and distance against time.

With final speed U = 1 and start distance s0 the ramp lasts T = 2 s0; x = t / T:

* "linear": x;  "smooth": 10 x^3 - 15 x^4 + 6 x^5;  "impulsive": 1 from the start;
* "hold acceleration": linear, reaching U at the end of the travel (s0 = travel);
* "still": the carriage stays; U is only the reference speed, and travel counts convective times.

A measured profile is interpolated by the shape-preserving cubic of Fritsch & Carlson (1980).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy.interpolate import PchipInterpolator

from ibsolver.case.model import Tow
from ibsolver.errors import IbsolverError


class MotionError(IbsolverError):
    """A motion that cannot be carried out."""

    exit_status = 3


@dataclass(frozen=True, eq=False)
class TowLaw:
    """Tow speed against time, dimensionless (chords, convective times, final tow speeds).

    Parameters
    ----------
    kind : {"impulsive", "linear", "smooth", "profile", "still"}
    ramp_time : float
        Duration T of the start; 0 for "impulsive", the record's length for a profile.
    profile : tuple of (time, speed)
        Of a measured profile.
    """

    kind: str
    ramp_time: float
    profile: tuple[tuple[float, float], ...] = ()

    @cached_property
    def _curve(self) -> PchipInterpolator:
        table = np.array(self.profile)
        return PchipInterpolator(table[:, 0], table[:, 1], extrapolate=False)

    @cached_property
    def _integral(self) -> PchipInterpolator:
        return self._curve.antiderivative()

    def speed(self, t: float) -> float:
        """Return the speed at time t."""
        if self.kind == "still":
            return 0.0
        if self.kind == "impulsive":
            return 1.0 if t >= 0 else 0.0
        if self.kind == "profile":
            return float(self._curve(self._inside(t)))
        x = min(max(t / self.ramp_time, 0.0), 1.0)
        return x if self.kind == "linear" else x**3 * (10.0 - 15.0 * x + 6.0 * x * x)

    def acceleration(self, t: float) -> float:
        """Return the acceleration at time t (0 for an impulsive start, whose jump is at t = 0)."""
        if self.kind in ("impulsive", "still"):
            return 0.0
        if self.kind == "profile":
            return float(self._curve.derivative()(t)) if self.profile[0][0] <= t <= self.profile[-1][0] else 0.0
        x = t / self.ramp_time
        if not 0.0 <= x <= 1.0:
            return 0.0
        return 1.0 / self.ramp_time if self.kind == "linear" else 30.0 * (x * (1.0 - x)) ** 2 / self.ramp_time

    def distance(self, t: float) -> float:
        """Return the distance towed since t = 0 (the time itself where the carriage is still)."""
        if t <= 0:
            return 0.0
        if self.kind in ("impulsive", "still"):
            return t
        if self.kind == "profile":
            first, last = self.profile[0], self.profile[-1]
            before = first[1] * min(t, max(first[0], 0.0))
            start = max(first[0], 0.0)
            return (
                before
                + float(self._integral(self._inside(t)) - self._integral(start))
                + last[1] * max(t - last[0], 0.0)
            )
        x = min(t / self.ramp_time, 1.0)
        covered = 0.5 * x * x if self.kind == "linear" else x**4 * (2.5 - 3.0 * x + x * x)
        return self.ramp_time * covered + max(t - self.ramp_time, 0.0)

    def time_of(self, distance: float) -> float:
        """Return the first time at which `distance` chords are covered.

        Raises
        ------
        MotionError
            If the carriage never gets so far.
        """
        high = self.ramp_time + distance + 1.0
        while self.distance(high) < distance:
            high *= 2.0
            if high > 1e7:
                reached = self.distance(self.ramp_time)
                raise MotionError(
                    f"The tow profile ends at rest after {reached:.3g} chords; a travel of {distance:g} chords is never "
                    "reached. Shorten run.travel or record a longer profile."
                )
        low = 0.0
        for _ in range(200):
            middle = 0.5 * (low + high)
            if middle in (low, high):
                break
            low, high = (middle, high) if self.distance(middle) < distance else (low, middle)
        return high

    def _inside(self, t: float) -> float:
        return min(max(t, self.profile[0][0]), self.profile[-1][0])


def tow_law(tow: Tow, travel: float) -> TowLaw:
    """Return the law of a case's tow over `travel` chords."""
    if tow.profile:
        return TowLaw("profile", tow.profile[-1][0], tow.profile)
    if tow.start in ("impulsive", "still"):
        return TowLaw(tow.start, 0.0)
    if tow.start == "hold acceleration":
        return TowLaw("linear", 2.0 * travel)
    return TowLaw(tow.start, 2.0 * tow.start_distance)
