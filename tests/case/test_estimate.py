"""Estimates against the grid that is really built."""

from __future__ import annotations

import os

import pytest

from ibsolver.case import estimate
from ibsolver.case.placement import core_margin, extent, reach

from .helpers import BARE, BOX, FLAP, read


@pytest.mark.parametrize(
    "extra",
    [
        "",
        "[grid]\ncells_per_chord = 128\n",
        "[grid]\ncells_per_chord = 32\nstretch = 1.1\nlargest_cell = 0.2\n",
        "[domain]\nupstream = 20\ndownstream = 40\nlateral = 20\n",
        "[grid]\nstretch = 1.0001\n",
    ],
)
def test_cells_against_the_grid_room(extra):
    stretching = pytest.importorskip("ibsolver.grid.stretching")
    case = read(BARE + FLAP + extra)
    x_low, x_high, y_low, y_high = extent(case)
    left, right, bottom, top = reach(case)
    margin, grid = core_margin(case), case.grid
    rule = (1 / grid.cells_per_chord, grid.stretch, grid.largest_cell)
    x = stretching.stretched_faces(x_low, left - margin, right + margin, x_high, *rule)
    y = stretching.stretched_faces(y_low, bottom - margin, top + margin, y_high, *rule)
    nx, ny = estimate.cell_counts(case)
    assert nx == pytest.approx(x.size - 1, rel=0.02) and ny == pytest.approx(y.size - 1, rel=0.02)


def test_a_box_is_uniform():
    assert estimate.cell_counts(read(BOX)) == (64, 64)
    assert estimate.cell_counts(read(BARE + "[grid]\nuniform = true\n")) == (16 * 64, 12 * 64)


def test_growing_cells_fill_their_distance():
    case = read(BARE + "[grid]\ncells_per_chord = 10\nstretch = 1.1\nlargest_cell = 0.3\n")
    widths = [min(0.1 * 1.1**k, 0.3) for k in range(1, 100)]
    for distance in (0.05, 0.5, 3.0, 9.0):
        count, total = 0, 0.0
        while total < distance - 1e-12:
            total += widths[count]
            count += 1
        assert abs(estimate.growing_count(distance, case) - count) <= 1
    assert estimate.growing_count(0.0, case) == 0 and estimate.growing_count(-1.0, case) == 0


def test_memory_counts_fields_and_dense_transforms():
    case = read(BOX)
    assert estimate.memory_bytes(case) == 8 * (40 * 64 * 64 + 2 * 64 * 64)


def test_memory_of_the_machine():
    pages = os.sysconf("SC_PHYS_PAGES") * os.sysconf("SC_PAGE_SIZE")
    assert estimate.machine_memory() == pages


def test_a_system_that_does_not_tell(monkeypatch):
    def refuse(name):
        raise ValueError("unrecognized configuration name")

    monkeypatch.setattr(os, "sysconf", refuse)
    assert estimate.machine_memory() is None


def test_steps_grow_with_cells_and_travel():
    one = estimate.step_count(read(BARE))
    assert estimate.step_count(read(BARE + "[grid]\ncells_per_chord = 128\n")) == pytest.approx(2 * one)
    assert estimate.step_count(read(BARE + "[run]\nfixed_step = 0.001\n")) == pytest.approx(8500)
