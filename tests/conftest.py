"""Fixtures that several rooms use."""

from __future__ import annotations

import os

import pytest
from hypothesis import settings

from tests.runs import write_case

os.environ.setdefault("NO_COLOR", "1")

# The same examples every time: a test that passed yesterday does not fail today by chance. Deadlines are for hangs; the
# machine is shared.
settings.register_profile("steady", derandomize=True, deadline=5000)
settings.load_profile("steady")


@pytest.fixture(scope="session")
def small_run(tmp_path_factory):
    """A finished small run directory; not to be changed."""
    from ibsolver.case import load_case
    from ibsolver.run.loop import run_case

    folder = tmp_path_factory.mktemp("small")
    case = load_case(str(write_case(folder)))
    run_case(case, folder / "run")
    return folder / "run"
