"""Kinematics of the rig: signs, chains of hinges, velocities, fading of flap points."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ibsolver.body.build import build_rig
from ibsolver.body.rig import LEAST_WEIGHT, Configuration
from ibsolver.case.model import Case, Cylinder, Flap, Outline, Plate, Tow

TOW = Tow(None, 1000.0)
PLATE = Plate(None, None, 0.0, 0.25)
FRONT = Flap("front", 0.12, "upper", 0.2, "fixed", math.radians(20))
REAR = Flap("rear", 0.7, "lower", 0.25, "fixed", math.radians(30))
TAIL = Flap("tail", 0.2, "upper", 0.1, "fixed", math.radians(10), on="front")


def rig_of(*flaps):
    return build_rig(Case("t", tow=TOW, plate=PLATE, flaps=flaps), 1 / 64)


def test_nose_up_lifts_the_leading_edge_and_the_pivot_stays():
    rig = rig_of()
    outline = rig.shapes(rig.place(Configuration(incidence=math.radians(30))))["plate"]
    np.testing.assert_allclose(outline[0], [-0.25 * math.cos(math.pi / 6), 0.125])
    np.testing.assert_allclose(outline[1], [0.75 * math.cos(math.pi / 6), -0.375])


def test_flaps_open_away_from_their_side_with_the_tip_toward_the_trailing_edge():
    rig = rig_of(FRONT, REAR)
    openings = (math.radians(20), math.radians(30))
    shapes = rig.shapes(rig.place(Configuration(openings=openings, opening_rates=(0, 0))))
    np.testing.assert_allclose(shapes["front"][0], [0.12 - 0.25, 0.0], atol=1e-15)
    np.testing.assert_allclose(
        shapes["front"][1] - shapes["front"][0], 0.2 * np.array([math.cos(openings[0]), math.sin(openings[0])])
    )
    np.testing.assert_allclose(
        shapes["rear"][1] - shapes["rear"][0], 0.25 * np.array([math.cos(openings[1]), -math.sin(openings[1])])
    )


@settings(max_examples=30, deadline=None)
@given(
    incidence=st.floats(-1, 1),
    rate=st.floats(-2, 2),
    heave_rate=st.floats(-2, 2),
    openings=st.tuples(st.floats(0, 2), st.floats(0, 2), st.floats(0, 2)),
    rates=st.tuples(st.floats(-3, 3), st.floats(-3, 3), st.floats(-3, 3)),
)
def test_velocities_are_the_time_derivative_of_positions(incidence, rate, heave_rate, openings, rates):
    rig = rig_of(FRONT, REAR, TAIL)
    dt = 1e-5

    def placed(t):
        return rig.place(
            Configuration(
                incidence + rate * t,
                rate,
                0.1 + heave_rate * t,
                heave_rate,
                tuple(o + r * t for o, r in zip(openings, rates, strict=True)),
                rates,
            )
        )

    numeric = (placed(dt).points - placed(-dt).points) / (2 * dt)
    np.testing.assert_allclose(placed(0.0).velocities, numeric, atol=1e-8)


def test_a_flap_on_a_flap_hangs_on_its_tip_wherever_listed():
    rig = build_rig(Case("t", tow=TOW, plate=PLATE, flaps=(TAIL, FRONT)), 1 / 64)
    names = [link.name for link in rig.links]
    assert names == ["plate", "front", "tail"]
    place = rig.place(Configuration(openings=(0.4, 0.3), opening_rates=(0, 0)))
    shapes = rig.shapes(place)
    np.testing.assert_allclose(shapes["tail"][0], shapes["front"][1], atol=1e-14)


def test_weights_are_one_far_from_the_plate_and_least_on_it():
    rig = rig_of(replace(FRONT, length=0.4))
    flap = rig.link_of_point == 1
    closed = rig.weights(rig.place(Configuration(openings=(0.0,), opening_rates=(0.0,))), 1 / 64)
    opened = rig.weights(rig.place(Configuration(openings=(1.2,), opening_rates=(0.0,))), 1 / 64)
    assert (closed[flap] == LEAST_WEIGHT).all()
    assert (opened[flap][4:] == 1).all() and opened[flap][0] < 1
    assert (closed[~flap] == 1).all()


def test_weights_change_smoothly_as_a_flap_opens():
    rig = rig_of(FRONT)
    angles = np.linspace(0, 0.6, 601)
    history = np.array(
        [rig.weights(rig.place(Configuration(openings=(a,), opening_rates=(0.0,))), 1 / 64) for a in angles]
    )
    assert np.abs(np.diff(history, axis=0)).max() < 0.05


def test_closed_bodies_know_their_area():
    rig = build_rig(Case("t", tow=TOW, cylinder=Cylinder(None, None)), 1 / 64)
    assert rig.links[0].area == pytest.approx(math.pi / 4)
    square = Outline("s.csv", ((0.0, 0.0), (1.0, 0.0), (1.0, 0.2), (0.0, 0.2)), None, None, pivot=0.5)
    link = build_rig(Case("t", tow=TOW, outline=square), 1 / 64).links[0]
    assert link.area == pytest.approx(0.2)
    np.testing.assert_allclose(link.centroid, [0.0, 0.1])
