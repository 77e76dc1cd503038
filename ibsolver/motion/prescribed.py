"""One quantity against time: incidence, heave or the opening of a driven flap, with its rate.

The log-cosh ramp is that of Eldredge, Wang & Ol (2009, AIAA 2009-3687; from memory): with corners t_1 .. t_4,

    G = ln[cosh a(t - t1) cosh a(t - t4) / (cosh a(t - t2) cosh a(t - t3))],   value = to * G / max G,

whose sharpness a = pi^2 K / (2 alpha_0 (1 - sigma)) is pi^2 / (4 duration (1 - sigma)) in terms of the ramp's duration
(K = alpha_0 / (2 duration) in convective times). A one-way ramp is its first half alone. ln cosh x is evaluated as
|x| + log1p(exp(-2 |x|)) - ln 2, which does not overflow.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy.interpolate import PchipInterpolator

from ibsolver.case.model import Motion


@dataclass(frozen=True, eq=False)
class Prescribed:
    """A motion with value and rate at any time; dimensionless."""

    motion: Motion

    def value(self, t: float) -> float:
        """Return the value at time t."""
        return self._both(t)[0]

    def rate(self, t: float) -> float:
        """Return the rate at time t."""
        return self._both(t)[1]

    @property
    def still(self) -> bool:
        """Whether the value never changes."""
        m = self.motion
        if m.kind == "oscillation":
            return m.amplitude == 0
        if m.kind == "table":
            return min(m.values) == max(m.values)
        return m.kind == "constant" or m.value == m.to

    def _both(self, t: float) -> tuple[float, float]:
        m = self.motion
        if m.kind == "constant":
            return m.value, 0.0
        if m.kind == "oscillation":
            return self._oscillation(t)
        if m.kind == "table":
            return self._table_value(t)
        share, rate = self._ramp(t)
        return m.value + (m.to - m.value) * share, (m.to - m.value) * rate

    def _oscillation(self, t: float) -> tuple[float, float]:
        """Return mean + amplitude sin(2 k t + phase), k = pi f c / U, held until `begin`."""
        m = self.motion
        late = max(t - m.begin, 0.0)
        angle = 2.0 * m.reduced_frequency * late + m.phase
        rate = 2.0 * m.reduced_frequency * m.amplitude * math.cos(angle) if t >= m.begin else 0.0
        return m.value + m.amplitude * math.sin(angle), rate

    @cached_property
    def _curve(self) -> PchipInterpolator:
        return PchipInterpolator(self.motion.times, self.motion.values, extrapolate=False)

    def _table_value(self, t: float) -> tuple[float, float]:
        times, values = self.motion.times, self.motion.values
        if t <= times[0]:
            return values[0], 0.0
        if t >= times[-1]:
            return values[-1], 0.0
        return float(self._curve(t)), float(self._curve(t, 1))

    def _ramp(self, t: float) -> tuple[float, float]:
        """Return the share 0 .. 1 of the ramp and its rate."""
        m = self.motion
        back = m.kind == "ramp-hold-return"
        up = (m.begin, m.begin + m.duration)
        down = (up[1] + m.hold, up[1] + m.hold + m.duration)
        if m.smoothing == "quintic":
            share, rate = _quintic(t, *up)
            if back:
                fallen, fall_rate = _quintic(t, *down)
                share, rate = share - fallen, rate - fall_rate
            return share, rate
        sharpness = math.pi**2 / (4.0 * m.duration * (1.0 - m.smoothing_parameter))
        rise = _softened(t, *up, sharpness)
        if not back:
            return rise[0] / m.duration, rise[1] / m.duration
        fall = _softened(t, *down, sharpness)
        middle = 0.5 * (up[1] + down[0])
        greatest = _softened(middle, *up, sharpness)[0] - _softened(middle, *down, sharpness)[0]
        return (rise[0] - fall[0]) / greatest, (rise[1] - fall[1]) / greatest


def _quintic(t: float, start: float, end: float) -> tuple[float, float]:
    x = min(max((t - start) / (end - start), 0.0), 1.0)
    return x**3 * (10.0 - 15.0 * x + 6.0 * x * x), 30.0 * (x * (1.0 - x)) ** 2 / (end - start)


def _softened(t: float, start: float, end: float, sharpness: float) -> tuple[float, float]:
    """Return a ramp from 0 to end - start with softened corners, and its rate: half of the published G over 2 a."""
    a = sharpness
    first, second = a * (t - start), a * (t - end)
    value = 0.5 * (end - start) + (log_cosh(first) - log_cosh(second)) / (2.0 * a)
    return value, 0.5 * (math.tanh(first) - math.tanh(second))


def log_cosh(x: float) -> float:
    """Return ln cosh x for any x."""
    size = abs(x)
    return float(size + np.log1p(np.exp(-2.0 * size)) - math.log(2.0))
