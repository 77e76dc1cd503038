"""From dimensionless to SI, and the start of the tow."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from ibsolver.case import scales

from .helpers import BARE, PLATE, read

CASE = read(PLATE)  # rho 1000 kg/m3, nu 1e-6 m2/s, c 50 mm, span 200 mm, U 20 mm/s


def test_scales_by_hand():
    assert scales.convective_time(CASE) == pytest.approx(2.5)
    assert scales.pressure_scale(CASE) == pytest.approx(0.4)
    assert scales.force_per_span_scale(CASE) == pytest.approx(0.01)
    assert scales.force_scale(CASE) == pytest.approx(0.002)
    assert scales.moment_scale(CASE) == pytest.approx(1e-4)
    assert scales.tow_length(CASE) == pytest.approx(0.4)
    assert scales.frequency_scale(CASE) == pytest.approx(0.4)
    assert scales.seconds(CASE, 2.0) == pytest.approx(5.0)
    assert scales.spring_scale(CASE) == pytest.approx(2e-4)
    assert scales.damping_scale(CASE) == pytest.approx(5e-4)
    assert scales.mass_per_area_scale(CASE) == pytest.approx(50.0)
    assert scales.acceleration_scale(CASE) == pytest.approx(0.008)
    assert scales.velocity_scale(CASE) == 0.02


def test_plate_of_the_tank_rule():
    # Tank practice: at Re 6250 in water at 20 degC a plate of span 5 c carries 0.098 N at C_N = 1, whatever the chord
    for chord in (20, 50, 80):
        text = (
            f'[fluid]\nkind = "fresh water"\ntemperature = "20 degC"\n[plate]\nchord = "{chord} mm"\n'
            f'span = "{5 * chord} mm"\nincidence = "45 deg"\n[tow]\nreynolds = 6250\n'
        )
        assert scales.force_scale(read(text)) == pytest.approx(0.098, rel=5e-3)


def test_dimensionless_runs_have_no_scales():
    case = read(BARE)
    assert not scales.dimensional(case)
    for name in ("convective_time", "force_scale", "moment_scale", "tow_length", "frequency_scale", "pressure_scale",
                 "force_per_span_scale", "velocity_scale", "spring_scale", "damping_scale", "mass_per_area_scale",
                 "acceleration_scale"):  # fmt: skip
        assert getattr(scales, name)(case) is None
    assert scales.seconds(case, 1.0) is None


def test_without_a_span_there_are_no_newtons_but_there_are_seconds():
    case = read(PLATE.replace('span = "200 mm"\n', ""))
    assert scales.force_scale(case) is None and scales.moment_scale(case) is None
    assert scales.convective_time(case) == pytest.approx(2.5)
    assert scales.force_per_span_scale(case) == pytest.approx(0.01)


def test_a_cylinder_is_scaled_by_its_diameter():
    text = PLATE.replace("plate", "cylinder").replace("chord", "diameter").replace('incidence = "15 deg"\n', "")
    assert scales.convective_time(read(text)) == pytest.approx(2.5)


def started(start, distance=0.5, travel=8.0):
    case = read(BARE)
    tow = replace(case.tow, start=start, start_distance=distance)
    return replace(case, tow=tow, run=replace(case.run, travel=travel))


@pytest.mark.parametrize(("start", "ramp"), [("impulsive", 0), ("linear", 1), ("smooth", 1), ("hold acceleration", 16)])
def test_ramp_time(start, ramp):
    assert scales.ramp_time(started(start)) == ramp  # T = 2 s0 / U; 2 travel / U


@pytest.mark.parametrize("start", ["linear", "smooth"])
def test_the_ramp_covers_the_start_distance(start):
    for distance in (0.2, 0.5, 3.0):
        case = started(start, distance)
        assert scales.travel_at(case, 2 * distance) == pytest.approx(distance, rel=1e-14)
        assert scales.travel_at(case, 2 * distance + 1.25) == pytest.approx(distance + 1.25, rel=1e-14)
        assert scales.tow_speed(case, 2 * distance) == 1.0


def test_formulas_of_the_start():
    assert scales.tow_speed(started("linear"), 0.3) == pytest.approx(0.3)
    assert scales.travel_at(started("linear"), 0.3) == pytest.approx(0.045)
    x = 0.3
    assert scales.tow_speed(started("smooth"), x) == pytest.approx(10 * x**3 - 15 * x**4 + 6 * x**5, rel=1e-14)
    assert scales.travel_at(started("smooth"), x) == pytest.approx(2.5 * x**4 - 3 * x**5 + x**6, rel=1e-13)
    case = started("hold acceleration", travel=4.0)
    assert scales.tow_speed(case, 2.0) == pytest.approx(0.25)
    assert scales.travel_at(case, 8.0) == pytest.approx(4.0) and scales.tow_speed(case, 8.0) == 1.0
    assert scales.tow_speed(started("impulsive"), 0.0) == 1.0 and scales.travel_at(started("impulsive"), 2.5) == 2.5


@pytest.mark.parametrize("start", ["impulsive", "linear", "smooth", "hold acceleration"])
def test_speed_is_the_rate_of_travel(start):
    case = started(start)
    for time in (0.1, 0.45, 0.8, 2.0, 7.0):
        rate = (scales.travel_at(case, time + 1e-6) - scales.travel_at(case, time - 1e-6)) / 2e-6
        assert rate == pytest.approx(scales.tow_speed(case, time), rel=1e-8)


@pytest.mark.parametrize("start", ["impulsive", "linear", "smooth", "hold acceleration"])
def test_time_is_the_inverse_of_travel(start):
    case = started(start)
    for travel in (0.01, 0.5, 3.0, 8.0):
        assert scales.travel_at(case, scales.time_at(case, travel)) == pytest.approx(travel, rel=1e-12)
    due = {"impulsive": 8.0, "linear": 8.5, "smooth": 8.5, "hold acceleration": 16.0}
    assert scales.duration(case) == pytest.approx(due[start], rel=1e-12)


def test_a_record_is_integrated_by_straight_pieces():
    case = read(BARE)
    case = replace(case, tow=replace(case.tow, profile=((0.0, 0.0), (1.0, 1.0), (3.0, 0.5))))
    assert scales.tow_speed(case, 0.5) == 0.5 and scales.tow_speed(case, 2.0) == 0.75
    assert scales.travel_at(case, 0.5) == 0.125
    assert scales.travel_at(case, 3.0) == 2.0 and scales.travel_at(case, 5.0) == 3.0
    assert scales.tow_speed(case, 9.0) == 0.5 and scales.tow_speed(case, 0.0) == 0.0
    assert scales.time_at(case, 3.0) == pytest.approx(5.0, rel=1e-12) and scales.ramp_time(case) == 3.0
    assert math.isclose(scales.duration(case), 15.0, rel_tol=1e-12)
