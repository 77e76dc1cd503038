"""Rows of the coupling matrix E P H from the free-space lattice Green's function.

P = I - G L^-1 D on an unbounded uniform lattice acts by convolution, so an entry needs only the correlation of two
points' weights with a small window of a table of second differences of Lambda (`ibsolver.flow.lattice`). Points further
apart than `FAR` cells see each other as dipoles: the closed form of the second differences is then good to 1e-4 of a
diagonal entry and a hundred times cheaper.
"""

from __future__ import annotations

import math

import numpy as np

from ibsolver.kernels._jit import inline, kernel, parallel_kernel, prange

FAR = 9.0  # cells


@inline
def _far(dx, dy):
    """Return the response (uu, uv, vv) at an offset in cells, far away: harmonic dipoles and the lattice's next order.

    With z = dx + i dy: minus the second derivatives of Lambda = (ln r - cos(4 theta)/(12 r^2))/(2 pi), and the fourth
    derivatives by which second differences exceed them.
    """
    r2 = dx * dx + dy * dy
    a, b = (dx * dx - dy * dy) / (r2 * r2), -2.0 * dx * dy / (r2 * r2)  # 1/z^2
    a4, b4 = a * a - b * b, 2.0 * a * b  # 1/z^4
    # z / conj(z)^5 = z^2 |z|^-2 conj(z)^-4, conj(z)^-4 = a4 - i b4, z^2/|z|^2 = (a - i b) r2
    c, d = (a * a4 - b * b4) * r2, (-a * b4 - b * a4) * r2
    uu = a / (2.0 * math.pi) + (-6.0 * a4 + 12.0 * c) / (24.0 * math.pi) + a4 / (4.0 * math.pi)
    vv = -a / (2.0 * math.pi) + (-6.0 * a4 - 12.0 * c) / (24.0 * math.pi) + a4 / (4.0 * math.pi)
    uv = -b / (2.0 * math.pi) + 12.0 * d / (24.0 * math.pi)
    return uu, uv, vv


@kernel
def _correlate(one, other, out):
    """Write the correlation of two weight vectors into `out`, shape (2 width - 1,)."""
    width = one.shape[0]
    out[:] = 0.0
    for s in range(width):
        for t in range(width):
            out[width - 1 + s - t] += one[s] * other[t]


@kernel
def _window(index_i, index_j, cy, cx, table):
    """Return the correlation's sum over the table around the offset of two stencils."""
    width = (cx.shape[0] + 1) // 2
    dy = table.shape[0] // 2 + index_i[0] - index_j[0] - width + 1
    dx = table.shape[1] // 2 + index_i[1] - index_j[1] - width + 1
    total = 0.0
    for s in range(cy.shape[0]):
        row = table[dy + s, dx : dx + cx.shape[0]]
        line = 0.0
        for t in range(cx.shape[0]):
            line += cx[t] * row[t]
        total += cy[s] * line
    return total


@kernel
def _near(i, j, here, there, tables, cy, cx, out):
    """Write the response (uu, uv, vu, vv) of point i of `here` to point j of `there` into `out`, from the tables."""
    index_u, weight_u, index_v, weight_v = here
    other_u, other_w_u, other_v, other_w_v = there
    _correlate(weight_u[i, 0], other_w_u[j, 0], cy)
    _correlate(weight_u[i, 1], other_w_u[j, 1], cx)
    out[0] = _window(index_u[i], other_u[j], cy, cx, tables[0])
    _correlate(weight_u[i, 0], other_w_v[j, 0], cy)
    _correlate(weight_u[i, 1], other_w_v[j, 1], cx)
    out[1] = _window(index_u[i], other_v[j], cy, cx, tables[2])
    _correlate(weight_v[i, 0], other_w_u[j, 0], cy)
    _correlate(weight_v[i, 1], other_w_u[j, 1], cx)
    out[2] = _window(index_v[i], other_u[j], cy, cx, tables[3])
    _correlate(weight_v[i, 0], other_w_v[j, 0], cy)
    _correlate(weight_v[i, 1], other_w_v[j, 1], cx)
    out[3] = _window(index_v[i], other_v[j], cy, cx, tables[1])


@parallel_kernel
def lattice_product(columns, cells, old_cells, here, there, tables, force, out):
    """Add to `out` the velocities at points due to forces at the old places of some points, but for 1 / h^2.

    Parameters
    ----------
    columns : ndarray of int, shape (m,)
        Points whose forces act.
    cells, old_cells : ndarray, shape (n, 2)
        Positions of the points now and before, in cells.
    here, there : tuple of four ndarrays
        Index and weights on the u grid, index and weights on the v grid; now and before.
    tables : ndarray, shape (4, ry, rx)
        As in `lattice_rows`.
    force : ndarray, shape (n, 2)
        Point forces.
    out : ndarray, shape (n, 2)
        Modified in place.
    """
    for i in prange(out.shape[0]):
        size = 2 * here[1].shape[2] - 1
        cy, cx, response = np.zeros(size), np.zeros(size), np.zeros(4)
        u, v = 0.0, 0.0
        for c in range(columns.shape[0]):
            j = columns[c]
            dx, dy = cells[i, 0] - old_cells[j, 0], cells[i, 1] - old_cells[j, 1]
            if dx * dx + dy * dy > FAR * FAR:
                uu, uv, vv = _far(dx, dy)
                vu = uv
            else:
                _near(i, j, here, there, tables, cy, cx, response)
                uu, uv, vu, vv = response[0], response[1], response[2], response[3]
            u += uu * force[j, 0] + uv * force[j, 1]
            v += vu * force[j, 0] + vv * force[j, 1]
        out[i, 0] += u
        out[i, 1] += v


@parallel_kernel
def lattice_rows(rows, cells, here, scale, tables, out):
    """Fill the two rows of A that belong to each of the given points.

    Parameters
    ----------
    rows : ndarray of int, shape (m,)
        Points whose rows are filled.
    cells : ndarray, shape (n, 2)
        Positions of the points, in cells.
    here : tuple of four ndarrays
        Index, shape (n, 2), and weights, shape (n, 2, width), on the u grid, then on the v grid (`kernels.delta`).
    scale : float
        1 / h^2: the unknowns are point forces.
    tables : ndarray, shape (4, ry, rx)
        Projected response at an offset (row, column), origin in the middle: u to u, v to v, u from v, v from u.
    out : ndarray, shape (2 n, 2 n)
        Entry (2 i + a, 2 j + b): velocity component a at point i per force component b at point j.
        Modified in place.
    """
    for r in prange(rows.shape[0]):
        i = rows[r]
        size = 2 * here[1].shape[2] - 1
        cy, cx, response = np.zeros(size), np.zeros(size), np.zeros(4)
        for j in range(cells.shape[0]):
            dx, dy = cells[i, 0] - cells[j, 0], cells[i, 1] - cells[j, 1]
            if dx * dx + dy * dy > FAR * FAR:
                uu, uv, vv = _far(dx, dy)
                response[0], response[1], response[2], response[3] = uu, uv, uv, vv
            else:
                _near(i, j, here, here, tables, cy, cx, response)
            for a in range(2):
                for b in range(2):
                    out[2 * i + a, 2 * j + b] = response[2 * a + b] * scale
