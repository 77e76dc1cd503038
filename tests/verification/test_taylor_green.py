"""Periodic Taylor-Green vortices carried by a stream: an exact solution of the Navier-Stokes equations.

Source: Taylor & Green 1937, Proc. R. Soc. A 158, 499 (two-dimensional form; exact).
"""

from __future__ import annotations

import numpy as np

from ibsolver.case.model import Case, Domain, Grid, Initial, Run, Side, Tow
from tests.marching import march

STREAM = (1.0, 0.5)


def vortex_case(cells, reynolds, dt, stream=STREAM):
    side = Side("periodic")
    return Case(
        "periodic vortices",
        tow=Tow(None, reynolds, start="impulsive"),
        domain=Domain(width=1.0, height=1.0, left=side, right=side, bottom=side, top=side),
        initial=Initial("taylor green", stream),
        grid=Grid(cells, uniform=True),
        run=Run(travel=1.0, fixed_step=dt),
    )


def exact_u(grid, time, reynolds, stream=STREAM):
    k = 2 * np.pi
    decay = np.exp(-2 * k * k * time / reynolds)
    shape = np.outer(np.cos(k * (grid.y_centres - stream[1] * time)), np.sin(k * (grid.x_faces - stream[0] * time)))
    return stream[0] + decay * shape


def error_of(cells, dt, until=0.2, reynolds=100.0):
    run = march(vortex_case(cells, reynolds, dt), until)
    have = run.state.u[1:-1, 1:-1]
    return np.sqrt(np.mean((have - exact_u(run.problem.grid, run.state.time, reynolds)) ** 2)), run


def order(errors):
    return np.log2(np.array(errors[:-1]) / np.array(errors[1:]))


def test_second_order_in_space():
    errors = [error_of(cells, 0.0005)[0] for cells in (16, 32, 64)]
    assert np.abs(order(errors) - 2.0).max() < 0.1, errors
    assert errors[-1] < 1.0e-3


def test_second_order_in_time():
    """Against the same grid with a very small step, so that only the time error is seen."""
    fields = {steps: error_of(32, 0.2 / steps)[1].state.u for steps in (20, 40, 80, 1280)}
    errors = [np.sqrt(np.mean((fields[steps] - fields[1280]) ** 2)) for steps in (20, 40, 80)]
    assert np.abs(order(errors) - 2.0).max() < 0.1, errors
    assert errors[-1] < 2e-4


def test_divergence_is_round_off():
    run = error_of(32, 0.005)[1]
    # Round-off of speeds of order 1 over cells of 1/32.
    assert run.column("divergence").max() < 1e-12


def test_inviscid_kinetic_energy_drifts_only_by_the_time_scheme():
    """Morinishi et al. 1998, J. Comput. Phys. 143, 90: the convection term conserves energy on a uniform grid."""

    def energy(state):
        return 0.5 * np.mean(state.u[1:-1, 1:-2] ** 2) + 0.5 * np.mean(state.v[1:-2, 1:-1] ** 2)

    drifts = []
    for dt in (0.01, 0.005, 0.0025):
        case = vortex_case(32, 1e30, dt, stream=(0.3, 0.2))
        start, run = march(case, 0.0).state, march(case, 0.4)
        drifts.append(abs(energy(run.state) / energy(start) - 1.0))
    assert np.abs(order(drifts) - 2.0).max() < 0.15, drifts
    assert drifts[-1] < 5e-5
