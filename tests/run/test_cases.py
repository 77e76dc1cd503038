"""Every case that is shipped, at reduced size: it assembles, marches, and obeys its own physics."""

from __future__ import annotations

import dataclasses
from pathlib import Path

import numpy as np
import pytest

from ibsolver.case import load_case
from tests.marching import march

CASES = Path(__file__).resolve().parents[2] / "cases"
NAMES = sorted(p.relative_to(CASES).as_posix() for p in [*CASES.glob("*.toml"), *CASES.glob("overnight/*.toml")])


def reduced(name, cells=24, **run):
    case = load_case(str(CASES / name))
    grid = dataclasses.replace(case.grid, cells_per_chord=min(cells, case.grid.cells_per_chord))
    domain = case.domain
    if domain.width is None:
        domain = dataclasses.replace(domain, upstream=3.0, downstream=4.0, lateral=3.0)
    return dataclasses.replace(case, grid=grid, domain=domain, run=dataclasses.replace(case.run, **run))


@pytest.mark.parametrize("name", NAMES)
def test_a_case_marches_at_reduced_size(name):
    case = reduced(name)
    run = march(case, 0.3)
    assert run.column("divergence").max() < 1e-10
    assert np.isfinite(run.lift()).all() and run.times.size > 3
    if run.problem.rig.links:
        assert run.column("slip")[2:].max() < 5 * case.run.slip_tolerance
        peak = np.abs(run.drag()).max() + np.abs(run.lift()).max()
        assert np.abs(run.lift() - 2 * run.column("momentum_lift"))[3:].max() < 0.02 * peak


def test_lid_driven_cavity_at_re_100():
    """Botella & Peyret 1998, Comput. Fluids 27, 421: extreme velocities on the centre lines.

    Second order from 32 to 64 cells (extremes between cell centres by a parabola), extrapolated within 0.001.
    """
    published = np.array([-0.2140417, 0.1795728, -0.2538030])
    found = []
    for cells in (32, 64):
        run = march(reduced("cavity_re100.toml", cells=cells), 20.0)
        grid, u, v = run.problem.grid, run.state.u[1:-1, 1:-1], run.state.v[1:-1, 1:-1]
        up, along = u[:, grid.nx // 2], v[grid.ny // 2]
        found.append([-_crest(-up), _crest(along), -_crest(-along)])
    coarse, fine = np.abs(np.array(found) - published)
    assert (fine < 0.002).all(), found
    assert (coarse / fine > 3.0).all(), found
    extrapolated = (4 * np.array(found[1]) - np.array(found[0])) / 3
    np.testing.assert_allclose(extrapolated, published, atol=1e-3)


def _crest(line):
    """Return the greatest value of the parabola through the greatest sample and its neighbours."""
    k = int(np.argmax(line))
    a, b, c = np.polyfit([-1, 0, 1], line[k - 1 : k + 2], 2)
    return c - b * b / (4 * a)


def test_the_flap_raises_the_load_at_the_start():
    """With the flap the plate starts with a larger frontal area; the lift histories must differ clearly."""
    plain, flapped = (march(reduced(f"towed_plate{tail}.toml", cells=32), 1.2) for tail in ("", "_with_flap"))
    t = np.linspace(0.3, 1.1, 30)
    difference = np.interp(t, flapped.mid_times, flapped.lift()) - np.interp(t, plain.mid_times, plain.lift())
    assert np.abs(difference).max() > 0.02


def test_sliding_tank_walls_leave_still_water_at_rest():
    """Far upstream of the body, water and walls move together past the carriage: no boundary layer grows on them."""
    case = load_case(str(CASES / "towed_plate.toml"))
    case = dataclasses.replace(
        case,
        tank=dataclasses.replace(case.tank, wall_above=1.5, wall_below=2.0),
        grid=dataclasses.replace(case.grid, cells_per_chord=24),
    )
    run = march(case, 1.3)
    grid, u = run.problem.grid, run.state.u[1:-1, 1:-1]
    i = int(np.argmin(np.abs(grid.x_faces + 5.0)))
    assert grid.y_faces[0] == -2.0 and grid.y_faces[-1] == 1.5
    assert np.abs(u[:, i] - 1.0).max() < 0.01
