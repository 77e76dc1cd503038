"""Cautions: each with its rule, each only where it is due."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from ibsolver.case import load_case
from ibsolver.case.cautions import TWO_DIMENSIONAL, blockage, boundary_layer_cells, cautions

from .helpers import BARE, BOX, FLAP, PLATE, read

CASES = Path(__file__).resolve().parents[2] / "cases"
QUIET = BARE + "[run]\ntravel = 4\n"
CYLINDER = BARE.replace('[plate]\nincidence = "15 deg"', "[cylinder]")


def extra(text):
    first, *rest = cautions(read(text))
    assert first == TWO_DIMENSIONAL
    return rest


def test_a_well_resolved_short_tow_has_only_the_general_caution():
    assert extra(QUIET) == []
    assert "never to size parts that carry people" in TWO_DIMENSIONAL


def test_a_box_has_none():
    assert cautions(read(BOX)) == ()


@pytest.mark.parametrize(
    ("text", "start"),
    [
        (QUIET.replace("500", "3500"), "Re 3500 is above 3000: after a few chords of travel a real wake turns"),
        (BARE, "The travel of 8 chords goes beyond the first few"),
        (CYLINDER, "Re 500: a cylinder's wake is three-dimensional above about 190 (Williamson 1996"),
        (QUIET.replace("500", "3000"),
         "The boundary layer at the trailing edge (5 c / sqrt(Re), Blasius 1908) is 5.8 cells thick; at least 6"),
        (CYLINDER + "[grid]\ncells_per_chord = 32\n",
         "The boundary layer at the front of the cylinder (1.2 D / sqrt(Re), Hiemenz 1911) is 1.7 cells thick"),
        (QUIET + FLAP.replace("0.2", "0.1"), 'Flap "front" is 6.4 cells long; at least 8 are common practice: '
                                             "cells_per_chord = 80."),
        (QUIET + FLAP.replace("20 deg", "10 deg"), 'The tip of flap "front" stands 2.2 cells off its plate'),
        (QUIET + FLAP + FLAP.replace("front", "rear").replace("0.12", "0.25"), 'The tip of flap "front" is'),
        (QUIET + "[tank]\nwall_above = 2\nwall_below = 2\n",
         "The blockage c sin(incidence) / width is 6.47 %; above 5 % the walls raise the loads noticeably (Maskell"),
        (QUIET.replace("[run]", 'start = "impulsive"\n[run]'), "An impulsive start has an infinite added-mass load"),
        (QUIET.replace("[run]", "start_distance = 0.1\n[run]"), "The start over 0.1 chords is short"),
        (QUIET.replace("[run]", "start_distance = 5\n[run]"), "The start takes 5 chords, the run ends after 4"),
        (QUIET + "[domain]\nupstream = 3\nlateral = 3\n",
         "The domain is small (upstream 3, lateral 3 chords; at least 4, 6 and 4 are advised)"),
        (QUIET.replace("incidence", 'chord = "50 mm"\nincidence'), "Without [fluid] the run is dimensionless"),
    ],
)  # fmt: skip
def test_each_caution_where_it_is_due(text, start):
    found = extra(text)
    assert any(sentence.startswith(start) for sentence in found), found


def test_surface_waves_in_water_only():
    water = PLATE.split("[plate]")
    fluid = '[fluid]\nkind = "fresh water"\ntemperature = "20 degC"\n[plate]'
    fast = fluid + water[1].replace("20 mm/s", "240 mm/s")
    assert any("steady waves" in sentence for sentence in extra(fast))
    assert not any("steady waves" in sentence for sentence in extra(fast.replace("240", "230")))
    air = fast.replace("fresh water", "air")
    assert not any("steady waves" in sentence for sentence in extra(air))


def test_capillary_gravity_limit():
    # Least phase speed of waves on clean water, (4 g sigma / rho)^(1/4) with 72.8 mN/m: exact formula
    assert (4 * 9.81 * 0.0728 / 998.2) ** 0.25 == pytest.approx(0.231, abs=5e-4)


def test_boundary_layer_in_cells():
    assert boundary_layer_cells(read(BARE)) == pytest.approx(5 / math.sqrt(500) * 64)
    assert boundary_layer_cells(read(CYLINDER)) == pytest.approx(1.2 / math.sqrt(500) * 64)


def test_blockage():
    walls = "[tank]\nwall_above = 3\nwall_below = 2\n"
    assert blockage(read(BARE)) is None
    assert blockage(read(BARE + walls)) == pytest.approx(math.sin(math.radians(15)) / 5)
    assert blockage(read(CYLINDER + walls)) == pytest.approx(0.2)
    turning = "[motion]\nincidence = {kind = 'ramp', to = '120 deg'}\n"
    assert blockage(read(BARE + walls + turning)) == pytest.approx(0.2)


def test_the_quick_cases_carry_only_the_general_cautions():
    for name in ("towed_plate", "towed_plate_with_flap", "accelerating_plate", "accelerating_plate_with_flap"):
        first, *others = cautions(load_case(CASES / f"{name}.toml"))
        assert first == TWO_DIMENSIONAL
        assert [other.startswith("The travel of 6 chords") for other in others] == [True]


def test_the_overnight_cases_say_what_to_mistrust():
    for path in (CASES / "overnight").glob("*.toml"):
        found = cautions(load_case(path))
        assert len(found) == 2 and "Re 6000 is above 3000" in found[1]
