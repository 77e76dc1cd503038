"""One table of side conditions, used by momentum and Poisson alike.

========== ============================== ============================ =================
condition  normal velocity                tangential velocity          pressure increment
========== ============================== ============================ =================
inflow     tow speed times profile        0 (left, right), U (others)  zero gradient
outflow    convective, mass corrected     zero gradient                zero gradient
slip       0                              zero gradient                zero gradient
no slip    0                              speed + tow_share U(t)       zero gradient
periodic   wrapped                        wrapped                      wrapped
========== ============================== ============================ =================

Inflow is a condition of the left side and outflow of the right side; the others may stand on any side.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ibsolver.grid.staggered import GridError, StaggeredGrid


@dataclass(frozen=True)
class SideCondition:
    """Condition on one side.

    Parameters
    ----------
    kind : {"inflow", "outflow", "slip", "no slip", "periodic"}
    speed : float
        Tangential speed of a no-slip wall (tow speeds), along +x or +y.
    tow_share : float
        Further tangential speed in units of the momentary tow speed: 1 for a tank wall, which stays with the
        water and so slides past the carriage.
    profile : {"uniform", "parabola"}
        Inflow across the height; the parabola has mean U and vanishes at both ends.
    """

    kind: str
    speed: float = 0.0
    tow_share: float = 0.0
    profile: str = "uniform"

    def wall_speed(self, tow_speed: float) -> float:
        """Return the tangential wall speed at a tow speed."""
        return self.speed + self.tow_share * tow_speed


class BoundaryConditions:
    """The four sides of a grid.

    Attributes
    ----------
    ranges : ndarray of int, shape (8,)
        First and last + 1 padded index of the faces that momentum and projection change: u rows, u columns, v
        rows, v columns.
    """

    def __init__(
        self,
        grid: StaggeredGrid,
        left: SideCondition,
        right: SideCondition,
        bottom: SideCondition,
        top: SideCondition,
    ):
        self.grid = grid
        self.left, self.right, self.bottom, self.top = left, right, bottom, top
        self._check()
        nx, ny = grid.nx, grid.ny
        last_u = nx + 2 if grid.periodic_x else nx + 1
        last_v = ny + 2 if grid.periodic_y else ny + 1
        self.ranges = np.array([1, ny + 1, 2, last_u, 2, last_v, 1, nx + 1])
        height = grid.y_faces[-1] - grid.y_faces[0]
        eta = 2.0 * (grid.y_centres - grid.y_faces[0]) / height - 1.0
        self.inflow_profile = 1.5 * (1.0 - eta**2) if left.profile == "parabola" else np.ones(ny)
        self._heights = np.diff(grid.y_faces)
        if left.profile == "parabola":  # exact mean on the grid, so that mass balances at once
            self.inflow_profile *= height / float(self.inflow_profile @ self._heights)

    def _check(self) -> None:
        for first, second, periodic, names in (
            (self.left, self.right, self.grid.periodic_x, "left and right"),
            (self.bottom, self.top, self.grid.periodic_y, "bottom and top"),
        ):
            if (first.kind == "periodic") != (second.kind == "periodic") or (first.kind == "periodic") != periodic:
                raise GridError(f"{names}: periodic sides come in pairs, on a grid made for them.")
        for name in ("left", "right", "bottom", "top"):
            kind = getattr(self, name).kind
            if kind == "inflow" and name != "left" or kind == "outflow" and name != "right":
                raise GridError(f"{name} side: {kind} is not possible here; inflow is left, outflow right.")
        if (self.left.kind == "inflow") != (self.right.kind == "outflow"):
            raise GridError("An inflow on the left needs an outflow on the right, and the other way round.")

    def fill(self, u: np.ndarray, v: np.ndarray, tow_speed: float) -> None:
        """Fill the ghosts of a velocity whose boundary faces are already set. Modified in place."""
        if self.grid.periodic_x:
            u[:, 1] = u[:, -2]
            u[:, 0], u[:, -1] = u[:, -3], u[:, 2]
            v[:, 0], v[:, -1] = v[:, -2], v[:, 1]
        else:
            u[:, 0], u[:, -1] = u[:, 1], u[:, -2]
            _tangential(self.left, tow_speed, v[:, 0], v[:, 1])
            _tangential(self.right, tow_speed, v[:, -1], v[:, -2])
        if self.grid.periodic_y:
            v[1] = v[-2]
            v[0], v[-1] = v[-3], v[2]
            u[0], u[-1] = u[-2], u[1]
        else:
            v[0], v[-1] = v[1], v[-2]
            _tangential(self.bottom, tow_speed, u[0], u[1])
            _tangential(self.top, tow_speed, u[-1], u[-2])

    def fill_scalar(self, p: np.ndarray) -> None:
        """Fill the ghosts of a cell-centred field: wrapped where periodic, zero gradient elsewhere. In place."""
        p[:, 0], p[:, -1] = (p[:, -2], p[:, 1]) if self.grid.periodic_x else (p[:, 1], p[:, -2])
        p[0], p[-1] = (p[-2], p[1]) if self.grid.periodic_y else (p[1], p[-2])

    def set_normal(
        self, u: np.ndarray, u_star: np.ndarray, v_star: np.ndarray, speeds: tuple[float, float], dt: float
    ) -> None:
        """Set the boundary faces of the predicted velocity.

        Parameters
        ----------
        u : ndarray
            Velocity at the start of the step.
        u_star, v_star : ndarray
            Modified in place, on boundary faces only.
        speeds : tuple of float
            Tow speed at the start and at the end of the step.
        dt : float
            Time step.
        """
        if not self.grid.periodic_y:
            v_star[1], v_star[-2] = 0.0, 0.0
        else:
            v_star[1] = v_star[-2]
        if self.grid.periodic_x:
            u_star[:, 1] = u_star[:, -2]
            return
        rows = slice(1, -1)
        u_star[rows, 1] = self.inflow_profile * speeds[1] if self.left.kind == "inflow" else 0.0
        if self.right.kind != "outflow":
            u_star[rows, -2] = 0.0
            return
        celerity = max(0.5 * (speeds[0] + speeds[1]), 0.0) * dt / self.grid.dx[-2]
        leaving = u[rows, -2] - min(celerity, 1.0) * (u[rows, -2] - u[rows, -3])
        leaving += (speeds[1] - speeds[0]) * self.inflow_profile
        entering = float(u_star[rows, 1] @ self._heights)
        excess = (float(leaving @ self._heights) - entering) / self._heights.sum()
        u_star[rows, -2] = leaving - excess

    def describe(self) -> dict[str, str]:
        """Return a phrase for each side, for pictures and manifests."""
        return {name: _phrase(getattr(self, name)) for name in ("left", "right", "bottom", "top")}


def _tangential(side: SideCondition, tow_speed: float, ghost: np.ndarray, inner: np.ndarray) -> None:
    """Fill one ghost line of the velocity along a side."""
    if side.kind == "no slip":
        ghost[:] = 2.0 * side.wall_speed(tow_speed) - inner
    elif side.kind == "inflow":
        ghost[:] = -inner
    else:
        ghost[:] = inner


def _phrase(side: SideCondition) -> str:
    if side.kind == "no slip" and side.tow_share:
        return "tank wall, slides past the carriage"
    if side.kind == "no slip" and side.speed:
        return f"no slip, moves at {side.speed:g} U"
    if side.kind == "inflow" and side.profile != "uniform":
        return "inflow, parabola"
    return side.kind
