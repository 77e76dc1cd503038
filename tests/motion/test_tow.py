"""Laws of the carriage: the shapes exactly, and consistency of speed, acceleration and distance."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from ibsolver.case.model import Tow
from ibsolver.motion.tow import MotionError, tow_law

PROFILE = ((0.0, 0.0), (0.5, 0.3), (1.0, 0.9), (2.0, 1.0))
LAWS = {
    "smooth": tow_law(Tow(None, 100.0, start="smooth", start_distance=0.5), 4.0),
    "linear": tow_law(Tow(None, 100.0, start="linear", start_distance=0.7), 4.0),
    "hold acceleration": tow_law(Tow(None, 100.0, start="hold acceleration"), 4.0),
    "impulsive": tow_law(Tow(None, 100.0, start="impulsive"), 4.0),
    "profile": tow_law(Tow(None, 100.0, profile=PROFILE), 4.0),
}


def test_shapes_are_those_of_the_contract():
    """T = 2 s0 / U: smooth U (10 x^3 - 15 x^4 + 6 x^5), linear U x; the start distance is covered during T."""
    x = 0.3
    assert LAWS["smooth"].speed(0.3) == pytest.approx(10 * x**3 - 15 * x**4 + 6 * x**5)
    assert LAWS["linear"].speed(0.42) == pytest.approx(0.3)
    assert LAWS["smooth"].distance(1.0) == pytest.approx(0.5)
    assert LAWS["linear"].distance(1.4) == pytest.approx(0.7)
    assert LAWS["hold acceleration"].distance(8.0) == pytest.approx(4.0)
    assert LAWS["hold acceleration"].speed(8.0) == 1.0
    assert LAWS["impulsive"].speed(0.0) == 1.0 and LAWS["impulsive"].speed(-1e-9) == 0.0


@pytest.mark.parametrize("name", LAWS)
@settings(max_examples=30, deadline=None)
@given(t=st.floats(0.01, 9.0))
def test_distance_is_the_integral_and_acceleration_the_derivative(name, t):
    law = LAWS[name]
    edges = [0.0, *(kink for kink in (0.5, 1.0, 1.4, 2.0, 8.0) if kink < t), t]  # each piece is smooth
    integral = sum(quad(law.speed, a, b)[0] for a, b in zip(edges[:-1], edges[1:], strict=True))
    assert law.distance(t) == pytest.approx(integral, abs=1e-7)
    if name != "impulsive" and min(abs(t - k) for k in (0.5, 1.0, 1.4, 2.0, 8.0)) > 1e-3:
        numeric = (law.speed(t + 1e-6) - law.speed(t - 1e-6)) / 2e-6
        assert law.acceleration(t) == pytest.approx(numeric, abs=1e-5)


@pytest.mark.parametrize("name", LAWS)
@settings(max_examples=30, deadline=None)
@given(distance=st.floats(0.01, 6.0))
def test_time_of_a_distance_is_the_inverse(name, distance):
    law = LAWS[name]
    assert law.distance(law.time_of(distance)) == pytest.approx(distance, abs=1e-9)


def test_a_profile_never_overshoots_its_points():
    speeds = [LAWS["profile"].speed(t) for t in np.linspace(-1, 4, 500)]
    assert min(speeds) >= 0.0 and max(speeds) <= 1.0


def test_a_profile_that_stops_too_early_is_a_sentence():
    law = tow_law(Tow(None, 100.0, profile=((0.0, 0.0), (1.0, 1.0), (2.0, 0.0))), 4.0)
    with pytest.raises(MotionError, match="ends at rest after 1.33 chords; a travel of 4 chords is never reached"):
        law.time_of(4.0)


def test_a_still_carriage_counts_convective_times():
    law = tow_law(Tow(None, 100.0, start="still"), 4.0)
    assert law.speed(2.0) == 0.0 and law.distance(2.0) == 2.0 and law.time_of(4.0) == pytest.approx(4.0)
