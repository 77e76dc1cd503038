"""Small real runs for tests of files, commands and post-processing."""

from __future__ import annotations

from pathlib import Path

SMALL_CASE = """\
title = "Small plate with a flap"

[fluid]
kind = "fresh water"
temperature = "21 degC"

[plate]
chord = "60 mm"
span = "200 mm"
incidence = "18 deg"

[[flap]]
name = "front"
hinge = 0.12
side = "upper"
length = 0.3
mount = "fixed"
opening = "25 deg"

[tow]
reynolds = 300
start = "smooth"

[domain]
upstream = 3
downstream = 4
lateral = 3

[grid]
cells_per_chord = 24

[run]
travel = 0.6

[output]
frame_every = 0.1
"""


def write_case(folder: Path, text: str = SMALL_CASE, name: str = "small.toml") -> Path:
    """Write a case file and return its path."""
    path = folder / name
    path.write_text(text)
    return path
