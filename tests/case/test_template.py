"""Starter cases."""

from __future__ import annotations

import pytest

from ibsolver.case.cautions import TWO_DIMENSIONAL, cautions
from ibsolver.case.template import KINDS, OUTLINE_CSV, new_case
from ibsolver.errors import UsageError

from .helpers import read


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_every_kind_reads_without_faults_and_without_cautions_of_its_own(kind, tmp_path):
    (tmp_path / "outline.csv").write_text(OUTLINE_CSV)
    case = read(new_case(kind), tmp_path)
    assert case.title == KINDS[kind][0]
    assert set(cautions(case)) <= {TWO_DIMENSIONAL}


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_every_line_is_commented_and_short(kind):
    text = new_case(kind)
    lines = text.splitlines()
    assert max(len(line) for line in lines) <= 120
    for number, line in enumerate(lines):
        if " = " in line and not line.startswith("title"):
            assert "#" in line or lines[number - 1].startswith("# ")


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_lines_left_out_may_be_taken_in_one_by_one(kind, tmp_path):
    (tmp_path / "outline.csv").write_text(OUTLINE_CSV)
    lines = new_case(kind).splitlines()
    for number, line in enumerate(lines):
        name = line[2:].split(" = ")[0]
        if line.startswith("# ") and " = " in line and name in ("stretch", "damping", "diameter", "heave"):
            read("\n".join(lines[:number] + [line[2:]] + lines[number + 1 :]), tmp_path)


def test_the_kinds_that_are_promised_exist():
    promised = {"plate", "plate-with-flap", "accelerating-plate", "accelerating-plate-with-flap", "cylinder", "outline"}
    assert promised <= set(KINDS)


def test_an_unknown_kind_is_refused_with_the_closest():
    with pytest.raises(UsageError) as caught:
        new_case("plate-with-flp")
    assert str(caught.value) == "There is no starter case 'plate-with-flp'. Did you mean plate-with-flap?"
    with pytest.raises(UsageError, match="Known: plate, plate-with-flap"):
        new_case("zzz")
