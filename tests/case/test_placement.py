"""Where bodies lie, and how far they reach."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from ibsolver.case.model import Motion
from ibsolver.case.placement import (
    arc,
    core_margin,
    cosine_range,
    extent,
    motion_range,
    parents_first,
    reach,
    segments,
    sides,
)

from .helpers import BARE, BOX, FLAP, read

DEGREE = math.pi / 180


def test_a_nose_up_plate_has_its_leading_edge_above_the_pivot():
    (plate,) = segments(read(BARE.replace("15", "30")))
    assert plate.start == pytest.approx((-0.25 * math.cos(30 * DEGREE), 0.125))
    assert plate.end == pytest.approx((0.75 * math.cos(30 * DEGREE), -0.375))


def test_flaps_open_away_from_their_side():
    flat = BARE.replace("15", "0")
    _, upper = segments(read(flat + FLAP))
    assert upper.start == pytest.approx((-0.13, 0.0))
    assert upper.end == pytest.approx((-0.13 + 0.2 * math.cos(20 * DEGREE), 0.2 * math.sin(20 * DEGREE)))
    _, lower = segments(read(flat + FLAP + 'side = "lower"\n'))
    assert lower.end == pytest.approx((upper.end[0], -upper.end[1]))


def test_a_flap_on_a_flap_starts_from_it():
    chain = FLAP.replace("front", "second").replace("0.12", "0.2").replace("20 deg", "30 deg") + 'on = "front"\n'
    _, first, second = segments(read(BARE.replace("15", "0") + FLAP + chain))
    assert second.start == pytest.approx(first.end)
    turn = math.atan2(second.end[1] - second.start[1], second.end[0] - second.start[0])
    assert turn == pytest.approx(50 * DEGREE)


def test_conventions_agree_with_the_body_room():
    build = pytest.importorskip("ibsolver.body.build")
    rig_module = pytest.importorskip("ibsolver.body.rig")
    case = read(BARE + FLAP + FLAP.replace("front", "rear").replace("0.12", "0.7") + 'side = "lower"\n')
    rig = build.build_rig(case, 1 / 64)
    openings = tuple(flap.opening for flap in case.flaps)
    placed = rig.place(
        rig_module.Configuration(incidence=case.plate.incidence, openings=openings, opening_rates=(0.0, 0.0))
    )
    shapes = rig.shapes(placed)
    for piece in segments(case):
        assert shapes[piece.name][0] == pytest.approx(piece.start, abs=1e-12)
        assert shapes[piece.name][-1] == pytest.approx(piece.end, abs=1e-12)


def test_reach_of_things_at_rest_is_the_box_around_them():
    case = read(BARE + FLAP)
    points = [point for piece in segments(case) for point in (piece.start, piece.end)]
    low_x, high_x = min(x for x, _ in points), max(x for x, _ in points)
    low_y, high_y = min(y for _, y in points), max(y for _, y in points)
    assert reach(case) == pytest.approx((low_x, high_x, low_y, high_y))
    cylinder = BARE.replace('[plate]\nincidence = "15 deg"', "[cylinder]")
    assert reach(read(cylinder)) == (-0.5, 0.5, -0.5, 0.5)
    assert reach(read(BOX)) == (0, 0, 0, 0)


@given(
    st.floats(-1.0, 1.0), st.floats(0.0, 1.5), st.floats(-0.4, 0.4), st.floats(0.0, 1.0), st.floats(0.0, 1.5),
    st.floats(0.0, 1.0),
)  # fmt: skip
def test_nothing_moves_out_of_the_reach(incidence, amplitude, heave, share, opening, when):
    second = FLAP.replace("front", "second").replace("0.12", "0.1") + 'on = "front"\n'
    case = read(BARE + FLAP + 'mount = "driven"\n' + second)
    swing = Motion("oscillation", value=incidence, amplitude=amplitude)
    driven = replace(case.flaps[0], motion=Motion("ramp", value=0.1, to=0.1 + opening))
    moving = replace(
        case, incidence_motion=swing, heave_motion=Motion("ramp", value=0.0, to=heave), flaps=(driven, case.flaps[1])
    )
    now = replace(
        case,
        plate=replace(case.plate, incidence=incidence + amplitude * (2 * when - 1)),
        flaps=(replace(driven, opening=0.1 + share * opening), case.flaps[1]),
    )
    x_low, x_high, y_low, y_high = reach(moving)
    for piece in segments(now):
        for x, y in (piece.start, piece.end):
            assert x_low - 1e-9 <= x <= x_high + 1e-9
            assert y_low - 1e-9 <= y + share * heave <= y_high + 1e-9


@given(st.floats(-10, 10), st.floats(0, 7), st.floats(0, 1))
def test_cosine_range_holds_every_cosine(low, width, share):
    least, most = cosine_range(low, low + width)
    assert least - 1e-12 <= math.cos(low + share * width) <= most + 1e-12
    assert most - least <= min(2.0, width) + 1e-9


def test_arc_of_a_full_turn():
    assert arc((1, 1, 2, 2), (0, 7), 0.5) == pytest.approx((0.5, 1.5, 1.5, 2.5))
    assert arc((0, 0, 0, 0), (0, 0), -2.0) == pytest.approx((-2, -2, 0, 0))


def test_motion_range():
    assert motion_range(None, 3.0) == (3.0, 3.0)
    assert motion_range(Motion("constant", value=1.0), 3.0) == (1.0, 1.0)
    assert motion_range(Motion("ramp", value=1.0, to=-2.0), 3.0) == (-2.0, 1.0)
    assert motion_range(Motion("oscillation", value=1.0, amplitude=-0.5), 3.0) == (0.5, 1.5)
    assert motion_range(Motion("table", times=(0, 1), values=(4.0, -1.0)), 3.0) == (-1.0, 4.0)


def test_extent_and_sides_with_tank_walls():
    case = read(BARE + "[tank]\nwall_above = 3\n[domain]\nbelow = 4\nupstream = 5\n")
    assert extent(case) == (-5.0, 10.0, -4.0, 3.0)
    assert sides(case)["top"].condition == "no slip" and sides(case)["top"].speed == 1.0
    assert sides(case)["bottom"].condition == "slip"
    assert extent(read(BOX)) == (0.0, 1.0, 0.0, 1.0)


def test_parents_first_leaves_out_what_hangs_on_nothing():
    case = read(BARE + FLAP)
    lost = replace(case.flaps[0], name="lost", on="nowhere")
    child = replace(case.flaps[0], name="child", on="front")
    assert [flap.name for flap in parents_first((child, lost, case.flaps[0]))] == ["front", "child"]


def test_the_core_is_at_least_six_cells_wide_around_the_body():
    assert core_margin(read(BARE)) == 0.15
    assert core_margin(read(BARE + "[grid]\ncells_per_chord = 20\n")) == pytest.approx(0.3)
