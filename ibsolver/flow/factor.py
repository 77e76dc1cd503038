"""Factors of the coupling matrix: whole, or with the resting points eliminated once and for all.

Where only a flap moves, most of the matrix never changes. With R its resting block and M the moving one,

    [R  C] [x]   [a]          S = M - C^T R^-1 C,   y = S^-1 (b - C^T R^-1 a),   x = R^-1 a - (R^-1 C) y,
    [C' M] [y] = [b]

so a step factors only the small S (Schur complement).
"""

from __future__ import annotations

import numpy as np
from scipy.linalg import cho_factor, cho_solve

SHIFT = 1e-9  # of the mean diagonal: makes the null force of a closed curve (constant normal force) definite


class CouplingFactor:
    """Cholesky factor of a coupling matrix that may change in some rows and columns.

    Parameters
    ----------
    matrix : ndarray, shape (k, k)
        Symmetric positive semi-definite.
    added : ndarray, shape (k,)
        Added to the diagonal (compliances).
    changing : ndarray of int, shape (m,)
        Rows and columns that will change; the others are factored here once.
    """

    def __init__(self, matrix: np.ndarray, added: np.ndarray, changing: np.ndarray):
        size = matrix.shape[0]
        self._changing = changing
        self._resting = np.setdiff1d(np.arange(size), changing)
        self._shift = SHIFT * float(np.diag(matrix).mean())
        block = matrix[np.ix_(self._resting, self._resting)]
        block[np.diag_indices_from(block)] += added[self._resting] + self._shift
        self._rest = _cholesky(block)
        self.update(matrix, added)

    def update(self, matrix: np.ndarray, added: np.ndarray) -> None:
        """Take in new rows and columns of what changes; the rest of matrix and diagonal must be as before."""
        moving = self._changing
        self._cross = matrix[np.ix_(self._resting, moving)]
        self._reach = _solve(self._rest, self._cross)
        block = matrix[np.ix_(moving, moving)] - self._cross.T @ self._reach
        block[np.diag_indices_from(block)] += added[moving] + self._shift
        self._small = _cholesky(block)

    def solve(self, right: np.ndarray) -> np.ndarray:
        """Return the solution for one right-hand side, shape (k,), or several, shape (k, columns)."""
        out = np.empty_like(right)
        rest = _solve(self._rest, right[self._resting])
        moving = _solve(self._small, right[self._changing] - self._cross.T @ rest)
        out[self._changing] = moving
        out[self._resting] = rest - self._reach @ moving
        return out


def _cholesky(block: np.ndarray) -> tuple[np.ndarray, bool] | None:
    return cho_factor(block, lower=True, overwrite_a=True, check_finite=False) if block.size else None


def _solve(factor: tuple[np.ndarray, bool] | None, right: np.ndarray) -> np.ndarray:
    return right.copy() if factor is None else cho_solve(factor, right, check_finite=False)
