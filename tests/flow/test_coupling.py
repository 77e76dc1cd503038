"""The coupling matrix: exact against lattice, symmetry, and the slip that is left."""

from __future__ import annotations

import numpy as np
import pytest

from ibsolver.body.points import BodyError
from ibsolver.flow.boundary import BoundaryConditions, SideCondition
from ibsolver.flow.coupling import Coupling
from ibsolver.flow.poisson import PoissonSolver
from tests.grids import stretched_grid


def make_coupling(points):
    grid = stretched_grid(16)
    slip = SideCondition("slip")
    sides = BoundaryConditions(grid, SideCondition("inflow"), SideCondition("outflow"), slip, slip)
    coupling = Coupling(grid, sides, PoissonSolver(grid), len(points))
    coupling.locate(points)
    return coupling


def plate_points(count=13, angle=15.0):
    s = np.linspace(-0.45, 0.45, count)
    a = np.deg2rad(angle)
    return np.column_stack([s * np.cos(a), -s * np.sin(a)])


@pytest.mark.parametrize("angle", [0.0, 15.0, 45.0, 90.0])
def test_lattice_matrix_is_within_half_a_percent_of_the_exact_one(angle):
    coupling = make_coupling(plate_points(angle=angle) * (0.8 if angle > 30 else 1.0))
    coupling.build_exact()
    exact = coupling.matrix.copy()
    coupling.build_from_lattice()
    assert np.linalg.norm(coupling.matrix - exact, 2) / np.linalg.norm(exact, 2) < 5e-3
    # What the march needs: solving with the one in place of the other leaves little slip.
    shifted = coupling.matrix + 1e-9 * np.eye(len(exact))
    left = np.eye(len(exact)) - exact @ np.linalg.inv(shifted)
    assert np.abs(np.linalg.eigvals(left)).max() < 0.05


def test_exact_matrix_is_symmetric_and_semidefinite():
    coupling = make_coupling(plate_points())
    coupling.build_exact()
    values = np.linalg.eigvalsh(coupling.matrix)
    assert values.min() > -1e-10 * values.max()


def test_rows_of_some_points_equal_those_of_all():
    points = plate_points()
    coupling = make_coupling(points)
    coupling.build_from_lattice()
    moved = points.copy()
    moved[9:] += 0.013
    coupling.locate(moved)
    coupling.build_from_lattice(np.arange(9, 13))
    some = coupling.matrix.copy()
    coupling.build_from_lattice()
    np.testing.assert_allclose(some, coupling.matrix, rtol=1e-12, atol=1e-9)


def test_a_point_of_little_weight_carries_little_force():
    coupling = make_coupling(plate_points())
    coupling.build_exact()
    weights = np.ones(13)
    weights[6] = 1e-4
    coupling.factorise(weights, np.zeros(0, dtype=int))
    slip = np.tile([0.0, 1.0], (13, 1))
    force = coupling.force_change(slip, 0.01, np.zeros((13, 2)))
    assert abs(force[6, 1]) < 1e-3 * np.abs(force[:, 1]).max()
    left = np.full((13, 2), 0.1)
    left[6] = 5.0
    assert coupling.worst_slip(left) == pytest.approx(np.hypot(0.1, 0.1))


def test_a_point_outside_the_core_is_an_error_that_names_it():
    with pytest.raises(BodyError, match=r"x = 1\.2000.*core_margin"):
        make_coupling(np.array([[1.2, 0.0]]))


@pytest.mark.parametrize("changing", [[], [8, 9, 10, 11], list(range(12))])
def test_factor_with_resting_points_eliminated_equals_the_dense_solution(changing):
    from ibsolver.flow.factor import CouplingFactor

    rng = np.random.default_rng(3)
    root = rng.standard_normal((12, 12))
    matrix, added = root @ root.T, rng.uniform(0, 1, 12)
    factor = CouplingFactor(matrix, added, np.array(changing, dtype=int))
    if changing:  # another positive definite matrix with the same resting block
        root[changing] = rng.standard_normal((len(changing), 12))
        matrix = root @ root.T
        factor.update(matrix, added)
    for right in (rng.standard_normal(12), rng.standard_normal((12, 3))):
        want = np.linalg.solve(matrix + np.diag(added), right)
        np.testing.assert_allclose(factor.solve(right), want, rtol=1e-6, atol=1e-6)
