"""Plane channel: Poiseuille's parabola is a fixed point, and the start-up follows the exact series."""

from __future__ import annotations

import numpy as np
import pytest

from ibsolver.case.model import Case, Domain, Grid, Initial, Run, Side, Tow
from ibsolver.flow.advance import prepare
from tests.marching import march


def channel(cells, reynolds, dt=None):
    return Case(
        "channel",
        tow=Tow(None, reynolds, start="impulsive"),
        domain=Domain(
            width=2.0,
            height=1.0,
            left=Side("inflow", profile="parabola"),
            right=Side("outflow"),
            bottom=Side("no slip"),
            top=Side("no slip"),
        ),
        initial=Initial("rest"),
        grid=Grid(cells, uniform=True),
        run=Run(travel=1.0, fixed_step=dt),
    )


@pytest.mark.parametrize("reynolds", [20.0, 400.0])
def test_the_parabola_is_kept_to_round_off_of_the_scheme(reynolds):
    """The discrete parabola (exact for second differences, with the mirror condition's own offset) does not move."""

    def start_from_parabola(problem, state):
        grid = problem.grid
        y, h = grid.y_centres, grid.spacing
        discrete = y * (1 - y) + 0.25 * h * h  # solves the second difference with u = 0 midway between mirror values
        discrete *= problem.sides.inflow_profile.sum() / discrete.sum()
        problem.sides.inflow_profile[:] = discrete
        state.u[1:-1, :] = discrete[:, None]
        slope = 2.0 * discrete[0] / (h * h) / problem.reynolds  # any cell gives the same second difference
        second = (discrete[2] - 2 * discrete[1] + discrete[0]) / (h * h) / problem.reynolds
        assert slope > 0
        state.p[1:-1, 1:-1] = second * grid.x_centres[None, :]
        prepare(state, problem)

    run = march(channel(16, reynolds, 0.002), 0.1, disturb=start_from_parabola)
    change = run.state.u[1:-1, 1:-1] - run.problem.sides.inflow_profile[:, None]
    assert np.abs(change).max() < 1e-10
    assert np.abs(run.state.v[1:-1, 1:-1]).max() < 1e-10


def test_the_outlet_reaches_the_analytic_parabola():
    """Poiseuille: u = 6 y (1 - y) for unit mean; second order in the cells."""
    errors = []
    for cells in (8, 16):
        run = march(channel(cells, 20.0), 6.0)
        y = run.problem.grid.y_centres
        errors.append(np.abs(run.state.u[1:-1, -4] - 6 * y * (1 - y)).max())
    assert errors[1] < 0.01
    assert np.log2(errors[0] / errors[1]) > 1.8


def test_starting_flow_between_plates_follows_the_exact_series():
    """Poiseuille start-up, centre line over its maximum at nu t/a^2 = 0.1, 0.2, 0.5, 1, a the half height.

    Values from the exact series 1 - (32/pi^3) sum (-1)^n / (2n+1)^3 exp(-(2n+1)^2 pi^2 nu t / 4 a^2). The flow is
    driven by the acceleration of the frame: a periodic channel whose walls are left behind by the carriage.
    """
    exact = {0.1: 0.19775, 0.2: 0.37039, 0.5: 0.69946, 1.0: 0.91248}
    nu = 0.05
    sides = {"left": Side("periodic"), "right": Side("periodic"), "bottom": Side("no slip"), "top": Side("no slip")}
    case = Case(
        "start-up",
        tow=Tow(None, 1 / nu, start="hold acceleration"),
        domain=Domain(width=0.25, height=1.0, **sides),
        initial=Initial("rest"),
        grid=Grid(24, uniform=True),
        run=Run(travel=50.0, fixed_step=0.004),
    )
    run_times = {ratio: ratio * 0.25 / nu for ratio in exact}
    acceleration = 1.0 / (2 * 50.0)
    for ratio, until in run_times.items():
        run = march(case, until)
        centre = 0.5 * (run.state.u[12, 3] + run.state.u[13, 3])
        steady = acceleration * 0.25 / (2 * nu)
        assert centre / steady == pytest.approx(exact[ratio], abs=2e-3)
