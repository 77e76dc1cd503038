"""Tridiagonal sweeps and Crank-Nicolson factors against dense linear algebra."""

from __future__ import annotations

import numpy as np
import pytest

from ibsolver.kernels import tridiagonal, viscous
from tests.grids import plain


def compiled(kernel):
    return kernel


@pytest.mark.parametrize("form", [compiled, plain])
def test_sweep_equals_dense_solution(form):
    rng = np.random.default_rng(0)
    n, m = 9, 23
    lower, upper = rng.uniform(0.5, 1.5, n), rng.uniform(0.5, 1.5, n)
    diagonal = -(lower + upper) - 0.1
    shift = -rng.uniform(0, 2, m)
    pivots, f = np.empty((n, m)), rng.standard_normal((n, m))
    have = f.copy()
    form(tridiagonal.factor)(lower, diagonal, upper, shift, -1, pivots)
    form(tridiagonal.sweep)(lower, upper, pivots, have)
    for k in range(m):
        matrix = np.diag(diagonal + shift[k]) + np.diag(lower[1:], -1) + np.diag(upper[:-1], 1)
        np.testing.assert_allclose(matrix @ have[:, k], f[:, k], atol=1e-11)


@pytest.mark.parametrize("form", [compiled, plain])
@pytest.mark.parametrize("mirror", [1.0, -1.0, 0.0])
def test_line_solvers_equal_dense_solution(form, mirror):
    rng = np.random.default_rng(1)
    n, c = 7, 0.3
    below, above = rng.uniform(0.5, 1.5, n), rng.uniform(0.5, 1.5, n)
    matrix = np.diag(1 + c * (below + above)) - c * np.diag(below[1:], -1) - c * np.diag(above[:-1], 1)
    matrix[0, 0] -= c * below[0] * mirror
    matrix[-1, -1] -= c * above[-1] * mirror
    factors = np.zeros((3, n))
    form(viscous.line_factors)(below, above, c, mirror, mirror, factors)
    field = rng.standard_normal((n + 2, n + 3))
    along_rows, along_columns = field.copy(), field.copy()
    form(viscous.solve_rows)(factors, 1, n + 1, 2, along_rows)
    np.testing.assert_allclose(along_rows[1 : n + 1, 2 : n + 2] @ matrix.T, field[1 : n + 1, 2 : n + 2], atol=1e-12)
    form(viscous.solve_columns)(factors, 1, 2, n + 2, along_columns)
    np.testing.assert_allclose(matrix @ along_columns[1 : n + 1, 2 : n + 2], field[1 : n + 1, 2 : n + 2], atol=1e-12)
