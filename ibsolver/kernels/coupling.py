"""Rows of the coupling matrix E P H from the free-space lattice Green's function.

P = I - G L^-1 D on an unbounded uniform lattice acts by convolution, so an entry needs only the correlation of two
points' weights with a small window of a table of second differences of Lambda (`ibsolver.flow.lattice`).
"""

from __future__ import annotations

import numpy as np

from ibsolver.kernels._jit import inline, parallel_kernel, prange


@inline
def _entry(index_i, weight_i, index_j, weight_j, table, cy, cx):
    """Return the projected response of one velocity component at a point to one force component at another."""
    cy[:] = 0.0
    cx[:] = 0.0
    width = weight_i.shape[1]
    for s in range(width):
        for t in range(width):
            cy[width - 1 + s - t] += weight_i[0, s] * weight_j[0, t]
            cx[width - 1 + s - t] += weight_i[1, s] * weight_j[1, t]
    dy = table.shape[0] // 2 + index_i[0] - index_j[0] - width + 1
    dx = table.shape[1] // 2 + index_i[1] - index_j[1] - width + 1
    total = 0.0
    for s in range(2 * width - 1):
        line = 0.0
        for t in range(2 * width - 1):
            line += cx[t] * table[dy + s, dx + t]
        total += cy[s] * line
    return total


@parallel_kernel
def lattice_product(columns, index_u, weight_u, index_v, weight_v, old_u, old_w_u, old_v, old_w_v, tables, force, out):
    """Add to `out` the velocities at points due to forces at the old places of some points, but for 1 / h^2.

    Parameters
    ----------
    columns : ndarray of int, shape (m,)
        Points whose forces act.
    index_u, weight_u, index_v, weight_v : ndarray
        Stencils of all points now, as in `lattice_rows`.
    old_u, old_w_u, old_v, old_w_v : ndarray
        Stencils of all points before.
    tables : ndarray, shape (4, ry, rx)
        As in `lattice_rows`.
    force : ndarray, shape (n, 2)
        Point forces.
    out : ndarray, shape (n, 2)
        Modified in place.
    """
    for i in prange(out.shape[0]):
        cy = np.zeros(2 * weight_u.shape[2] - 1)
        cx = np.zeros(2 * weight_u.shape[2] - 1)
        u, v = 0.0, 0.0
        for c in range(columns.shape[0]):
            j = columns[c]
            fx, fy = force[j, 0], force[j, 1]
            u += fx * _entry(index_u[i], weight_u[i], old_u[j], old_w_u[j], tables[0], cy, cx)
            u += fy * _entry(index_u[i], weight_u[i], old_v[j], old_w_v[j], tables[2], cy, cx)
            v += fx * _entry(index_v[i], weight_v[i], old_u[j], old_w_u[j], tables[3], cy, cx)
            v += fy * _entry(index_v[i], weight_v[i], old_v[j], old_w_v[j], tables[1], cy, cx)
        out[i, 0] += u
        out[i, 1] += v


@parallel_kernel
def lattice_rows(rows, index_u, weight_u, index_v, weight_v, scale, tables, out):
    """Fill the two rows of A that belong to each of the given points.

    Parameters
    ----------
    rows : ndarray of int, shape (m,)
        Points whose rows are filled.
    index_u, index_v : ndarray of int, shape (n, 2)
        Padded (row, column) of each point's stencil on the u and v grids.
    weight_u, weight_v : ndarray, shape (n, 2, width)
        Weights along y and x.
    scale : float
        1 / h^2: the unknowns are point forces.
    tables : ndarray, shape (4, ry, rx)
        Projected response at an offset (row, column), origin in the middle: u to u, v to v, u from v, v from u.
    out : ndarray, shape (2 n, 2 n)
        Entry (2 i + a, 2 j + b): velocity component a at point i per force component b at point j.
        Modified in place.
    """
    n = index_u.shape[0]
    for r in prange(rows.shape[0]):
        i = rows[r]
        cy = np.zeros(2 * weight_u.shape[2] - 1)
        cx = np.zeros(2 * weight_u.shape[2] - 1)
        for j in range(n):
            uu = _entry(index_u[i], weight_u[i], index_u[j], weight_u[j], tables[0], cy, cx)
            uv = _entry(index_u[i], weight_u[i], index_v[j], weight_v[j], tables[2], cy, cx)
            vu = _entry(index_v[i], weight_v[i], index_u[j], weight_u[j], tables[3], cy, cx)
            vv = _entry(index_v[i], weight_v[i], index_v[j], weight_v[j], tables[1], cy, cx)
            out[2 * i, 2 * j] = uu * scale
            out[2 * i, 2 * j + 1] = uv * scale
            out[2 * i + 1, 2 * j] = vu * scale
            out[2 * i + 1, 2 * j + 1] = vv * scale
