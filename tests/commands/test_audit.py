"""The numbers of `check` against worked examples."""

from __future__ import annotations

import math

import pytest

from ibsolver.case.read import read_case_text
from ibsolver.commands import _audit

TEXT = """\
[fluid]
kind = "fresh water"
temperature = "20 degC"
[plate]
chord = "50 mm"
span = "250 mm"
incidence = "18 deg"
[tow]
reynolds = 6250
start = "{start}"
start_distance = 0.5
[run]
travel = 4
"""


def case(start="smooth", more=""):
    return read_case_text(TEXT.format(start=start) + more)


def test_force_scale_of_the_worked_example():
    """Common practice: at Re 6,250 in water at 20 degC a plate of span 5 c carries 0.098 N at C_N = 1 for any chord."""
    assert _audit.tank_numbers(case()).force_scale == pytest.approx(0.098, abs=5e-4)


def test_added_mass_of_a_constant_acceleration():
    """Potential flow (exact): C_N = (pi/4)(c/s_a) sin(incidence), s_a the distance of the acceleration."""
    exact = math.pi / 4 / 0.5 * math.sin(math.radians(18))
    assert _audit.added_mass_coefficient(case("linear")) == pytest.approx(exact)
    assert _audit.added_mass_coefficient(case("smooth")) == pytest.approx(1.875 * exact)
    held = math.pi / 4 / 4.0 * math.sin(math.radians(18))
    assert _audit.added_mass_coefficient(case("hold acceleration")) == pytest.approx(held)
    assert math.isinf(_audit.added_mass_coefficient(case("impulsive")))


def test_tow_length_and_times():
    numbers = _audit.tank_numbers(case())
    assert numbers.tow_length == pytest.approx(0.2)
    assert numbers.start_time == pytest.approx(numbers.convective_time)
    # The smooth start covers half a chord in one convective time: 3.5 more chords at full speed.
    assert numbers.tow_time == pytest.approx(4.5 * numbers.convective_time)


def test_blockage_is_projected_height_over_width():
    tank = '[tank]\nwall_above = "250 mm"\nwall_below = "250 mm"\n'
    assert _audit.blockage(case(more=tank)) == pytest.approx(math.sin(math.radians(18)) * 0.05 / 0.5)
    assert _audit.blockage(case()) is None


def test_separated_plate_end_of_the_band_at_90_degrees():
    """Kirchhoff and Rayleigh: C_N = 2 pi / (4 + pi) = 0.880 for a plate across the stream (Lamb, art. 76)."""
    low, _ = _audit.normal_force_band(read_case_text(TEXT.format(start="smooth").replace("18 deg", "90 deg")))
    assert low == pytest.approx(0.880, abs=5e-4)


def test_balance_rules_are_multiples_of_the_highest_frequency():
    numbers = _audit.tank_numbers(case())
    assert numbers.natural_frequency == pytest.approx((5 * numbers.highest_frequency, 10 * numbers.highest_frequency))
    assert numbers.sample_rate == pytest.approx((10 * numbers.highest_frequency, 20 * numbers.highest_frequency))


def test_a_dimensionless_case_has_no_tank_numbers():
    numbers = _audit.tank_numbers(read_case_text('[plate]\nincidence = "18 deg"\n[tow]\nreynolds = 500\n'))
    assert numbers.force_scale is None and numbers.tow_length is None


def test_the_start_of_a_recorded_tow_ends_at_99_percent_of_its_speed():
    import dataclasses

    profile = ((0.0, 0.0), (1.0, 0.5), (2.0, 0.995), (30.0, 1.0))
    plain = case()
    recorded = dataclasses.replace(plain, tow=dataclasses.replace(plain.tow, profile=profile))
    assert _audit.starting_time(recorded) == 2.0
