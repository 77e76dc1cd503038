"""Green's function of the five-point Laplacian on the unbounded square lattice.

Lambda(m, n) = (1/2 pi) Int_0^pi (1 - exp(-|m| k) cos(n x)) / sinh k dx,   sinh(k/2) = sin(x/2),

solves (five-point Laplacian) Lambda = delta with Lambda(0, 0) = 0; closed forms Lambda(1, 0) = 1/4 and
Lambda(1, 1) = 1/pi (McCrea & Whipple 1940, Proc. R. Soc. Edinb. 60, 281).
"""

from __future__ import annotations

import functools

import numpy as np

NEAR = 40  # within this distance the integral is evaluated, beyond it the expansion for large distance


def integral(m: np.ndarray, n: np.ndarray, nodes: int = 400) -> np.ndarray:
    """Return Lambda at lattice offsets by Gauss-Legendre quadrature of the integral.

    Parameters
    ----------
    m, n : ndarray of int, same shape
        Offsets; the integrand decays in the larger one, which is taken as m.
    nodes : int
        Quadrature nodes; enough for |m|, |n| up to about 50.
    """
    m, n = np.abs(m), np.abs(n)
    m, n = np.maximum(m, n).astype(float), np.minimum(m, n).astype(float)
    nodes_x, weights = np.polynomial.legendre.leggauss(nodes)
    x = 0.5 * np.pi * (nodes_x + 1.0)
    k = 2.0 * np.arcsinh(np.sin(0.5 * x))
    integrand = (1.0 - np.exp(-m[..., None] * k) * np.cos(n[..., None] * x)) / np.sinh(k)
    return integrand @ weights * (0.25)


def expansion(m: np.ndarray, n: np.ndarray) -> np.ndarray:
    """Return Lambda far from the origin, with an error of order r^-6 (2e-9 at r = 40).

    Source: the known expansion of the lattice potential kernel (Martinsson & Rodin 2002, Proc. R. Soc. A 458, 2609,
    from memory); the tests compare it with the integral.
    """
    r2 = (m * m + n * n).astype(float)
    theta = np.arctan2(n, m)
    value = 0.5 * np.log(r2) + np.euler_gamma + 1.5 * np.log(2.0)
    value -= np.cos(4 * theta) / (12.0 * r2)
    value -= (18.0 * np.cos(4 * theta) + 25.0 * np.cos(8 * theta)) / (480.0 * r2**2)
    return value / (2.0 * np.pi)


@functools.lru_cache(maxsize=4)
def green_function(reach: int) -> np.ndarray:
    """Return Lambda on offsets -reach .. reach in both directions, shape (2 reach + 1, 2 reach + 1), read-only."""
    m, n = np.meshgrid(np.arange(reach + 1), np.arange(reach + 1))
    quadrant = np.empty(m.shape)
    near = m * m + n * n <= NEAR * NEAR
    quadrant[~near] = expansion(m[~near], n[~near])
    quadrant[near] = integral(m[near], n[near])
    full = np.empty((2 * reach + 1, 2 * reach + 1))
    full[reach:, reach:] = quadrant
    full[reach:, :reach] = quadrant[:, :0:-1]
    full[:reach] = full[:reach:-1]
    full.flags.writeable = False
    return full


@functools.lru_cache(maxsize=4)
def projected_response(reach: int) -> np.ndarray:
    """Return what is left of a unit face force after the projection, as four tables of offsets.

    Returns
    -------
    ndarray, shape (4, 2 reach - 1, 2 reach - 1), read-only
        At offset (row, column) from the origin in the middle: u from u, v from v, u from v, v from u.
    """
    g = green_function(reach)
    c = slice(1, -1)
    tables = np.empty((4, 2 * reach - 1, 2 * reach - 1))
    tables[0] = -(g[c, 2:] - 2.0 * g[c, c] + g[c, :-2])
    tables[1] = -(g[2:, c] - 2.0 * g[c, c] + g[:-2, c])
    tables[2] = -(g[2:, c] - g[c, c] - g[2:, :-2] + g[c, :-2])
    tables[3] = -(g[c, 2:] - g[c, c] - g[:-2, 2:] + g[:-2, c])
    tables[:2, reach - 1, reach - 1] += 1.0
    tables.flags.writeable = False
    return tables
