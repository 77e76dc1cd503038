"""The direct Poisson solver: residual at round-off on every kind of grid, and scipy.sparse as an outside witness."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.sparse
import scipy.sparse.linalg

from ibsolver.flow.poisson import PoissonSolver
from ibsolver.kernels import _jit
from tests.grids import odd_grid, stretched_grid, uniform_grid
from tests.naive.fields import laplacian_matrix


def balanced(grid, seed=0):
    """Return a random right-hand side whose area-weighted sum vanishes."""
    f = np.random.default_rng(seed).standard_normal((grid.ny, grid.nx))
    area = np.outer(np.diff(grid.y_faces), np.diff(grid.x_faces))
    return f - (f * area).sum() / area.sum()


def laplacian(phi, grid):
    """Return D G phi by numpy slices."""
    along = np.pad(phi, ((0, 0), (1, 1)), mode="wrap" if grid.periodic_x else "edge")
    across = np.pad(phi, ((1, 1), (0, 0)), mode="wrap" if grid.periodic_y else "edge")
    slope_x = np.diff(along, axis=1) / grid.dx_centres[1:-1]
    slope_y = np.diff(across, axis=0) / grid.dy_centres[1:-1, None]
    return np.diff(slope_x, axis=1) / np.diff(grid.x_faces) + np.diff(slope_y, axis=0) / np.diff(grid.y_faces)[:, None]


GRIDS = {
    "uniform": uniform_grid(37, 24),
    "periodic in x": uniform_grid(36, 25, periodic_x=True),
    "periodic in both, odd": uniform_grid(21, 15, True, True),
    "periodic in both, even": uniform_grid(32, 16, True, True),
    "stretched, symmetric": stretched_grid(),
    "stretched, unsymmetric": stretched_grid(low=-2.7),
    "random": odd_grid(9, 12),
    "periodic x, random y": odd_grid(12, 9, periodic_x=True),
    "random x, periodic y": odd_grid(9, 12, periodic_y=True),
}


@pytest.mark.parametrize("name", GRIDS)
@pytest.mark.parametrize("axis", [None, "x", "y"])
def test_residual_is_round_off(name, axis):
    grid = GRIDS[name]
    if axis is not None and (grid.periodic_x and axis == "y" or grid.periodic_y and axis == "x"):
        if not (grid.periodic_x and grid.periodic_y):
            pytest.skip("a lone periodic axis is always the transformed one")
    solver, f = PoissonSolver(grid, axis), balanced(grid)
    phi = np.zeros((grid.ny + 2, grid.nx + 2))
    kept = f.copy()
    solver.solve(f, phi[1:-1, 1:-1])
    assert (f == kept).all(), "the right-hand side must not be changed"
    # Relative to the size of the terms that cancel in the Laplacian, which is what round-off scales with.
    terms = np.abs(phi).max() * (2 / np.diff(grid.x_faces).min() ** 2 + 2 / np.diff(grid.y_faces).min() ** 2)
    residual = np.abs(laplacian(phi[1:-1, 1:-1], grid) - f).max()
    assert residual / max(terms, np.abs(f).max()) < 1e-12
    area = np.outer(np.diff(grid.y_faces), np.diff(grid.x_faces))
    assert abs((phi[1:-1, 1:-1] * area).sum()) < 1e-10


@pytest.mark.parametrize("grid", [odd_grid(9, 12), odd_grid(12, 9, periodic_x=True), uniform_grid(8, 6, True, True)])
def test_agrees_with_a_sparse_solver(grid):
    f = balanced(grid, 5)
    matrix = laplacian_matrix(grid)
    matrix[0] = 0.0
    matrix[0, 0] = 1.0
    right = f.ravel().copy()
    right[0] = 0.0
    want = scipy.sparse.linalg.spsolve(scipy.sparse.csr_matrix(matrix), right).reshape(f.shape)
    have = np.zeros_like(f)
    PoissonSolver(grid).solve(f, have)
    np.testing.assert_allclose(have - have[0, 0], want - want[0, 0], atol=1e-11 * np.abs(want).max())


def test_parity_is_used_where_the_stretch_is_symmetric():
    assert "halved by parity" in PoissonSolver(stretched_grid(), "y").plan
    assert "parity" not in PoissonSolver(stretched_grid(low=-2.7), "y").plan


def test_one_and_two_threads_give_the_same_bits():
    grid = stretched_grid()
    solver, f = PoissonSolver(grid), balanced(grid)
    results = []
    with _jit.one_blas_thread():
        for threads in (1, min(2, _jit.available_cores())):
            _jit.set_threads(threads)
            phi = np.zeros_like(f)
            solver.solve(f, phi)
            results.append(phi)
    _jit.set_threads(None)
    assert (results[0] == results[1]).all()
