"""What `check` tells, line by line, of every shipped and every starter case."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from ibsolver.case import load_case
from ibsolver.case.read import read_case_text
from ibsolver.case.template import KINDS, new_case
from ibsolver.commands import _check_report, check
from ibsolver.run.forecast import Forecast

CASES = sorted((Path(__file__).resolve().parents[2] / "cases").glob("*.toml"))
COST = Forecast(
    nx=300, ny=200, cells=60_000, points=100, steps=1234, seconds=100.0, memory_bytes=3e8, disk_bytes=8e7,
    ns_per_cell_step=25.0, duration=6.5, plan="dense, halved by parity transform along y, tridiagonal along x",
    explicit_diffusion=True, setup_seconds=0.5,
)  # fmt: skip
DIMENSIONLESS = '[plate]\nincidence = "15 deg"\n[tow]\nreynolds = 500\n'


def told(case, cost=COST) -> str:
    return "\n".join(_check_report.report(case, check.collect(case, cost)))


@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
def test_a_check_of_a_shipped_case_fits_80_columns_and_json(path):
    case = load_case(path)
    assert max(len(line) for line in told(case).splitlines()) < 80
    numbers = json.loads(json.dumps(check.collect(case, COST), allow_nan=False))
    assert numbers["reynolds"] == case.tow.reynolds


@pytest.mark.parametrize("kind", sorted(set(KINDS) - {"outline"}))
def test_a_check_of_a_starter_case_fits_80_columns(kind):
    assert max(len(line) for line in told(read_case_text(new_case(kind))).splitlines()) < 80


def test_a_plate_in_water_is_told_what_its_tank_must_be_ready_for():
    text = told(read_case_text(new_case("plate-with-flap")))
    for word in ("Set-up", "Resolution", "Cost on this machine", "What the tank must be ready for", "Cautions"):
        assert f"\n{word}\n" in text
    for word in ("Tanaka", "20 mm/s", "3 s", "0.24 m", "load cell", "added mass", "IEC 60825-1", "ANSI Z136.1", "carriage"):
        assert word in text
    assert "licensed practice" in text and "wall time                  about 2 min (25 ns" in text


def test_open_water_is_told_how_wide_its_tank_must_be():
    told_of = " ".join(told(read_case_text(new_case("plate-with-flap"))).split())
    assert "under 5 % in a tank wider than 6.18 chords = 371 mm (Maskell 1963)" in told_of  # 60 mm sin(18 deg) / 0.05
    level = read_case_text(DIMENSIONLESS.replace("15 deg", "0 deg"))
    assert "blockage" not in told(level)


def test_a_dimensionless_case_has_no_tank_section():
    text = told(read_case_text(DIMENSIONLESS))
    assert "tank must" not in text and "mN" not in text and "\nCautions\n" in text


def test_a_box_without_a_body_has_neither_boundary_layer_nor_laser():
    text = told(read_case_text(new_case("box")))
    assert "boundary layer" not in text and "laser" not in text and "Cautions" not in text


def test_a_cylinder_speaks_of_diameters_and_not_of_lift():
    text = told(read_case_text(new_case("cylinder")))
    assert "cells per diameter" in text and "100 diameters" in text and "1.2 D / sqrt Re" in text
    assert "chord" not in text.partition("Cautions")[0] and "lift too high" not in text


def test_an_impulsive_start_has_an_unbounded_load():
    text = new_case("plate").replace('start = "smooth"', 'start = "impulsive"').replace("start_distance = 0.5", "")
    assert "unbounded: an impulsive start asks for an infinite force" in " ".join(told(read_case_text(text)).split())


def test_small_loads_are_told_and_great_ones_not():
    small = check.collect(read_case_text(new_case("plate")), COST)
    assert check.SMALL_LOADS in small["cautions"]
    fast = new_case("plate").replace('"20 mm/s"', '"200 mm/s"').replace("cells_per_chord = 48", "cells_per_chord = 200")
    assert check.SMALL_LOADS not in check.collect(read_case_text(fast), COST)["cautions"]


def test_without_timing_no_wall_time_is_invented():
    import dataclasses
    import math

    unknown = dataclasses.replace(COST, seconds=math.nan, ns_per_cell_step=math.nan)
    case = read_case_text(DIMENSIONLESS)
    assert "wall time" not in told(case, unknown) and check.collect(case, unknown)["cost"]["seconds"] is None


def test_motions_are_told_with_their_range():
    text = " ".join(told(read_case_text(new_case("plate-with-driven-flap"))).split())
    assert "opening 20 to 40 deg (ramp)" in text
    assert "incidence 0 to 40 deg (ramp-hold-return)" in told(read_case_text(new_case("pitching-plate"))).replace(
        "incidence                  ", "incidence "
    )
