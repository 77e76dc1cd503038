"""Momentum balance over a control volume around the bodies: a force that does not use the Lagrangian forces.

The volume is a rectangle of whole momentum cells in the uniform core. Over a step from t^n to t^(n+1) the bodies
give the fluid the force

    Q = (M^(n+1) - M^n)/dt + (S^n + S^(n+1))/2 + S_p - V dU/dt

with M the momentum inside, S the flux of momentum and viscous stress out through the faces at one instant, S_p the
pressure's part (the projection makes p a mean over the step), and V the volume, on which the frame's acceleration acts.
"""

from __future__ import annotations

import numpy as np

from ibsolver.grid.staggered import StaggeredGrid


class ControlVolume:
    """Rectangle of cells [i0, i1) x [j0, j1), interior indices, inside the core."""

    def __init__(self, grid: StaggeredGrid, nu: float, margin: int = 2):
        i0, j0 = (index + margin for index in grid.core_index())
        h = grid.spacing
        i1 = i0 + max(2, round((grid.core[1] - grid.core[0]) / h) - 2 * margin)
        j1 = j0 + max(2, round((grid.core[3] - grid.core[2]) / h) - 2 * margin)
        self._h, self._nu = h, nu
        # Padded indices. u-cells: faces i0 + 1 .. i1 - 1 are inside; v-cells likewise.
        self._i, self._j = (i0 + 1, i1 + 1), (j0 + 1, j1 + 1)
        self.area_u = (i1 - i0 - 1) * (j1 - j0) * h * h
        self.area_v = (i1 - i0) * (j1 - j0 - 1) * h * h

    def momentum(self, u: np.ndarray, v: np.ndarray) -> np.ndarray:
        """Return the momentum (x, y) inside, shape (2,)."""
        (i0, i1), (j0, j1) = self._i, self._j
        cell = self._h * self._h
        return np.array([u[j0:j1, i0 + 1 : i1].sum() * cell, v[j0 + 1 : j1, i0:i1].sum() * cell])

    def flux(self, u: np.ndarray, v: np.ndarray) -> np.ndarray:
        """Return the outflow of momentum (x, y) by convection and viscous stress, shape (2,)."""
        return np.array([self._flux_x(u, v), self._flux_y(u, v)])

    def _flux_x(self, u: np.ndarray, v: np.ndarray) -> float:
        (i0, i1), (j0, j1) = self._i, self._j
        h, nu, rows, columns = self._h, self._nu, slice(j0, j1), slice(i0 + 1, i1)
        total = 0.0
        for sign, i in ((1.0, i1 - 1), (-1.0, i0)):  # cell centres right and left
            mean = 0.5 * (u[rows, i] + u[rows, i + 1])
            total += sign * h * float((mean * mean - nu * (u[rows, i + 1] - u[rows, i]) / h).sum())
        for sign, j in ((1.0, j1), (-1.0, j0)):  # corners above and below
            across = 0.5 * (v[j, i0 : i1 - 1] + v[j, i0 + 1 : i1])
            mean = 0.5 * (u[j - 1, columns] + u[j, columns])
            total += sign * h * float((across * mean - nu * (u[j, columns] - u[j - 1, columns]) / h).sum())
        return total

    def _flux_y(self, u: np.ndarray, v: np.ndarray) -> float:
        (i0, i1), (j0, j1) = self._i, self._j
        h, nu, rows, columns = self._h, self._nu, slice(j0 + 1, j1), slice(i0, i1)
        total = 0.0
        for sign, j in ((1.0, j1 - 1), (-1.0, j0)):  # cell centres above and below
            mean = 0.5 * (v[j, columns] + v[j + 1, columns])
            total += sign * h * float((mean * mean - nu * (v[j + 1, columns] - v[j, columns]) / h).sum())
        for sign, i in ((1.0, i1), (-1.0, i0)):  # corners right and left
            along = 0.5 * (u[j0 : j1 - 1, i] + u[j0 + 1 : j1, i])
            mean = 0.5 * (v[rows, i - 1] + v[rows, i])
            total += sign * h * float((along * mean - nu * (v[rows, i] - v[rows, i - 1]) / h).sum())
        return total

    def pressure(self, p: np.ndarray) -> np.ndarray:
        """Return the pressure's push (x, y) out through the faces, shape (2,)."""
        (i0, i1), (j0, j1) = self._i, self._j
        along = p[j0:j1, i1 - 1].sum() - p[j0:j1, i0].sum()
        across = p[j1 - 1, i0:i1].sum() - p[j0, i0:i1].sum()
        return self._h * np.array([along, across])

    def snapshot(self, u: np.ndarray, v: np.ndarray) -> np.ndarray:
        """Return momentum and flux at one instant, shape (2, 2): rows momentum, flux."""
        return np.array([self.momentum(u, v), self.flux(u, v)])

    def force_on_fluid(
        self, before: np.ndarray, after: np.ndarray, p: np.ndarray, dt: float, acceleration: float
    ) -> np.ndarray:
        """Return the mean force (x, y) of the bodies on the fluid over a step, shape (2,).

        Parameters
        ----------
        before, after : ndarray, shape (2, 2)
            Snapshots at both ends of the step.
        p : ndarray
            Pressure of the step.
        dt, acceleration : float
            Length of the step and mean acceleration of the frame along x.
        """
        force = (after[0] - before[0]) / dt + 0.5 * (before[1] + after[1]) + self.pressure(p)
        force[0] -= self.area_u * acceleration
        return force
