"""Direct solver of the discrete Poisson equation ``D G phi = f``, all sides Neumann or periodic.

One axis is diagonalised, the other is swept by a tridiagonal solver (Lynch, Rice & Thomas 1964, Numer. Math. 6, 185).
Where the diagonalised axis is uniform the transform is a cosine or Fourier transform; where it is stretched it is a
dense product with the eigenvectors of the symmetrised operator, halved by parity where the stretch is symmetric.
The axis is chosen by cost. The constant mode is fixed by a zero mean.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.fft
from scipy.linalg import eigh_tridiagonal

from ibsolver.grid.staggered import StaggeredGrid
from ibsolver.kernels import dense_transform, tridiagonal
from ibsolver.kernels._jit import available_cores

BLOCKS = 8  # fixed: see kernels.dense_transform


@dataclass(frozen=True, eq=False)
class Axis:
    """One axis of the grid: cell widths, distances between centres at the inner faces, and whether it is periodic."""

    widths: np.ndarray
    periodic: bool

    @property
    def size(self) -> int:
        """Number of cells."""
        return self.widths.size

    @property
    def uniform(self) -> bool:
        """Whether all cells are equally wide."""
        return bool(np.ptp(self.widths) <= 1e-10 * self.widths[0])

    @property
    def symmetric(self) -> bool:
        """Whether the cell widths read the same from both ends."""
        return bool(np.max(np.abs(self.widths - self.widths[::-1]) / self.widths) < 1e-9)

    def bands(self) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Return lower, diagonal and upper band of the one-dimensional operator with Neumann ends."""
        conductance = 2.0 / (self.widths[1:] + self.widths[:-1])
        lower = np.append(0.0, conductance) / self.widths
        upper = np.append(conductance, 0.0) / self.widths
        return lower, -(lower + upper), upper

    def cost(self) -> float:
        """Return a rough cost of diagonalising this axis, in ns a cell on two cores."""
        if self.uniform:
            return 8.0
        if self.periodic:
            return np.inf  # no fast transform and no tridiagonal form: handled as a dense transform of both axes
        return 0.08 * self.size * (0.5 if self.symmetric else 1.0)


