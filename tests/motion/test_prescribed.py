"""Prescribed motions: published shapes, and rates that are derivatives."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ibsolver.case.model import Motion
from ibsolver.motion.prescribed import Prescribed, log_cosh

MOTIONS = {
    "constant": Motion("constant", value=0.3),
    "ramp": Motion("ramp", value=0.1, to=0.7, begin=0.5, duration=1.5),
    "quintic ramp": Motion("ramp", value=0.1, to=0.7, begin=0.5, duration=1.5, smoothing="quintic"),
    "there and back": Motion("ramp-hold-return", value=0.1, to=0.7, begin=0.5, duration=1.0, hold=0.7),
    "there and back, quintic": Motion(
        "ramp-hold-return", value=0.1, to=0.7, begin=0.5, duration=1.0, hold=0.7, smoothing="quintic"
    ),
    "oscillation": Motion("oscillation", value=0.1, amplitude=0.2, reduced_frequency=1.3, phase=0.4),
    "table": Motion("table", times=(0.0, 1.0, 2.5), values=(0.0, 0.5, 0.2)),
}


@pytest.mark.parametrize("name", MOTIONS)
@settings(max_examples=40, deadline=None)
@given(t=st.floats(0.001, 6.0))
def test_rate_is_the_derivative(name, t):
    motion = Prescribed(MOTIONS[name])
    if name == "table" and min(abs(t - k) for k in (0.0, 1.0, 2.5)) < 1e-3:
        return
    numeric = (motion.value(t + 1e-6) - motion.value(t - 1e-6)) / 2e-6
    assert motion.rate(t) == pytest.approx(numeric, abs=1e-6)


def test_ramp_hold_return_is_the_published_function():
    """Eldredge, Wang & Ol 2009 (from memory), evaluated with math.cosh as it stands in the paper."""
    m = MOTIONS["there and back"]
    t1, t2 = m.begin, m.begin + m.duration
    t3, t4 = t2 + m.hold, t2 + m.hold + m.duration
    a = math.pi**2 / (4 * m.duration * (1 - m.smoothing_parameter))

    def g(t):
        return math.log(
            math.cosh(a * (t - t1)) * math.cosh(a * (t - t4)) / (math.cosh(a * (t - t2)) * math.cosh(a * (t - t3)))
        )

    greatest = max(g(t) for t in np.linspace(t2, t3, 4001))  # max G of the paper
    for t in np.linspace(0, 5, 41):
        have = (Prescribed(m).value(t) - m.value) / (m.to - m.value)
        assert have == pytest.approx(g(t) / greatest, abs=1e-7)


def test_ramps_reach_their_ends():
    for name in ("ramp", "quintic ramp"):
        motion = Prescribed(MOTIONS[name])
        assert motion.value(-20.0) == pytest.approx(0.1, abs=1e-9) and motion.value(30.0) == pytest.approx(
            0.7, abs=1e-9
        )
        assert motion.rate(1.25) > 0.3


def test_reduced_frequency_is_pi_f_c_over_u():
    """k = pi f c / U: one period lasts pi / k convective times."""
    motion = Prescribed(MOTIONS["oscillation"])
    period = math.pi / 1.3
    assert motion.value(0.3 + period) == pytest.approx(motion.value(0.3), abs=1e-12)


def test_log_cosh_never_overflows():
    assert log_cosh(1e6) == pytest.approx(1e6 - math.log(2))
    assert log_cosh(0.7) == pytest.approx(math.log(math.cosh(0.7)), rel=1e-14)


def test_stillness():
    assert Prescribed(MOTIONS["constant"]).still and not Prescribed(MOTIONS["oscillation"]).still
    assert Prescribed(Motion("ramp", value=0.2, to=0.2)).still
