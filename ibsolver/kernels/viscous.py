"""Crank-Nicolson diffusion by approximate factorisation (Kim & Moin 1985, J. Comput. Phys. 59, 308).

The increment d = u* - u^n solves ``(1 - c L_x)(1 - c L_y) d = right-hand side`` with c = nu dt / 2. Each factor is
tridiagonal with coefficients that depend on one index only, so its pivots are computed once a step.
"""

from __future__ import annotations

import numpy as np

from ibsolver.kernels._jit import kernel, parallel_kernel, prange

STRIPS = 16


@kernel
def line_factors(below, above, c, first_mirror, last_mirror, out):
    """Fill the Thomas factors of ``1 - c L`` along one line.

    Parameters
    ----------
    below, above : ndarray, shape (n,)
        Weights of the lower and upper neighbour in L (the diagonal is minus their sum).
    c : float
        nu dt / 2.
    first_mirror, last_mirror : float
        What the increment beyond each end is, in units of the end value: 1 zero gradient, -1 zero at the wall
        half a cell away, 0 zero at the neighbouring point itself.
    out : ndarray, shape (3, n)
        Scaled lower, upper and inverse pivot. Modified in place.
    """
    n = below.shape[0]
    for i in range(n):
        diagonal = 1.0 + c * (below[i] + above[i])
        if i == 0:
            diagonal -= c * below[0] * first_mirror
        if i == n - 1:
            diagonal -= c * above[n - 1] * last_mirror
        lower = -c * below[i] if i > 0 else 0.0
        pivot = diagonal - (lower * out[1, i - 1] if i > 0 else 0.0)
        out[0, i] = lower
        out[2, i] = 1.0 / pivot
        out[1, i] = (-c * above[i] if i < n - 1 else 0.0) / pivot


@parallel_kernel
def solve_rows(factors, j0, j1, i0, d):
    """Solve along every row j0 <= j < j1 of `d`, columns from i0, in place."""
    n = factors.shape[1]
    for j in prange(j0, j1):
        previous = 0.0
        for k in range(n):
            previous = (d[j, i0 + k] - factors[0, k] * previous) * factors[2, k]
            d[j, i0 + k] = previous
        for k in range(n - 2, -1, -1):
            d[j, i0 + k] -= factors[1, k] * d[j, i0 + k + 1]


@parallel_kernel
def solve_columns(factors, j0, i0, i1, d):
    """Solve along every column i0 <= i < i1 of `d`, rows from j0, in place; vectorised over the columns."""
    n = factors.shape[1]
    for strip in prange(STRIPS):
        first = i0 + strip * (i1 - i0) // STRIPS
        last = i0 + (strip + 1) * (i1 - i0) // STRIPS
        for i in range(first, last):
            d[j0, i] *= factors[2, 0]
        for k in range(1, n):
            lower, inverse = factors[0, k], factors[2, k]
            for i in range(first, last):
                d[j0 + k, i] = (d[j0 + k, i] - lower * d[j0 + k - 1, i]) * inverse
        for k in range(n - 2, -1, -1):
            upper = factors[1, k]
            for i in range(first, last):
                d[j0 + k, i] -= upper * d[j0 + k + 1, i]


def neighbour_weights(widths: np.ndarray, distances_below: np.ndarray, distances_above: np.ndarray) -> np.ndarray:
    """Return the weights of L, shape (2, n): ``1 / (width distance)`` to the lower and the upper neighbour."""
    return np.array([1.0 / (widths * distances_below), 1.0 / (widths * distances_above)])