class FastTransform:
    """Cosine (Neumann) or Fourier (periodic) transform of a uniform axis."""

    def __init__(self, axis: Axis, swept_size: int):
        n, h = axis.size, axis.widths[0]
        self.periodic = axis.periodic
        self.size = n
        self.workers = available_cores()
        if axis.periodic:
            wave = np.repeat(np.arange(n // 2 + 1), 2)
            self.eigenvalues = -((2.0 / h * np.sin(np.pi * wave / n)) ** 2)
        else:
            self.eigenvalues = -((2.0 / h * np.sin(0.5 * np.pi * np.arange(n) / n)) ** 2)

    def forward(self, f: np.ndarray) -> np.ndarray:
        """Return modes [s, k] of the field f[t, s]."""
        rows = np.ascontiguousarray(f.T)
        if self.periodic:
            return scipy.fft.rfft(rows, axis=1, workers=self.workers).view(np.float64)
        return scipy.fft.dct(rows, type=2, axis=1, norm="ortho", workers=self.workers)

    def backward(self, modes: np.ndarray, out: np.ndarray) -> None:
        """Write the field of the modes into ``out[t, s]``."""
        if self.periodic:
            rows = scipy.fft.irfft(modes.view(np.complex128), n=self.size, axis=1, workers=self.workers)
        else:
            rows = scipy.fft.idct(modes, type=2, axis=1, norm="ortho", workers=self.workers, overwrite_x=True)
        out[...] = rows.T


class DenseTransform:
    """Product with the eigenvectors of a stretched Neumann axis."""

    def __init__(self, axis: Axis, swept_size: int):
        lower, diagonal, upper = axis.bands()
        coupling = np.sqrt(lower[1:] * upper[:-1])
        self.split = 1 if axis.symmetric and axis.size > 3 else 0
        families = _parity_families(diagonal, coupling) if self.split else [(diagonal, coupling, None)]
        self.eigenvalues = np.zeros(0)
        root = np.sqrt(axis.widths)
        self.forward_matrices, self.backward_matrices = [], []
        for family_diagonal, family_coupling, amplitude in families:
            values, vectors = eigh_tridiagonal(family_diagonal, family_coupling)
            order = np.argsort(-values)
            values, vectors = values[order], vectors[:, order]
            if amplitude is not None:
                vectors = vectors * amplitude[:, None]
            half_root = root[: vectors.shape[0], None]
            self.forward_matrices.append(np.ascontiguousarray(vectors * half_root))
            self.backward_matrices.append(np.ascontiguousarray(vectors / half_root))
            self.eigenvalues = np.append(self.eigenvalues, values)
        if len(families) == 1:
            self.forward_matrices.append(np.zeros((0, 0)))
            self.backward_matrices.append(np.zeros((0, 0)))
        self.eigenvalues[0] = 0.0
        width = -(-swept_size // BLOCKS)
        self._parts = [np.zeros((BLOCKS, m.shape[0], width)) for m in self.forward_matrices]
        self._modes = [np.zeros((BLOCKS * width, m.shape[1])) for m in self.forward_matrices]
        self.families = [modes[:swept_size] for modes in self._modes if modes.size]

    def forward(self, f: np.ndarray) -> list[np.ndarray]:
        """Return the mode families [s, k] of the field f[t, s] (views of scratch arrays)."""
        dense_transform.forward(f, self.split, *self.forward_matrices, *self._parts, *self._modes)
        return self.families

    def backward(self, out: np.ndarray) -> None:
        """Write the field of the modes now in the scratch arrays into ``out[t, s]``."""
        dense_transform.backward(*self._modes, self.split, *self.backward_matrices, *self._parts, out)


def _parity_families(diagonal: np.ndarray, coupling: np.ndarray) -> list[tuple[np.ndarray, np.ndarray, np.ndarray]]:
    """Split a symmetric tridiagonal matrix that is symmetric about its middle into even and odd halves.

    Returns
    -------
    list of (diagonal, off-diagonal, amplitude)
        Even family, then odd family; eigenvectors times `amplitude` are the first half of unit full-length ones.
    """
    n = diagonal.size
    h = n // 2
    if n % 2:
        middle = np.append(coupling[: h - 1], np.sqrt(2.0) * coupling[h - 1])
        even = (diagonal[: h + 1].copy(), middle, np.append(np.full(h, np.sqrt(0.5)), 1.0))
        odd = (diagonal[:h].copy(), coupling[: h - 1], np.full(h, np.sqrt(0.5)))
        return [even, odd]
    even_diagonal, odd_diagonal = diagonal[:h].copy(), diagonal[:h].copy()
    even_diagonal[-1] += coupling[h - 1]
    odd_diagonal[-1] -= coupling[h - 1]
    amplitude = np.full(h, np.sqrt(0.5))
    return [(even_diagonal, coupling[: h - 1], amplitude), (odd_diagonal, coupling[: h - 1], amplitude)]


class PoissonSolver:
    """Solves ``div grad phi = f`` on one grid; built once, then called every step.

    Parameters
    ----------
    grid : StaggeredGrid
    axis : {"x", "y", None}
        Axis to diagonalise; None chooses the cheaper one.

    Attributes
    ----------
    plan : str
        What was chosen, for the manifest.
    """

    def __init__(self, grid: StaggeredGrid, axis: str | None = None):
        axes = {
            "y": Axis(np.diff(grid.y_faces), grid.periodic_y),  # first: at equal cost it needs no transposition
            "x": Axis(np.diff(grid.x_faces), grid.periodic_x),
        }
        if axis is None:
            axis = _cheaper_axis(axes)
        other = "y" if axis == "x" else "x"
        transformed, swept = axes[axis], axes[other]
        self.transposed = axis == "x"
        self.area_weights = swept.widths / swept.widths.sum()
        self._fast = transformed.uniform
        self._transform = (FastTransform if self._fast else DenseTransform)(transformed, swept.size)
        self._second = FastTransform(swept, transformed.size) if swept.periodic else None
        kind = "Fourier" if transformed.periodic else "cosine" if self._fast else "dense"
        if not self._fast and self._transform.split:
            kind = "dense, halved by parity"
        sweep = "Fourier" if self._second else "tridiagonal"
        self.plan = f"{kind} transform along {axis}, {sweep} along {other}"
        self._lower, self._diagonal, self._upper = swept.bands()
        self._pivots = [] if self._second else self._factor(swept.size)

    def _factor(self, swept_size: int) -> list[np.ndarray]:
        """Return the pivots of each mode family."""
        values = self._transform.eigenvalues
        sizes = [values.size] if self._fast else [m.shape[1] for m in self._transform.families]
        pivots, first = [], 0
        for size in sizes:
            pivot = np.zeros((swept_size, size))
            shift = np.ascontiguousarray(values[first : first + size])
            tridiagonal.factor(self._lower, self._diagonal, self._upper, shift, 0 if first == 0 else -1, pivot)
            pivots.append(pivot)
            first += size
        return pivots

    def solve(self, f: np.ndarray, phi: np.ndarray) -> None:
        """Write the zero-mean solution for the right-hand side `f` into `phi`.

        Parameters
        ----------
        f : ndarray, shape (ny, nx)
            Right-hand side; its area-weighted sum must vanish to round-off.
        phi : ndarray, shape (ny, nx)
            Modified in place (a view into a padded array is fine).
        """
        source, target = (f.T, phi.T) if self.transposed else (f, phi)
        if self._second:
            self._solve_doubly_periodic(source, target)
        elif self._fast:
            modes = self._transform.forward(source)
            self._sweep(modes, self._pivots[0])
            self._remove_mean(modes)
            self._transform.backward(modes, target)
        else:
            families = self._transform.forward(source)
            for modes, pivots in zip(families, self._pivots, strict=True):
                self._sweep(modes, pivots)
            self._remove_mean(families[0])
            self._transform.backward(target)

    def _sweep(self, modes: np.ndarray, pivots: np.ndarray) -> None:
        tridiagonal.sweep(self._lower, self._upper, pivots, modes)

    def _remove_mean(self, modes: np.ndarray) -> None:
        modes[:, 0] -= self.area_weights @ modes[:, 0]

    def _solve_doubly_periodic(self, source: np.ndarray, target: np.ndarray) -> None:
        """Divide by the sum of both eigenvalues; every axis that is swept here is periodic and uniform."""
        modes = self._transform.forward(source) if self._fast else np.hstack(self._transform.forward(source))
        twice = self._second.forward(modes)
        total = self._transform.eigenvalues[:, None] + self._second.eigenvalues[None, :]
        total[0, :2] = np.inf
        if self._fast and self._transform.periodic:
            total[1, :2] = np.inf  # imaginary part of the constant mode
        twice /= total
        self._second.backward(twice, modes)
        if self._fast:
            self._transform.backward(modes, target)
            return
        first = 0
        for family in self._transform.families:
            family[...] = modes[:, first : first + family.shape[1]]
            first += family.shape[1]
        self._transform.backward(target)


def _cheaper_axis(axes: dict[str, Axis]) -> str:
    """Return the axis to diagonalise; the other is swept, so a lone periodic axis is always diagonalised."""
    if axes["x"].periodic != axes["y"].periodic:
        return "x" if axes["x"].periodic else "y"
    return min(axes, key=lambda name: axes[name].cost())
