"""Rows of the coupling matrix E P H from the free-space lattice Green's function.

P = I - G L^-1 D on an unbounded uniform lattice acts by convolution, so an entry needs only the correlation of two
points' weights with a small window of a table of second differences of Lambda (`ibsolver.flow.lattice`).
"""

from __future__ import annotations

import numpy as np

from ibsolver.kernels._jit import parallel_kernel, prange


@parallel_kernel
def lattice_rows(rows, index_u, weight_u, index_v, weight_v, scale, tables, out):
    """Fill the two rows of A that belong to each of the given points.

    Parameters
    ----------
    rows : ndarray of int, shape (m,)
        Points whose rows are filled.
    index_u, index_v : ndarray of int, shape (n, 2)
        Padded (row, column) of each point's stencil on the u and v grids.
    weight_u, weight_v : ndarray, shape (n, 2, 4)
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
    mid_y, mid_x = tables.shape[1] // 2, tables.shape[2] // 2
    for r in prange(rows.shape[0]):
        i = rows[r]
        cy = np.zeros(7)
        cx = np.zeros(7)
        for j in range(n):
            for a in range(2):
                for b in range(2):
                    wi = weight_u[i] if a == 0 else weight_v[i]
                    wj = weight_u[j] if b == 0 else weight_v[j]
                    ii = index_u[i] if a == 0 else index_v[i]
                    jj = index_u[j] if b == 0 else index_v[j]
                    cy[:] = 0.0
                    cx[:] = 0.0
                    for s in range(4):
                        for t in range(4):
                            cy[3 + s - t] += wi[0, s] * wj[0, t]
                            cx[3 + s - t] += wi[1, s] * wj[1, t]
                    which = a if a == b else 2 + a
                    dy = mid_y + ii[0] - jj[0] - 3
                    dx = mid_x + ii[1] - jj[1] - 3
                    total = 0.0
                    for s in range(7):
                        line = 0.0
                        for t in range(7):
                            line += cx[t] * tables[which, dy + s, dx + t]
                        total += cy[s] * line
                    out[2 * i + a, 2 * j + b] = total * scale
