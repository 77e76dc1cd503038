"""Lattice Green's function: closed forms, the equation it solves, and the matrix it gives."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import quad

from ibsolver.flow import lattice


def test_closed_forms():
    """McCrea & Whipple (1940): Lambda(1, 0) = 1/4, Lambda(1, 1) = 1/pi, Lambda(2, 2) = 4/(3 pi)."""
    g = lattice.green_function(40)
    assert g[40, 41] == pytest.approx(0.25, abs=1e-13)
    assert g[41, 41] == pytest.approx(1 / np.pi, abs=1e-13)
    assert g[42, 42] == pytest.approx(4 / (3 * np.pi), abs=1e-13)


def test_solves_the_five_point_equation():
    g = lattice.green_function(64)
    c = slice(1, -1)
    laplacian = g[c, 2:] + g[c, :-2] + g[2:, c] + g[:-2, c] - 4 * g[c, c]
    laplacian[63, 63] -= 1.0
    assert np.abs(laplacian).max() < 5e-8


@pytest.mark.parametrize("offset", [(3, 1), (12, 5), (29, 3)])
def test_integral_against_adaptive_quadrature(offset):
    m, n = offset

    def integrand(x):
        k = 2 * np.arcsinh(np.sin(x / 2))
        return (1 - np.exp(-m * k) * np.cos(n * x)) / np.sinh(k)

    want = quad(integrand, 0, np.pi, limit=200)[0] / (2 * np.pi)
    assert lattice.integral(np.array(m), np.array(n)) == pytest.approx(want, abs=1e-10)


def test_expansion_meets_the_integral():
    m, n = np.array([30, 28, 35, 25]), np.array([0, 14, 3, 25])
    np.testing.assert_allclose(lattice.expansion(m, n), lattice.integral(m, n), atol=2e-8)


def test_projected_response_is_divergence_free():
    """The field that a projected unit force leaves has no divergence at any cell."""
    reach = 12
    t = lattice.projected_response(reach)
    div_of_u_force = t[0][:-1, 1:] - t[0][:-1, :-1] + t[3][1:, :-1] - t[3][:-1, :-1]
    assert np.abs(div_of_u_force).max() < 1e-10
