"""Fixtures that several rooms use."""

from __future__ import annotations

import os

import pytest

from tests.runs import write_case

os.environ.setdefault("NO_COLOR", "1")


@pytest.fixture(scope="session")
def small_run(tmp_path_factory):
    """A finished small run directory; not to be changed."""
    from ibsolver.case import load_case
    from ibsolver.run.loop import run_case

    folder = tmp_path_factory.mktemp("small")
    case = load_case(str(write_case(folder)))
    run_case(case, folder / "run")
    return folder / "run"
