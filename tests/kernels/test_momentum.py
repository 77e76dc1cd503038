"""Momentum kernels against plain twins, compiled and uncompiled, on odd little grids."""

from __future__ import annotations

import numpy as np
import pytest

from ibsolver.kernels import momentum
from tests.grids import odd_grid, plain, random_fields
from tests.naive import fields as naive


def compiled(kernel):
    return kernel


@pytest.mark.parametrize("form", [compiled, plain])
@pytest.mark.parametrize("size", [(7, 5), (9, 12), (5, 7)])
def test_predict_equals_plain_twin(form, size):
    grid = odd_grid(*size)
    u, v, p = random_fields(grid)
    old_u, old_v, _ = random_fields(grid, seed=8)
    ranges = np.array([1, grid.ny + 1, 2, grid.nx + 1, 2, grid.ny + 1, 1, grid.nx + 1])
    scheme = momentum.scheme_numbers(0.03, 0.01, 0.008, True, (0.7, -0.2))
    wanted = naive.predict(u, v, p, grid, 0.03, 0.01, 1.625, 0.625, (0.7, -0.2), ranges, old_u, old_v)
    u_star, v_star, new_u, new_v = u.copy(), v.copy(), old_u.copy(), old_v.copy()
    form(momentum.predict)(u, v, p, grid.x_metrics, grid.y_metrics, scheme, ranges, new_u, new_v, u_star, v_star)
    for have, want in zip((u_star, v_star, new_u, new_v), wanted, strict=True):
        np.testing.assert_allclose(have, want, rtol=1e-12, atol=1e-12)


@pytest.mark.parametrize("form", [compiled, plain])
@pytest.mark.parametrize("size", [(7, 5), (9, 12)])
def test_divergence_equals_plain_twin(form, size):
    grid = odd_grid(*size)
    u, v, _ = random_fields(grid)
    out = np.empty((grid.ny, grid.nx))
    form(momentum.divergence)(u, v, grid.x_metrics, grid.y_metrics, 2.0, out)
    np.testing.assert_allclose(out, 2.0 * naive.divergence(u, v, grid), rtol=1e-12, atol=1e-12)


@pytest.mark.parametrize("form", [compiled, plain])
def test_correct_subtracts_the_gradient(form):
    grid = odd_grid(7, 5)
    u, v, p = random_fields(grid)
    phi = random_fields(grid, seed=5)[2]
    ranges = np.array([1, 6, 2, 8, 2, 6, 1, 8])
    have_u, have_v, have_p = u.copy(), v.copy(), p.copy()
    form(momentum.correct)(phi, grid.x_metrics, grid.y_metrics, 0.5, ranges, have_u, have_v, have_p)
    want_u, want_v = u.copy(), v.copy()
    xc, yc = grid.x_centres, grid.y_centres
    want_u[1:-1, 2:8] -= 0.5 * np.diff(phi[1:-1, 1:-1], axis=1) / np.diff(xc)
    want_v[2:6, 1:-1] -= 0.5 * np.diff(phi[1:-1, 1:-1], axis=0) / np.diff(yc)[:, None]
    np.testing.assert_allclose(have_u, want_u, atol=1e-13)
    np.testing.assert_allclose(have_v, want_v, atol=1e-13)
    np.testing.assert_allclose(have_p[1:-1, 1:-1], (p + phi)[1:-1, 1:-1], atol=1e-13)


@pytest.mark.parametrize("form", [compiled, plain])
def test_row_health_sees_a_single_bad_number(form):
    grid = odd_grid(9, 12)
    u, v, _ = random_fields(grid)
    rows = np.empty((grid.ny, 3))
    form(momentum.row_health)(u, v, grid.x_metrics, grid.y_metrics, rows)
    assert np.isfinite(rows).all()
    np.testing.assert_allclose(rows[:, 1], np.abs(naive.divergence(u, v, grid)).max(axis=1), rtol=1e-12)
    for bad in (np.nan, np.inf):
        spoilt = u.copy()
        spoilt[4, 5] = bad
        form(momentum.row_health)(spoilt, v, grid.x_metrics, grid.y_metrics, rows)
        assert not np.isfinite(rows[:, 2].sum())


@pytest.mark.parametrize("form", [compiled, plain])
def test_corner_vorticity_of_solid_rotation(form):
    grid = odd_grid(7, 5)
    x = np.concatenate(
        [[grid.x_centres[0] - grid.dx_centres[1]], grid.x_centres, [grid.x_centres[-1] + grid.dx_centres[-2]]]
    )
    y = np.concatenate(
        [[grid.y_centres[0] - grid.dy_centres[1]], grid.y_centres, [grid.y_centres[-1] + grid.dy_centres[-2]]]
    )
    u = -np.outer(y, np.ones(grid.nx + 3))
    v = np.outer(np.ones(grid.ny + 3), x)
    out = np.empty((grid.ny + 1, grid.nx + 1))
    form(momentum.corner_vorticity)(u, v, grid.x_metrics, grid.y_metrics, out)
    np.testing.assert_allclose(out, 2.0, rtol=1e-12)


def test_first_step_is_forward_euler():
    scheme = momentum.scheme_numbers(0.1, 0.02, 0.0, True, (0.0, 0.0))
    assert scheme[2] == 1.0 and scheme[3] == 0.0
