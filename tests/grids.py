"""Little odd grids that show swapped axes, and a solver of everything around a step for tests."""

from __future__ import annotations

import numpy as np

from ibsolver.grid.staggered import StaggeredGrid
from ibsolver.grid.stretching import stretched_faces, uniform_faces


def odd_grid(nx: int, ny: int, periodic_x: bool = False, periodic_y: bool = False, seed: int = 1) -> StaggeredGrid:
    """Return a grid of randomly uneven cells (even ones along a periodic axis)."""
    rng = np.random.default_rng(seed)

    def faces(count: int, periodic: bool) -> np.ndarray:
        widths = np.full(count, 1.0 / count) if periodic else rng.uniform(0.5, 1.5, count) / count
        return np.concatenate([[0.0], np.cumsum(widths)])

    x, y = faces(nx, periodic_x), faces(ny, periodic_y)
    return StaggeredGrid(x, y, (x[0], x[-1], y[0], y[-1]), 1.0 / nx, periodic_x, periodic_y)


def stretched_grid(cells: int = 16, half_height: float = 4.0, low: float | None = None) -> StaggeredGrid:
    """Return a stretched grid with a uniform core of 2 x 1 chords; `low` makes it unsymmetric in y."""
    h = 1.0 / cells
    x = stretched_faces(-3.0, -1.0, 1.0, 5.0, h, 1.06, 0.5)
    y = stretched_faces(-half_height if low is None else low, -0.5, 0.5, half_height, h, 1.06, 0.5)
    return StaggeredGrid(x, y, (-1.0, 1.0, -0.5, 0.5), h)


def uniform_grid(nx: int, ny: int, periodic_x: bool = False, periodic_y: bool = False) -> StaggeredGrid:
    """Return a uniform grid on the unit square."""
    x, y = uniform_faces(0, 1, 1 / nx), uniform_faces(0, 1, 1 / ny)
    return StaggeredGrid(x, y, (0.0, 1.0, 0.0, 1.0), 1 / nx, periodic_x, periodic_y)


def random_fields(grid: StaggeredGrid, seed: int = 3) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return random u, v, p with ghosts."""
    rng = np.random.default_rng(seed)
    ny, nx = grid.ny, grid.nx
    return (
        rng.standard_normal((ny + 2, nx + 3)),
        rng.standard_normal((ny + 3, nx + 2)),
        rng.standard_normal((ny + 2, nx + 2)),
    )


def plain(kernel):
    """Return a kernel's uncompiled function (the kernel itself where the compiler is off)."""
    return getattr(kernel, "py_func", kernel)
