"""Finite-volume formulas written cell by cell with dictionaries of widths, no ghosts reused, no precomputed metrics."""

from __future__ import annotations

import numpy as np


def u_tendency(u, v, dx, dy, nu, j, i):
    """Return -div(u u) + nu lap u at one u face, from fluxes through the four sides of its momentum cell.

    `u`, `v`, `dx`, `dy` carry ghosts; (j, i) is the padded index.
    """
    width, height = 0.5 * (dx[i - 1] + dx[i]), dy[j]
    right = 0.5 * (u[j, i] + u[j, i + 1])
    left = 0.5 * (u[j, i] + u[j, i - 1])
    mass_top = 0.5 * (v[j + 1, i - 1] * dx[i - 1] + v[j + 1, i] * dx[i])
    mass_bottom = 0.5 * (v[j, i - 1] * dx[i - 1] + v[j, i] * dx[i])
    convection = height * (right**2 - left**2)
    convection += mass_top * 0.5 * (u[j, i] + u[j + 1, i]) - mass_bottom * 0.5 * (u[j, i] + u[j - 1, i])
    stress_right = nu * (u[j, i + 1] - u[j, i]) / dx[i]
    stress_left = nu * (u[j, i] - u[j, i - 1]) / dx[i - 1]
    stress_top = nu * (u[j + 1, i] - u[j, i]) / (0.5 * (dy[j] + dy[j + 1]))
    stress_bottom = nu * (u[j, i] - u[j - 1, i]) / (0.5 * (dy[j] + dy[j - 1]))
    diffusion = height * (stress_right - stress_left) + width * (stress_top - stress_bottom)
    return (diffusion - convection) / (width * height)


def v_tendency(u, v, dx, dy, nu, j, i):
    """Return the same for v, by exchanging the axes."""
    return u_tendency(v.T, u.T, dy, dx, nu, i, j)


def predict(u, v, p, grid, nu, dt, a, b, pull, ranges, old_u, old_v):
    """Return u*, v* and the new tendencies of the explicit step, by plain loops."""
    u_star, v_star, new_u, new_v = u.copy(), v.copy(), old_u.copy(), old_v.copy()
    dx, dy = grid.dx, grid.dy
    for j in range(ranges[0], ranges[1]):
        for i in range(ranges[2], ranges[3]):
            new_u[j, i] = u_tendency(u, v, dx, dy, nu, j, i)
            slope = (p[j, i] - p[j, i - 1]) / (0.5 * (dx[i] + dx[i - 1]))
            u_star[j, i] += dt * (a * new_u[j, i] - b * old_u[j, i] - slope + pull[0])
    for j in range(ranges[4], ranges[5]):
        for i in range(ranges[6], ranges[7]):
            new_v[j, i] = v_tendency(u, v, dx, dy, nu, j, i)
            slope = (p[j, i] - p[j - 1, i]) / (0.5 * (dy[j] + dy[j - 1]))
            v_star[j, i] += dt * (a * new_v[j, i] - b * old_v[j, i] - slope + pull[1])
    return u_star, v_star, new_u, new_v


def divergence(u, v, grid):
    """Return div u of every cell, shape (ny, nx)."""
    out = np.empty((grid.ny, grid.nx))
    for j in range(grid.ny):
        for i in range(grid.nx):
            out[j, i] = (u[j + 1, i + 2] - u[j + 1, i + 1]) / (grid.x_faces[i + 1] - grid.x_faces[i])
            out[j, i] += (v[j + 2, i + 1] - v[j + 1, i + 1]) / (grid.y_faces[j + 1] - grid.y_faces[j])
    return out


def laplacian_matrix(grid):
    """Return D G as a dense matrix on cells, Neumann or periodic, row-major numbering."""
    nx, ny = grid.nx, grid.ny
    matrix = np.zeros((nx * ny, nx * ny))

    def couple(a, b, width, distance):
        matrix[a, b] += 1.0 / (width * distance)
        matrix[a, a] -= 1.0 / (width * distance)

    dx, dy = np.diff(grid.x_faces), np.diff(grid.y_faces)
    for j in range(ny):
        for i in range(nx):
            me = j * nx + i
            for step in (-1, 1):
                k = i + step
                if 0 <= k < nx or grid.periodic_x:
                    couple(me, j * nx + k % nx, dx[i], 0.5 * (dx[i] + dx[k % nx]))
                k = j + step
                if 0 <= k < ny or grid.periodic_y:
                    couple(me, (k % ny) * nx + i, dy[j], 0.5 * (dy[j] + dy[k % ny]))
    return matrix
