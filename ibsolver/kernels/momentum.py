"""Momentum: conservative central differences on the staggered grid, and the explicit predictor."""

from __future__ import annotations

import numpy as np

from ibsolver.kernels._jit import inline, parallel_kernel, prange


@inline
def _u_terms(u, v, x, y, j, i):
    """Return (convection, Laplacian) of u at face (j, i), padded indices."""
    east = 0.5 * (u[j, i] + u[j, i + 1])
    west = 0.5 * (u[j, i - 1] + u[j, i])
    flux_north = 0.5 * (v[j + 1, i - 1] * x[0, i - 1] + v[j + 1, i] * x[0, i])
    flux_south = 0.5 * (v[j, i - 1] * x[0, i - 1] + v[j, i] * x[0, i])
    across = 0.5 * (flux_north * (u[j, i] + u[j + 1, i]) - flux_south * (u[j - 1, i] + u[j, i]))
    convection = (east * east - west * west + across * y[1, j]) * x[3, i]
    along = ((u[j, i + 1] - u[j, i]) * x[1, i] - (u[j, i] - u[j, i - 1]) * x[1, i - 1]) * x[3, i]
    normal = ((u[j + 1, i] - u[j, i]) * y[3, j + 1] - (u[j, i] - u[j - 1, i]) * y[3, j]) * y[1, j]
    return convection, along + normal


@inline
def _v_terms(u, v, x, y, j, i):
    """Return (convection, Laplacian) of v at face (j, i), padded indices."""
    north = 0.5 * (v[j, i] + v[j + 1, i])
    south = 0.5 * (v[j - 1, i] + v[j, i])
    flux_east = 0.5 * (u[j - 1, i + 1] * y[0, j - 1] + u[j, i + 1] * y[0, j])
    flux_west = 0.5 * (u[j - 1, i] * y[0, j - 1] + u[j, i] * y[0, j])
    along = 0.5 * (flux_east * (v[j, i] + v[j, i + 1]) - flux_west * (v[j, i - 1] + v[j, i]))
    convection = (north * north - south * south + along * x[1, i]) * y[3, j]
    normal = ((v[j + 1, i] - v[j, i]) * y[1, j] - (v[j, i] - v[j - 1, i]) * y[1, j - 1]) * y[3, j]
    streamwise = ((v[j, i + 1] - v[j, i]) * x[3, i + 1] - (v[j, i] - v[j, i - 1]) * x[3, i]) * x[1, i]
    return convection, streamwise + normal


@parallel_kernel
def predict(u, v, p, x, y, scheme, ranges, tendency_u, tendency_v, u_star, v_star):
    """Advance the momentum equation by one explicit step, without the projection.

    The variable-step Adams-Bashforth form ``u* = u + dt (a T^n - b T^(n-1) + D - grad p + g)`` with
    ``T = -div(u u) + explicit nu lap u`` and ``D = (1 - explicit) nu lap u``: with explicit = 0 the result is the
    right-hand side of the Crank-Nicolson increment (`viscous.solve_increment`).

    Parameters
    ----------
    u, v, p : ndarray
        Fields with filled ghosts (see `ibsolver.grid.staggered`).
    x, y : ndarray, shape (4, nx + 3) and (4, ny + 3)
        Grid metrics.
    scheme : ndarray, shape (7,)
        nu, dt, a, b, explicit (0 or 1), g_x, g_y.
    ranges : ndarray of int, shape (8,)
        First and last + 1 padded index: u rows, u columns, v rows, v columns.
    tendency_u, tendency_v : ndarray
        T^(n-1) on entry, T^n on return. Modified in place.
    u_star, v_star : ndarray
        Modified in place on the given ranges only.
    """
    nu, dt, a, b = scheme[0], scheme[1], scheme[2], scheme[3]
    explicit, gx, gy = scheme[4], scheme[5], scheme[6]
    nu_explicit = nu * explicit
    nu_implicit = nu * (1.0 - explicit)
    ju0, ju1, iu0, iu1 = ranges[0], ranges[1], ranges[2], ranges[3]
    jv0, jv1, iv0, iv1 = ranges[4], ranges[5], ranges[6], ranges[7]
    for j in prange(min(ju0, jv0), max(ju1, jv1)):
        if ju0 <= j < ju1:
            for i in range(iu0, iu1):
                convection, laplacian = _u_terms(u, v, x, y, j, i)
                now = nu_explicit * laplacian - convection
                rate = a * now - b * tendency_u[j, i] + nu_implicit * laplacian + gx
                rate -= (p[j, i] - p[j, i - 1]) * x[3, i]
                tendency_u[j, i] = now
                u_star[j, i] = u[j, i] + dt * rate
        if jv0 <= j < jv1:
            for i in range(iv0, iv1):
                convection, laplacian = _v_terms(u, v, x, y, j, i)
                now = nu_explicit * laplacian - convection
                rate = a * now - b * tendency_v[j, i] + nu_implicit * laplacian + gy
                rate -= (p[j, i] - p[j - 1, i]) * y[3, j]
                tendency_v[j, i] = now
                v_star[j, i] = v[j, i] + dt * rate


