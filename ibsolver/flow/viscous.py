"""Crank-Nicolson increment of the predicted velocity, where explicit diffusion would limit the step."""

from __future__ import annotations

import numpy as np

from ibsolver.flow.boundary import BoundaryConditions, SideCondition
from ibsolver.kernels import viscous


class ImplicitDiffusion:
    """Turns explicit increments u* - u^n into Crank-Nicolson ones (see `ibsolver.kernels.viscous`).

    Not for periodic sides, whose lines are cyclic; `ibsolver.flow.timestep` keeps those explicit.
    """

    def __init__(self, sides: BoundaryConditions, nu: float):
        grid = sides.grid
        self._sides, self._nu = sides, nu
        dx, dy, dxc, dyc = grid.dx, grid.dy, grid.dx_centres, grid.dy_centres
        weights = viscous.neighbour_weights
        self._u_x = weights(dxc[2:-2], dx[1:-2], dx[2:-1])
        self._u_y = weights(dy[1:-1], dyc[1:-2], dyc[2:-1])
        self._v_x = weights(dx[1:-1], dxc[1:-2], dxc[2:-1])
        self._v_y = weights(dyc[2:-2], dy[1:-2], dy[2:-1])

    def apply(
        self,
        u: np.ndarray,
        v: np.ndarray,
        u_star: np.ndarray,
        v_star: np.ndarray,
        speeds: tuple[float, float],
        dt: float,
    ) -> None:
        """Replace the explicit increment inside `u_star` and `v_star` by the implicit one. Modified in place.

        Parameters
        ----------
        u, v : ndarray
            Velocity at the start of the step.
        u_star, v_star : ndarray
            Predicted velocity whose boundary faces are already set.
        speeds : tuple of float
            Tow speed at the start and at the end of the step, for walls that follow it.
        dt : float
            Time step.
        """
        c = 0.5 * self._nu * dt
        nx, ny = self._sides.grid.nx, self._sides.grid.ny
        s = self._sides
        du, dv = u_star - u, v_star - v
        inner = du[1 : ny + 1, 2 : nx + 1]
        inner[:, 0] += c * self._u_x[0, 0] * du[1 : ny + 1, 1]
        inner[:, -1] += c * self._u_x[1, -1] * du[1 : ny + 1, nx + 1]
        inner[0] += c * self._u_y[0, 0] * _wall_increment(s.bottom, speeds)
        inner[-1] += c * self._u_y[1, -1] * _wall_increment(s.top, speeds)
        viscous.solve_rows(self._factors(self._u_x, c, 0.0, 0.0), 1, ny + 1, 2, du)
        mirrors = _mirror(s.bottom), _mirror(s.top)
        viscous.solve_columns(self._factors(self._u_y, c, *mirrors), 1, 2, nx + 1, du)
        u_star[1 : ny + 1, 2 : nx + 1] = u[1 : ny + 1, 2 : nx + 1] + du[1 : ny + 1, 2 : nx + 1]

        inner = dv[2 : ny + 1, 1 : nx + 1]
        inner[:, 0] += c * self._v_x[0, 0] * _wall_increment(s.left, speeds)
        inner[:, -1] += c * self._v_x[1, -1] * _wall_increment(s.right, speeds)
        mirrors = _mirror(s.left), _mirror(s.right)
        viscous.solve_rows(self._factors(self._v_x, c, *mirrors), 2, ny + 1, 1, dv)
        viscous.solve_columns(self._factors(self._v_y, c, 0.0, 0.0), 2, 1, nx + 1, dv)
        v_star[2 : ny + 1, 1 : nx + 1] = v[2 : ny + 1, 1 : nx + 1] + dv[2 : ny + 1, 1 : nx + 1]

    @staticmethod
    def _factors(weights: np.ndarray, c: float, first_mirror: float, last_mirror: float) -> np.ndarray:
        out = np.zeros((3, weights.shape[1]))
        viscous.line_factors(weights[0], weights[1], c, first_mirror, last_mirror, out)
        return out


def _mirror(side: SideCondition) -> float:
    """Return the increment's ghost in units of its neighbour: -1 at a fixed tangential velocity, 1 at none."""
    return -1.0 if side.kind in ("no slip", "inflow") else 1.0


def _wall_increment(side: SideCondition, speeds: tuple[float, float]) -> float:
    """Return the known part of the ghost's increment at a wall whose speed changes."""
    if side.kind != "no slip":
        return 0.0
    return 2.0 * (side.wall_speed(speeds[1]) - side.wall_speed(speeds[0]))
