"""The table of keys is complete, and agrees with the dataclasses and with itself."""

from __future__ import annotations

import dataclasses
import math
import tomllib

import pytest

from ibsolver.case import model
from ibsolver.case.draft import Draft
from ibsolver.case.schema import SECTION, SECTIONS, allowed, default_text, kind_text, schema, schema_markdown
from ibsolver.case.values import Length, read_value

MODELS = {
    "plate": model.Plate, "cylinder": model.Cylinder, "outline": model.Outline, "flap": model.Flap, "tow": model.Tow,
    "tank": model.Tank, "domain": model.Domain, "initial": model.Initial, "grid": model.Grid, "run": model.Run,
    "output": model.Output, "side table": model.Side,
}  # fmt: skip


@pytest.mark.parametrize("name", sorted(MODELS))
def test_defaults_agree_with_the_model(name):
    known = {field.name: field.default for field in dataclasses.fields(MODELS[name])}
    fields = {field: value for field, value in known.items() if value is not dataclasses.MISSING}
    for key in SECTION[name].keys:
        if key.default is None or key.kind == "side" or key.name not in fields:
            continue
        raw = list(key.default) if isinstance(key.default, tuple) else key.default
        assert read_value(raw, key) == fields[key.name], key.name


def test_default_sides_agree_with_the_model():
    for name in ("left", "right", "bottom", "top"):
        assert getattr(model.Domain(), name) == model.Side(SECTION["domain"].key(name).default)


@pytest.mark.parametrize("name", sorted(MODELS))
def test_every_key_has_a_place_in_the_model(name):
    renamed = {"profile": "profile_file"} if name == "tow" else {}
    fields = {field.name for field in dataclasses.fields(MODELS[name])}
    assert {renamed.get(key.name, key.name) for key in SECTION[name].keys} <= fields


def test_every_example_is_a_value_that_its_own_key_allows():
    for _section, key in schema():
        raw = tomllib.loads(f"x = {key.example}")["x"]
        if key.kind not in ("motion", "angle or motion", "moved", "side"):
            value = read_value(raw, key)
            assert isinstance(value, (str, bool, tuple, Length)) or math.isfinite(value)


def test_every_key_has_help_and_a_way_to_write_it():
    for _section, key in schema():
        assert key.help.endswith(".") and len(key.help) < 110
        assert kind_text(key)


def test_names_are_unique_and_synonyms_are_not_keys():
    for section in SECTIONS:
        names = [key.name for key in section.keys]
        assert len(set(names)) == len(names)
        synonyms = [word for key in section.keys for word in key.synonyms]
        assert len(set(synonyms)) == len(synonyms) and not set(synonyms) & set(names)


def test_allowed_in_words():
    assert allowed(SECTION["run"].key("courant")) == "at least 0.001 and at most 0.7"
    assert allowed(SECTION["plate"].key("incidence")) == "at least -180 deg and at most 180 deg"
    assert allowed(SECTION["flap"].key("side")) == 'one of "upper", "lower"'
    assert allowed(SECTION["grid"].key("uniform")) == "true or false"


def test_markdown_has_one_row_a_key():
    text = schema_markdown()
    rows = [line for line in text.splitlines() if line.startswith("| `")]
    assert len(rows) == len(list(schema()))
    assert "### [[flap]]" in text and "### [plate]" in text
    assert "| `courant` | Greatest Courant number max(\\|u\\|/dx + \\|v\\|/dy) dt. | number |" in text


def test_default_text():
    assert default_text(SECTION["output"].key("checkpoint_every")) == '"5 min"'
    assert default_text(SECTION["fluid"].key("kind")) == "required"
    assert default_text(SECTION["tow"].key("speed")) == ""


def test_reading_an_empty_table_gives_every_default():
    draft = Draft("case.toml", None, {})
    table = draft.read_table(SECTION["run"], ("run",), {})
    assert not draft.faults
    assert model.Run(**table.fields()) == model.Run()
