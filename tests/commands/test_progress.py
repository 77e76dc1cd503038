"""The progress line: what it says, how often, and where it must hold its tongue."""

from __future__ import annotations

import math
import sys

import pytest

from ibsolver.commands import _progress
from ibsolver.run.progress import Progress


def report(**changes):
    numbers = {"step": 10, "time": 1.5, "travel": 1.0, "travel_end": 6.0, "lift": 1.25, "drag": 0.5, "courant": 0.5}
    return Progress(**{**numbers, "slip": 1e-3, "seconds_left": 90.0, **changes})


def test_the_line_has_travel_lift_drag_courant_and_time_left():
    line = _progress.sentence(report())
    assert line == "travel 1.00 of 6 c  C_L  1.25  C_D  0.50  Courant 0.50  time left 90 s"


def test_the_longest_usual_line_fits_80_columns():
    long = report(travel=149.99, travel_end=150, lift=-12.345, drag=-12.345, seconds_left=math.nan)
    assert len(_progress.sentence(long)) < 80


@pytest.mark.parametrize(
    ("seconds", "words"),
    [(0.4, "0 s"), (99.4, "99 s"), (101, "2 min"), (7200, "2.0 h"), (math.nan, "unknown"), (math.inf, "unknown")],
)
def test_wall_times_in_words(seconds, words):
    assert _progress.duration(seconds) == words


def test_off_a_terminal_a_plain_line_comes_now_and_then(capsys, monkeypatch):
    now = [100.0]
    monkeypatch.setattr(_progress.time, "monotonic", lambda: now[0])
    with _progress.ProgressLine(quiet=False) as line:
        for _ in range(100):
            line(report())
            now[0] += 1.0
    heard = capsys.readouterr()
    assert heard.out == "" and heard.err.count("travel 1.00 of 6") == 4  # 0, 30, 60, 90 s
    assert "\x1b" not in heard.err and "\r" not in heard.err


def test_quiet_says_nothing(capsys):
    with _progress.ProgressLine(quiet=True) as line:
        line(report())
    assert capsys.readouterr() == ("", "")


def test_no_error_stream_at_all_is_no_fault(monkeypatch):
    monkeypatch.setattr(sys, "stderr", None)
    with _progress.ProgressLine(quiet=False) as line:
        line(report())