@parallel_kernel
def correct(phi, x, y, dt, ranges, u, v, p):
    """Subtract the gradient: ``u -= dt grad phi``, ``p += phi``.

    Parameters
    ----------
    phi : ndarray, shape (ny + 2, nx + 2)
        Pressure increment; ghosts matter on periodic sides only.
    ranges : ndarray of int, shape (8,)
        As in `predict`; faces outside keep their values.
    u, v, p : ndarray
        Modified in place.
    """
    ju0, ju1, iu0, iu1 = ranges[0], ranges[1], ranges[2], ranges[3]
    jv0, jv1, iv0, iv1 = ranges[4], ranges[5], ranges[6], ranges[7]
    for j in prange(min(ju0, jv0), max(ju1, jv1)):
        if ju0 <= j < ju1:
            for i in range(iu0, iu1):
                u[j, i] -= dt * (phi[j, i] - phi[j, i - 1]) * x[3, i]
            for i in range(1, p.shape[1] - 1):
                p[j, i] += phi[j, i]
        if jv0 <= j < jv1:
            for i in range(iv0, iv1):
                v[j, i] -= dt * (phi[j, i] - phi[j - 1, i]) * y[3, j]


@parallel_kernel
def divergence(u, v, x, y, scale, out):
    """Write ``scale * div u`` of every cell into `out`, shape (ny, nx)."""
    for j in prange(out.shape[0]):
        for i in range(out.shape[1]):
            along = (u[j + 1, i + 2] - u[j + 1, i + 1]) * x[1, i + 1]
            across = (v[j + 2, i + 1] - v[j + 1, i + 1]) * y[1, j + 1]
            out[j, i] = scale * (along + across)


@parallel_kernel
def row_health(u, v, x, y, out):
    """Write three numbers a row: largest |u|/dx + |v|/dy, largest |div u|, and the sum of |u| + |v|.

    The sum carries any NaN or infinity with it, which a running maximum would miss.

    Parameters
    ----------
    out : ndarray, shape (ny, 3)
        Modified in place.
    """
    for j in prange(out.shape[0]):
        rate = 0.0
        largest = 0.0
        total = 0.0
        for i in range(x.shape[1] - 3):
            west, east = u[j + 1, i + 1], u[j + 1, i + 2]
            south, north = v[j + 1, i + 1], v[j + 2, i + 1]
            rate = max(rate, max(abs(west), abs(east)) * x[1, i + 1] + max(abs(south), abs(north)) * y[1, j + 1])
            largest = max(largest, abs((east - west) * x[1, i + 1] + (north - south) * y[1, j + 1]))
            total += abs(west) + abs(south)
        out[j, 0] = rate
        out[j, 1] = largest
        out[j, 2] = total


@parallel_kernel
def corner_vorticity(u, v, x, y, out):
    """Write dv/dx - du/dy at every corner into `out`, shape (ny + 1, nx + 1); ghosts must be filled."""
    for j in prange(out.shape[0]):
        for i in range(out.shape[1]):
            dvdx = (v[j + 1, i + 1] - v[j + 1, i]) * x[3, i + 1]
            dudy = (u[j + 1, i + 1] - u[j, i + 1]) * y[3, j + 1]
            out[j, i] = dvdx - dudy


def scheme_numbers(
    nu: float, dt: float, previous_dt: float, explicit: bool, acceleration: tuple[float, float]
) -> np.ndarray:
    """Return the `scheme` array of `predict`; the very first step (``previous_dt = 0``) is forward Euler."""
    ratio = dt / previous_dt if previous_dt > 0 else 0.0
    a, b = 1.0 + 0.5 * ratio, 0.5 * ratio
    return np.array([nu, dt, a, b, 1.0 if explicit else 0.0, acceleration[0], acceleration[1]])
