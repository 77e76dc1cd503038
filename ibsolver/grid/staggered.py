"""The staggered grid and its array conventions.

A cell (j, i) holds p in its centre, u on its left face i and right face i + 1, v on its lower face j and upper
face j + 1. Arrays are indexed ``[y, x]``, x contiguous, and carry one ghost layer on every side:

===== ================== ==========================================================
array shape              interior value (j, i) is at
===== ================== ==========================================================
u     (ny + 2, nx + 3)   ``u[j + 1, i + 1]``, j = 0 .. ny - 1, faces i = 0 .. nx
v     (ny + 3, nx + 2)   ``v[j + 1, i + 1]``, faces j = 0 .. ny, i = 0 .. nx - 1
p     (ny + 2, nx + 2)   ``p[j + 1, i + 1]``, j = 0 .. ny - 1, i = 0 .. nx - 1
===== ================== ==========================================================

With periodic sides face nx is face 0 again and both are stored.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ibsolver.errors import IbsolverError


class GridError(IbsolverError):
    """The grid cannot hold what is asked of it."""

    exit_status = 3


def _frozen(array: np.ndarray) -> np.ndarray:
    array = np.ascontiguousarray(array, dtype=float)
    array.flags.writeable = False
    return array


@dataclass(frozen=True, eq=False)
class StaggeredGrid:
    """Rectilinear staggered grid.

    Parameters
    ----------
    x_faces : ndarray, shape (nx + 1,)
        Face positions along the stream (chords).
    y_faces : ndarray, shape (ny + 1,)
        Face positions across the stream (chords).
    core : tuple of float
        (x low, x high, y low, y high) of the uniform part (chords).
    spacing : float
        Cell width in the core (chords).
    periodic_x, periodic_y : bool
        Whether opposite sides are joined.
    """

    x_faces: np.ndarray
    y_faces: np.ndarray
    core: tuple[float, float, float, float]
    spacing: float
    periodic_x: bool = False
    periodic_y: bool = False

    def __post_init__(self) -> None:
        for name in ("x_faces", "y_faces"):
            faces = _frozen(getattr(self, name))
            if faces.ndim != 1 or faces.size < 4 or not np.all(np.diff(faces) > 0):
                raise GridError(f"{name}: at least 4 increasing face positions are needed.")
            object.__setattr__(self, name, faces)

    @property
    def nx(self) -> int:
        """Number of cells along the stream."""
        return self.x_faces.size - 1

    @property
    def ny(self) -> int:
        """Number of cells across the stream."""
        return self.y_faces.size - 1

    @property
    def cells(self) -> int:
        """Number of cells."""
        return self.nx * self.ny

    @cached_property
    def dx(self) -> np.ndarray:
        """Cell widths with ghosts, shape (nx + 2,): ``dx[i + 1]`` belongs to cell i."""
        return _frozen(_with_ghosts(np.diff(self.x_faces), self.periodic_x))

    @cached_property
    def dy(self) -> np.ndarray:
        """Cell heights with ghosts, shape (ny + 2,): ``dy[j + 1]`` belongs to cell j."""
        return _frozen(_with_ghosts(np.diff(self.y_faces), self.periodic_y))

    @cached_property
    def dx_centres(self) -> np.ndarray:
        """Distances between cell centres, shape (nx + 3,): ``[i + 1]`` belongs to face i (0 .. nx)."""
        return _frozen(_centre_distances(self.dx))

    @cached_property
    def dy_centres(self) -> np.ndarray:
        """Distances between cell centres, shape (ny + 3,): ``[j + 1]`` belongs to face j (0 .. ny)."""
        return _frozen(_centre_distances(self.dy))

    @cached_property
    def x_metrics(self) -> np.ndarray:
        """Widths for the kernels, shape (4, nx + 3): dx, 1/dx (last entry unused), dx_centres, 1/dx_centres."""
        return _frozen(_metrics(self.dx, self.dx_centres))

    @cached_property
    def y_metrics(self) -> np.ndarray:
        """Heights for the kernels, shape (4, ny + 3): dy, 1/dy (last entry unused), dy_centres, 1/dy_centres."""
        return _frozen(_metrics(self.dy, self.dy_centres))

    @cached_property
    def x_centres(self) -> np.ndarray:
        """Cell centres along the stream, shape (nx,)."""
        return _frozen(0.5 * (self.x_faces[1:] + self.x_faces[:-1]))

    @cached_property
    def y_centres(self) -> np.ndarray:
        """Cell centres across the stream, shape (ny,)."""
        return _frozen(0.5 * (self.y_faces[1:] + self.y_faces[:-1]))

    @cached_property
    def area(self) -> float:
        """Area of the domain (square chords)."""
        return float((self.x_faces[-1] - self.x_faces[0]) * (self.y_faces[-1] - self.y_faces[0]))

    def core_index(self) -> tuple[int, int]:
        """Return (i, j) of the first face of the core along x and along y."""
        return (
            int(np.argmin(np.abs(self.x_faces - self.core[0]))),
            int(np.argmin(np.abs(self.y_faces - self.core[2]))),
        )


def _with_ghosts(widths: np.ndarray, periodic: bool) -> np.ndarray:
    """Return the widths with one ghost at each end: mirrored at a boundary, wrapped around where periodic."""
    first, last = (widths[-1], widths[0]) if periodic else (widths[0], widths[-1])
    return np.concatenate([[first], widths, [last]])


def _centre_distances(widths_with_ghosts: np.ndarray) -> np.ndarray:
    """Return distances between neighbouring centres, padded at both ends to a face array with ghosts."""
    inner = 0.5 * (widths_with_ghosts[1:] + widths_with_ghosts[:-1])
    return np.concatenate([[inner[0]], inner, [inner[-1]]])


def _metrics(widths: np.ndarray, centre_distances: np.ndarray) -> np.ndarray:
    """Return widths, centre distances and their inverses in one array, so that a kernel takes one argument."""
    padded = np.append(widths, widths[-1])
    return np.array([padded, 1.0 / padded, centre_distances, 1.0 / centre_distances])
