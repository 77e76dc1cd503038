"""Tridiagonal sweeps over axis 0, one system per column, vectorised over the contiguous axis."""

from __future__ import annotations

from ibsolver.kernels._jit import kernel, parallel_kernel, prange

STRIPS = 16  # fixed, so that the work of one strip does not depend on the number of threads


@kernel
def factor(lower, diagonal, upper, shift, singular, inverse_pivot):
    """Factor ``lower x[i-1] + (diagonal + shift[k]) x[i] + upper x[i+1]`` for every mode k.

    Parameters
    ----------
    lower, diagonal, upper : ndarray, shape (n,)
        ``lower[0]`` and ``upper[n - 1]`` are not used.
    shift : ndarray, shape (m,)
        Eigenvalue of each mode, <= 0.
    singular : int
        Mode whose system is singular (constant null vector), or -1: its last pivot becomes infinite, which
        fixes the last unknown at zero.
    inverse_pivot : ndarray, shape (n, m)
        Modified in place.
    """
    n, m = inverse_pivot.shape
    for k in range(m):
        inverse_pivot[0, k] = 1.0 / (diagonal[0] + shift[k])
    for i in range(1, n):
        for k in range(m):
            inverse_pivot[i, k] = 1.0 / (diagonal[i] + shift[k] - lower[i] * upper[i - 1] * inverse_pivot[i - 1, k])
    if singular >= 0:
        inverse_pivot[n - 1, singular] = 0.0


@parallel_kernel
def sweep(lower, upper, inverse_pivot, f):
    """Solve all systems in place: right-hand sides in, solutions out, shape (n, m)."""
    n, m = f.shape
    for strip in prange(STRIPS):
        first = strip * m // STRIPS
        last = (strip + 1) * m // STRIPS
        for k in range(first, last):
            f[0, k] *= inverse_pivot[0, k]
        for i in range(1, n):
            a = lower[i]
            for k in range(first, last):
                f[i, k] = (f[i, k] - a * f[i - 1, k]) * inverse_pivot[i, k]
        for i in range(n - 2, -1, -1):
            c = upper[i]
            for k in range(first, last):
                f[i, k] -= c * inverse_pivot[i, k] * f[i + 1, k]
