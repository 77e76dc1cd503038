"""Plain data and back, hashes, differences."""

from __future__ import annotations

import json
from dataclasses import fields, is_dataclass, replace
from pathlib import Path

import pytest

from ibsolver.case import load_case
from ibsolver.case.encode import case_hash, decode, differences, encode, physics_hash
from ibsolver.errors import CaseError

from .helpers import BARE, BOX, FLAP, PLATE, read

CASES = Path(__file__).resolve().parents[2] / "cases"
FULL = PLATE + FLAP + (
    'mount = "free"\nmass_per_area = "1 kg/m2"\nlimits = ["3 deg", "80 deg"]\n'
    '[motion]\nheave = {kind = "oscillation", amplitude = 0.1, reduced_frequency = 0.3}\n'
    "[tank]\nwall_above = 3\n[domain]\nbelow = 4\n"
)


@pytest.mark.parametrize("text", [PLATE, BARE, BOX, FULL])
def test_there_and_back_through_json_is_exact(text):
    case = read(text)
    again = decode(json.loads(json.dumps(encode(case))))
    assert again == case and hash(again) == hash(case) and case_hash(again) == case_hash(case)


def test_outline_and_record_survive(tmp_path):
    case = load_case(CASES / "outline_from_csv.toml")
    assert decode(json.loads(json.dumps(encode(case)))).outline.points == case.outline.points
    changed = replace(case, tow=replace(case.tow, profile=((0.0, 0.0), (1 / 3, 0.1), (2.0, 1.0))))
    assert decode(json.loads(json.dumps(encode(changed)))) == changed


def test_everything_is_there_with_defaults_and_units():
    data = encode(read(PLATE))
    assert data["schema"] == 1
    assert data["case"]["grid"]["cells_per_chord"] == 64.0 and data["case"]["output"]["checkpoint_every"] == 300.0
    assert data["case"]["plate"]["chord"] == 0.05 and data["units"]["plate.chord"] == "m"
    assert "text" not in data["case"] and "file" not in data["case"]


def test_every_number_of_the_model_has_a_unit_or_is_a_pure_number():
    units = encode(read(BARE))["units"]
    pure = {"tow.reynolds", "grid.cells_per_chord", "grid.stretch", "run.courant", "run.repeats",
            "fluid.glycerol_mass_fraction"}  # fmt: skip
    case = read(FULL)
    parts = {field.name: getattr(case, field.name) for field in fields(case)} | {"flaps": case.flaps[0]}
    for name, part in parts.items():
        if is_dataclass(part) and not name.endswith("_motion"):
            for field in fields(part):
                if "float" in str(field.type):
                    assert f"{name}.{field.name}" in units.keys() | pure, f"{name}.{field.name}"


def test_numbers_given_as_whole_ones_in_python_hash_alike():
    case = read(BARE)
    assert case_hash(replace(case, run=replace(case.run, travel=8))) == case_hash(case)


@pytest.mark.parametrize(
    "data",
    [{}, [], None, 3, {"schema": 2, "case": {}}, {"schema": 1, "case": {}}, {"schema": 1, "case": {"title": "x"}},
     {"schema": 1, "case": {"title": "x", "tow": {"speed": "fast", "reynolds": 1.0}}},
     {"schema": 1, "case": {"title": "x", "tow": {"speed": None, "reynolds": True}}},
     {"schema": 1, "case": {"title": "x", "tow": {"speed": None, "reynolds": 1.0, "colour": 3}}},
     {"schema": 1, "case": {"title": 3, "tow": {"speed": None, "reynolds": 1.0}}}],
)  # fmt: skip
def test_other_data_is_refused_with_a_sentence(data):
    with pytest.raises(CaseError, match="does not hold a case of this version"):
        decode(data)


def test_hash_is_16_hexadecimal_digits_and_ignores_words():
    case = read(PLATE)
    assert len(case_hash(case)) == 16 and int(case_hash(case), 16) >= 0
    assert case_hash(replace(case, title="Other")) == case_hash(case)
    assert case_hash(replace(case, text="x", file="y")) == case_hash(case)


@pytest.mark.parametrize(
    ("old", "new"),
    [("15 deg", "15.0000001 deg"), ("50 mm", "51 mm"), ("20 mm/s", "21 mm/s"), ("1000 kg/m3", "999 kg/m3")],
)
def test_hashes_see_every_physical_change(old, new):
    case, changed = read(PLATE), read(PLATE.replace(old, new))
    assert case_hash(case) != case_hash(changed) and physics_hash(case) != physics_hash(changed)


def test_length_and_output_change_the_hash_but_not_the_physics():
    case = read(PLATE)
    longer = replace(case, run=replace(case.run, travel=20.0), output=replace(case.output, frame_every=0.5))
    assert case_hash(longer) != case_hash(case) and physics_hash(longer) == physics_hash(case)


def test_where_the_travel_shapes_the_tow_it_is_physics():
    case = read(PLATE + 'start = "hold acceleration"\n')
    assert physics_hash(replace(case, run=replace(case.run, travel=20.0))) != physics_hash(case)


def test_hash_is_the_same_in_every_session():
    # Guards against hashes that depend on Python's own hash seed or on the order of sets: recomputed elsewhere
    import subprocess
    import sys

    code = "import sys; from ibsolver.case import load_case; from ibsolver.case.encode import case_hash; "
    code += "print(case_hash(load_case(sys.argv[1])))"
    path = str(CASES / "towed_plate_with_flap.toml")
    done = subprocess.run([sys.executable, "-c", code, path], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == case_hash(load_case(path))


def test_differences_in_words():
    case = read(PLATE)
    other = read(PLATE.replace("20 mm/s", "40 mm/s") + FLAP)
    assert differences(case, case) == []
    found = differences(case, other)
    assert "tow.speed: 0.02 and 0.04." in found and 'flaps[0].name: nothing and "front".' in found
    assert any(sentence.startswith("tow.reynolds: ") for sentence in found)
    assert not any("nothing and nothing" in sentence or "[]" in sentence for sentence in found)
