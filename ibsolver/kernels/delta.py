"""Regularised delta functions: interpolate velocity to points, spread point forces to the grid.

A stencil holds, for each point, the padded index of its lowest grid value and the one-dimensional weights in x
and y, separately for the u and the v positions. Weights of every kernel here sum to one and have the right first
moment, so force and torque pass exactly between points and grid.
"""

from __future__ import annotations

import math

from ibsolver.kernels._jit import kernel

ROMA = 0  # Roma, Peskin & Berger 1999, J. Comput. Phys. 153, 509, eq. 22: three points
HAT = 1  # bilinear: two points
QUADRATIC, CUBIC, QUINTIC = 2, 3, 5  # B-splines (Schoenberg 1946): three, four and six points

WIDTHS = {ROMA: 3, HAT: 3, QUADRATIC: 3, CUBIC: 4, QUINTIC: 6}  # grid values a kernel touches in each direction


@kernel
def weights(kind, position, out):
    """Fill the weights of a point and return the lowest grid index they belong to.

    Parameters
    ----------
    kind : int
        One of the constants above.
    position : float
        Position in cells, 0 at grid value 0.
    out : ndarray, shape (WIDTHS[kind],)
        Modified in place.
    """
    if kind == CUBIC or kind == QUINTIC:
        cell = math.floor(position)
        _spline(kind, position - cell, out)
        return int(cell) - (1 if kind == CUBIC else 2)
    middle = math.floor(position + 0.5)
    r = position - middle
    if kind == ROMA:
        near = math.sqrt(1.0 - 3.0 * r * r)
        out[0] = (2.0 - near - 3.0 * r) / 6.0
        out[1] = (1.0 + near) / 3.0
        out[2] = (2.0 - near + 3.0 * r) / 6.0
    elif kind == QUADRATIC:
        out[0] = 0.5 * (0.5 - r) ** 2
        out[1] = 0.75 - r * r
        out[2] = 0.5 * (0.5 + r) ** 2
    else:
        out[0] = max(0.0, -r)
        out[1] = 1.0 - abs(r)
        out[2] = max(0.0, r)
    return int(middle) - 1


@kernel
def _spline(degree, r, out):
    """Fill the degree + 1 values of the B-spline at offset r (0 .. 1) by the recursion of Cox and de Boor."""
    out[:] = 0.0
    out[0] = 1.0
    for k in range(1, degree + 1):
        previous = 0.0
        for i in range(k + 1):
            here = out[i] if i < k else 0.0
            out[i] = ((r + k - i) * previous + (1.0 - r + i) * here) / k
            previous = here


@kernel
def locate(kind, points, x0, y0, spacing, index, weight):
    """Place the stencils of all points on one family of grid values (u or v).

    Parameters
    ----------
    kind : int
        Kernel, one of the constants above.
    points : ndarray, shape (n, 2)
        Positions (chords).
    x0, y0 : float
        Position of the padded index (0, 0), as continued with the core's spacing.
    spacing : float
        Core cell width.
    index : ndarray of int, shape (n, 2)
        Padded (row, column) of the lowest value. Modified in place.
    weight : ndarray, shape (n, 2, width)
        Weights along y and along x. Modified in place.
    """
    for k in range(points.shape[0]):
        for axis in range(2):
            position = (points[k, 1] - y0) / spacing if axis == 0 else (points[k, 0] - x0) / spacing
            index[k, axis] = weights(kind, position, weight[k, axis])


@kernel
def interpolate(field, index, weight, column, out):
    """Write the field at every point into ``out[:, column]``."""
    for k in range(index.shape[0]):
        j0, i0 = index[k, 0], index[k, 1]
        total = 0.0
        for a in range(weight.shape[2]):
            row = 0.0
            for b in range(weight.shape[2]):
                row += weight[k, 1, b] * field[j0 + a, i0 + b]
            total += weight[k, 0, a] * row
        out[k, column] = total


@kernel
def spread(force, column, scale, index, weight, field):
    """Add ``scale force[k, column]`` of every point to the field. Modified in place."""
    for k in range(index.shape[0]):
        j0, i0 = index[k, 0], index[k, 1]
        amount = scale * force[k, column]
        for a in range(weight.shape[2]):
            share = amount * weight[k, 0, a]
            for b in range(weight.shape[2]):
                field[j0 + a, i0 + b] += share * weight[k, 1, b]
