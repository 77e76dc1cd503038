"""Options that several verbs share."""

from __future__ import annotations

import argparse
import os
from pathlib import Path

import pytest

from ibsolver.commands import _options
from ibsolver.runfile import layout


@pytest.mark.parametrize("text", ["0", "-1", "two", "1.5", "", "100000"])
def test_threads_that_this_machine_has_not(text):
    with pytest.raises(argparse.ArgumentTypeError, match="this machine has 1 to"):
        _options.threads(text)


def test_threads_are_those_of_this_process():
    assert _options.threads("1") == 1
    if hasattr(os, "sched_getaffinity"):
        assert _options.threads(str(len(os.sched_getaffinity(0)))) == len(os.sched_getaffinity(0))


def test_a_file_to_write_ends_as_its_kind_does():
    assert _options.png_file("b.PNG") == Path("b.PNG") and _options.csv_file("forces.csv") == Path("forces.csv")
    for wrong in ("plate.toml", "plate", "", "."):
        with pytest.raises(argparse.ArgumentTypeError, match=r"must end in \.png"):
            _options.png_file(wrong)


def test_a_file_to_write_goes_into_a_folder_that_exists(tmp_path):
    assert _options.png_file(str(tmp_path / "a.png")) == tmp_path / "a.png"
    with pytest.raises(argparse.ArgumentTypeError, match="there is no folder .*nowhere; make it first"):
        _options.png_file(str(tmp_path / "nowhere" / "a.png"))


@pytest.mark.parametrize("text", ["", " "])
def test_an_empty_name_is_not_taken_for_this_folder(text):
    with pytest.raises(argparse.ArgumentTypeError, match="an empty name"):
        _options.named(text)


@pytest.mark.parametrize("text", ["0", "-1", "nan", "inf", "two", ""])
def test_numbers_above_0(text):
    assert _options.positive("2.5") == 2.5
    with pytest.raises(argparse.ArgumentTypeError, match="must be a number above 0"):
        _options.positive(text)


def test_a_run_directory_is_told_from_other_places(tmp_path):
    (tmp_path / "run").mkdir()
    (tmp_path / "run" / layout.RESOLVED).write_text("{}")
    (tmp_path / "case.toml").write_text("")
    assert _options.run_directory(str(tmp_path / "run")) == tmp_path / "run"
    for place, sentence in (("nowhere", "no such run"), ("case.toml", "is a file"), (".", "there is no run in this folder")):
        with pytest.raises(argparse.ArgumentTypeError, match=sentence):
            _options.run_directory(str(tmp_path / place))
