"""Regularised delta functions: interpolate velocity to points, spread point forces to the grid.

A stencil holds, for each point, the padded index of its lowest grid value and the one-dimensional weights in x
and y, separately for the u and the v positions. Weights of every kernel here sum to one and have the right first
moment, so force and torque pass exactly between points and grid.
"""

from __future__ import annotations

import math

from ibsolver.kernels._jit import kernel

WIDTH = 4  # grid values reserved for a kernel in each direction; narrower kernels leave the last weight at zero

ROMA = 0  # Roma, Peskin & Berger 1999, J. Comput. Phys. 153, 509, eq. 22: three points
HAT = 1  # bilinear: two points
QUADRATIC = 2  # quadratic B-spline (Schoenberg 1946): three points, continuous slope
CUBIC = 3  # cubic B-spline: four points, continuous curvature


@kernel
def weights(kind, position, out):
    """Fill the weights of a point and return the lowest grid index they belong to.

    Parameters
    ----------
    kind : int
        `ROMA`, `HAT`, `QUADRATIC` or `CUBIC`.
    position : float
        Position in cells, 0 at grid value 0.
    out : ndarray, shape (4,)
        Modified in place.
    """
    if kind == CUBIC:
        cell = math.floor(position)
        r = position - cell
        out[0] = (1.0 - r) ** 3 / 6.0
        out[1] = (4.0 - 6.0 * r * r + 3.0 * r**3) / 6.0
        out[2] = (1.0 + 3.0 * r + 3.0 * r * r - 3.0 * r**3) / 6.0
        out[3] = r**3 / 6.0
        return int(cell) - 1
    middle = math.floor(position + 0.5)
    r = position - middle
    out[3] = 0.0
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
    weight : ndarray, shape (n, 2, 4)
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
        for a in range(WIDTH):
            row = 0.0
            for b in range(WIDTH):
                row += weight[k, 1, b] * field[j0 + a, i0 + b]
            total += weight[k, 0, a] * row
        out[k, column] = total


@kernel
def spread(force, column, scale, index, weight, field):
    """Add ``scale force[k, column]`` of every point to the field. Modified in place."""
    for k in range(index.shape[0]):
        j0, i0 = index[k, 0], index[k, 1]
        amount = scale * force[k, column]
        for a in range(WIDTH):
            share = amount * weight[k, 0, a]
            for b in range(WIDTH):
                field[j0 + a, i0 + b] += share * weight[k, 1, b]
