"""Starter cases on disk."""

from __future__ import annotations

import argparse

import pytest

from ibsolver.case import load_case
from ibsolver.case.template import KINDS
from ibsolver.commands.new import execute
from ibsolver.errors import StorageError, UsageError


def new(kind, out=None, json=False, quiet=True):
    return execute(argparse.Namespace(kind=kind, out=out, json=json, quiet=quiet))


@pytest.mark.parametrize("kind", KINDS)
def test_every_kind_is_written_and_reads_without_a_fault(kind, tmp_path):
    made = new(kind, tmp_path / "case.toml")
    assert made["kind"] == kind and str(tmp_path / "case.toml") in made["files"]
    assert load_case(tmp_path / "case.toml").title


def test_nothing_is_overwritten_and_nothing_half_made(tmp_path):
    (tmp_path / "outline.csv").write_text("mine")
    with pytest.raises(StorageError, match=r"outline\.csv: exists already and is not overwritten"):
        new("outline", tmp_path / "case.toml")
    assert (tmp_path / "outline.csv").read_text() == "mine" and not (tmp_path / "case.toml").exists()


def test_a_missing_folder_is_named(tmp_path):
    with pytest.raises(StorageError, match="there is no folder"):
        new("plate", tmp_path / "nowhere" / "case.toml")


def test_an_unknown_kind_names_the_nearest(tmp_path):
    with pytest.raises(UsageError, match=r"Did you mean cylinder\?"):
        new("cylindre", tmp_path / "case.toml")


def test_without_out_the_case_is_printed(capsys):
    new("plate")
    assert "[plate]" in capsys.readouterr().out
    assert "[plate]" in new("plate", json=True)["text"] and capsys.readouterr().out == ""
