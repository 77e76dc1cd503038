"""Small helpers for the tests of the case room."""

from __future__ import annotations

import pytest

from ibsolver.case import Case, read_case_text
from ibsolver.errors import CaseError, Fault

PLATE = """\
title = "Test plate"
[fluid]
kind = "given"
density = "1000 kg/m3"
kinematic_viscosity = "1e-6 m2/s"
[plate]
chord = "50 mm"
span = "200 mm"
incidence = "15 deg"
[tow]
speed = "20 mm/s"
"""

BARE = """\
[plate]
incidence = "15 deg"
[tow]
reynolds = 500
"""

BOX = """\
[tow]
reynolds = 100
[domain]
width = 1
height = 1
left = "no slip"
right = "no slip"
bottom = "no slip"
top = {condition = "no slip", speed = 1}
[initial]
field = "rest"
[output]
frame_every = 1
"""

FLAP = """\
[[flap]]
name = "front"
hinge = 0.12
length = 0.2
opening = "20 deg"
"""


def read(text: str, folder=None) -> Case:
    return read_case_text(text, "case.toml", folder)


def faults(text: str, folder=None) -> tuple[Fault, ...]:
    """Return the faults of a text that must not be a case."""
    with pytest.raises(CaseError) as caught:
        read(text, folder)
    return caught.value.faults


def one_fault(text: str, folder=None) -> Fault:
    """Return the only fault of a text."""
    found = faults(text, folder)
    assert len(found) == 1, [str(fault) for fault in found]
    return found[0]
