"""Options that several verbs share."""

from __future__ import annotations

import argparse
import os
from pathlib import Path

import pytest

from ibsolver.commands import _options


@pytest.mark.parametrize("text", ["0", "-1", "two", "1.5", "", "100000"])
def test_threads_that_this_machine_has_not(text):
    with pytest.raises(argparse.ArgumentTypeError, match="this machine has 1 to"):
        _options.threads(text)


def test_threads_are_those_of_this_process():
    assert _options.threads("1") == 1
    if hasattr(os, "sched_getaffinity"):
        assert _options.threads(str(len(os.sched_getaffinity(0)))) == len(os.sched_getaffinity(0))


def test_a_file_to_write_ends_as_its_kind_does():
    assert _options.png_file("a/b.PNG") == Path("a/b.PNG") and _options.csv_file("forces.csv") == Path("forces.csv")
    for wrong in ("plate.toml", "plate", "", "."):
        with pytest.raises(argparse.ArgumentTypeError, match=r"must end in \.png"):
            _options.png_file(wrong)
