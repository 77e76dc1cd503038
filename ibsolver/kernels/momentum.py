"""Momentum: conservative central differences on the staggered grid, and the explicit predictor."""

from __future__ import annotations

import numpy as np

from ibsolver.kernels._jit import inline, parallel_kernel, prange


@inline
def _u_row(u, v, p, x, y, scheme, j, i0, i1, tendency, out):
    """Predict the u faces i0 <= i < i1 of row j (padded indices).

    The rows are sliced first so that the loop index is never negative, without which nothing vectorises.
    """
    nu, dt, a, b, explicit, pull = scheme[0], scheme[1], scheme[2], scheme[3], scheme[4], scheme[5]
    here, west, east = u[j, i0:i1], u[j, i0 - 1 : i1 - 1], u[j, i0 + 1 : i1 + 1]
    below, above = u[j - 1, i0:i1], u[j + 1, i0:i1]
    south_west, south_east = v[j, i0 - 1 : i1 - 1], v[j, i0:i1]
    north_west, north_east = v[j + 1, i0 - 1 : i1 - 1], v[j + 1, i0:i1]
    p_west, p_east = p[j, i0 - 1 : i1 - 1], p[j, i0:i1]
    dx_west, dx_east = x[0, i0 - 1 : i1 - 1], x[0, i0:i1]
    per_dx_west, per_dx_east, per_distance = x[1, i0 - 1 : i1 - 1], x[1, i0:i1], x[3, i0:i1]
    before, result = tendency[j, i0:i1], out[j, i0:i1]
    per_dy, per_below, per_above = y[1, j], y[3, j], y[3, j + 1]
    nu_explicit, nu_implicit = nu * explicit, nu * (1.0 - explicit)
    for k in range(i1 - i0):
        c = here[k]
        u_east = 0.5 * (c + east[k])
        u_west = 0.5 * (west[k] + c)
        flux_north = north_west[k] * dx_west[k] + north_east[k] * dx_east[k]
        flux_south = south_west[k] * dx_west[k] + south_east[k] * dx_east[k]
        across = 0.25 * per_dy * (flux_north * (c + above[k]) - flux_south * (below[k] + c))
        convection = (u_east * u_east - u_west * u_west + across) * per_distance[k]
        along = ((east[k] - c) * per_dx_east[k] - (c - west[k]) * per_dx_west[k]) * per_distance[k]
        normal = ((above[k] - c) * per_above - (c - below[k]) * per_below) * per_dy
        now = nu_explicit * (along + normal) - convection
        rate = a * now - b * before[k] + nu_implicit * (along + normal) + pull
        rate -= (p_east[k] - p_west[k]) * per_distance[k]
        before[k] = now
        result[k] = c + dt * rate


@inline
def _v_row(u, v, p, x, y, scheme, j, i0, i1, tendency, out):
    """Predict the v faces i0 <= i < i1 of row j (padded indices)."""
    nu, dt, a, b, explicit, pull = scheme[0], scheme[1], scheme[2], scheme[3], scheme[4], scheme[6]
    here, west, east = v[j, i0:i1], v[j, i0 - 1 : i1 - 1], v[j, i0 + 1 : i1 + 1]
    below, above = v[j - 1, i0:i1], v[j + 1, i0:i1]
    south_west, south_east = u[j - 1, i0:i1], u[j - 1, i0 + 1 : i1 + 1]
    north_west, north_east = u[j, i0:i1], u[j, i0 + 1 : i1 + 1]
    p_below, p_above = p[j - 1, i0:i1], p[j, i0:i1]
    per_dx, per_west, per_east = x[1, i0:i1], x[3, i0:i1], x[3, i0 + 1 : i1 + 1]
    before, result = tendency[j, i0:i1], out[j, i0:i1]
    dy_below, dy_above, per_dy_below, per_dy_above = y[0, j - 1], y[0, j], y[1, j - 1], y[1, j]
    per_distance = y[3, j]
    nu_explicit, nu_implicit = nu * explicit, nu * (1.0 - explicit)
    for k in range(i1 - i0):
        c = here[k]
        v_north = 0.5 * (c + above[k])
        v_south = 0.5 * (below[k] + c)
        flux_east = south_east[k] * dy_below + north_east[k] * dy_above
        flux_west = south_west[k] * dy_below + north_west[k] * dy_above
        along = 0.25 * per_dx[k] * (flux_east * (c + east[k]) - flux_west * (west[k] + c))
        convection = (v_north * v_north - v_south * v_south + along) * per_distance
        normal = ((above[k] - c) * per_dy_above - (c - below[k]) * per_dy_below) * per_distance
        streamwise = ((east[k] - c) * per_east[k] - (c - west[k]) * per_west[k]) * per_dx[k]
        now = nu_explicit * (streamwise + normal) - convection
        rate = a * now - b * before[k] + nu_implicit * (streamwise + normal) + pull
        rate -= (p_above[k] - p_below[k]) * per_distance
        before[k] = now
        result[k] = c + dt * rate


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
    ju0, ju1, iu0, iu1 = ranges[0], ranges[1], ranges[2], ranges[3]
    jv0, jv1, iv0, iv1 = ranges[4], ranges[5], ranges[6], ranges[7]
    for j in prange(min(ju0, jv0), max(ju1, jv1)):
        if ju0 <= j < ju1:
            _u_row(u, v, p, x, y, scheme, j, iu0, iu1, tendency_u, u_star)
        if jv0 <= j < jv1:
            _v_row(u, v, p, x, y, scheme, j, iv0, iv1, tendency_v, v_star)


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
            moved, phi_west, phi_east = u[j, iu0:iu1], phi[j, iu0 - 1 : iu1 - 1], phi[j, iu0:iu1]
            per_distance = x[3, iu0:iu1]
            for k in range(iu1 - iu0):
                moved[k] -= dt * (phi_east[k] - phi_west[k]) * per_distance[k]
            pressure, increment = p[j, 1:-1], phi[j, 1:-1]
            for k in range(pressure.shape[0]):
                pressure[k] += increment[k]
        if jv0 <= j < jv1:
            moved, phi_below, phi_above = v[j, iv0:iv1], phi[j - 1, iv0:iv1], phi[j, iv0:iv1]
            factor = dt * y[3, j]
            for k in range(iv1 - iv0):
                moved[k] -= factor * (phi_above[k] - phi_below[k])


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
