"""Direct forcing that knows of the projection.

Point forces q are chosen with the projection P = I - G L^-1 D inside: B q = (U_b - E u*)/dt with B = E P E^T / h^2,
so that the projection that follows does not undo them. B is symmetric positive semi-definite, 2n x 2n.

* Bodies at rest on the grid: B is built exactly, by solving the grid's own Poisson equation for every unit force.
* Moving bodies: the rows of the moving points come from the free-space lattice Green's function.

Forces of the last step are carried where they balance the last pressure: at the points' earlier places. The new forces then
replace them, (E P E^T) q_new = h^2 (U_b - E u*)/dt + E P E_old^T q_old. Carried along with the points instead, they and the
pressure gradient leave a dipole whose irrotational part passes for slip.

A flap point near its plate carries only a share w of the force that exact no-slip would ask of it: its diagonal
gains the compliance B_ii (1 - w)/w acting on its whole force, which fades the point out smoothly.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ibsolver.body.points import BodyError
from ibsolver.flow.boundary import BoundaryConditions
from ibsolver.flow.factor import CouplingFactor
from ibsolver.flow.lattice import projected_response
from ibsolver.flow.poisson import PoissonSolver
from ibsolver.grid.staggered import StaggeredGrid
from ibsolver.kernels import coupling as coupling_kernel
from ibsolver.kernels import delta, momentum

KERNELS = {"roma": delta.ROMA, "quintic": delta.QUINTIC}
TABLE_REACH = 24  # cells: the largest offset for which entries are taken from the table, and some


@dataclass(eq=False)
class Stencils:
    """Where each point touches the grid: padded lowest (row, column) and weights, for u and for v."""

    index_u: np.ndarray
    weight_u: np.ndarray
    index_v: np.ndarray
    weight_v: np.ndarray
    cells: np.ndarray  # positions in cells, shape (n, 2)

    @property
    def arrays(self) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
        """Index and weights on the u grid, then on the v grid."""
        return self.index_u, self.weight_u, self.index_v, self.weight_v

    @classmethod
    def empty(cls, count: int, width: int) -> Stencils:
        """Return stencils of `count` points, `width` grid values wide, not yet located."""
        return cls(
            np.zeros((count, 2), dtype=np.int64),
            np.zeros((count, 2, width)),
            np.zeros((count, 2), dtype=np.int64),
            np.zeros((count, 2, width)),
            np.zeros((count, 2)),
        )


class Coupling:
    """The bond between Lagrangian points and grid.

    Parameters
    ----------
    grid : StaggeredGrid
    sides : BoundaryConditions
    poisson : PoissonSolver
    count : int
        Number of points.
    kernel : {"roma", "quintic"}
        Regularised delta function (`ibsolver.body.regularisation`).
    """

    def __init__(
        self,
        grid: StaggeredGrid,
        sides: BoundaryConditions,
        poisson: PoissonSolver,
        count: int,
        kernel: str = "roma",
    ):
        self.grid, self._sides, self._poisson = grid, sides, poisson
        self.kernel = KERNELS[kernel]
        self.stencils = Stencils.empty(count, delta.WIDTHS[self.kernel])
        self.earlier = Stencils.empty(count, delta.WIDTHS[self.kernel])
        self.matrix = np.zeros((2 * count, 2 * count))
        self.weights = np.ones(count)
        self._compliance = np.zeros(2 * count)
        self._factor: CouplingFactor | None = None
        h = grid.spacing
        self._scale = 1.0 / (h * h)
        i_core, j_core = grid.core_index()
        self._x_origin = grid.x_faces[i_core] - (i_core + 1) * h
        self._y_origin = grid.y_faces[j_core] - (j_core + 1) * h

    @property
    def count(self) -> int:
        """Number of points."""
        return self.weights.size

    def locate(self, points: np.ndarray) -> None:
        """Put the stencils where the points, shape (n, 2), are now.

        Raises
        ------
        BodyError
            If a point leaves the uniform core of the grid.
        """
        self._require_inside_core(points)
        h, s = self.grid.spacing, self.stencils
        x0, y0 = self._x_origin, self._y_origin
        s.cells[...] = points / h
        delta.locate(self.kernel, points, x0, y0 + 0.5 * h, h, s.index_u, s.weight_u)
        delta.locate(self.kernel, points, x0 + 0.5 * h, y0, h, s.index_v, s.weight_v)

    def _require_inside_core(self, points: np.ndarray) -> None:
        x_low, x_high, y_low, y_high = self.grid.core
        margin = (0.5 * delta.WIDTHS[self.kernel] + 0.5) * self.grid.spacing
        outside = (
            (points[:, 0] < x_low + margin)
            | (points[:, 0] > x_high - margin)
            | (points[:, 1] < y_low + margin)
            | (points[:, 1] > y_high - margin)
        )
        if outside.any():
            x, y = points[int(np.argmax(outside))]
            raise BodyError(
                f"A body point at x = {x:.4f}, y = {y:.4f} chords from the pivot lies outside the fine part of the "
                f"grid ({x_low:.3f} to {x_high:.3f}, {y_low:.3f} to {y_high:.3f}). Raise grid.core_margin."
            )

    def move(self, before: np.ndarray, after: np.ndarray) -> None:
        """Put the stencils where the points are after a step, and keep those of before as `earlier`.

        Raises
        ------
        BodyError
            As `locate`.
        """
        self.stencils, self.earlier = self.earlier, self.stencils
        self.locate(before)
        self.stencils, self.earlier = self.earlier, self.stencils
        self.locate(after)

    def velocity_from_earlier(self, force: np.ndarray, moving: np.ndarray | None) -> np.ndarray:
        """Return the projected velocity, per time, at the points now that forces at their earlier places give.

        Parameters
        ----------
        force : ndarray, shape (n, 2)
            Point forces.
        moving : ndarray of int or None
            Points that have moved; None means all.
        """
        here, there = self.stencils, self.earlier
        columns = np.arange(self.count) if moving is None else moving
        resting = force.copy()
        resting[columns] = 0.0
        velocity = (self.matrix @ resting.ravel()).reshape(force.shape)
        moved = np.zeros_like(force)
        coupling_kernel.lattice_product(
            columns,
            here.cells,
            there.cells,
            here.arrays,
            there.arrays,
            projected_response(TABLE_REACH),
            force,
            moved,
        )
        return velocity + self._scale * moved

    def interpolate(self, u: np.ndarray, v: np.ndarray, out: np.ndarray) -> None:
        """Write the velocity at the points into `out`, shape (n, 2)."""
        s = self.stencils
        delta.interpolate(u, s.index_u, s.weight_u, 0, out)
        delta.interpolate(v, s.index_v, s.weight_v, 1, out)

    def spread(
        self, force: np.ndarray, factor: float, u: np.ndarray, v: np.ndarray, stencils: Stencils | None = None
    ) -> None:
        """Add ``factor`` times the acceleration by point forces, shape (n, 2), to `u` and `v` in place."""
        s = stencils or self.stencils
        delta.spread(force, 0, factor * self._scale, s.index_u, s.weight_u, u)
        delta.spread(force, 1, factor * self._scale, s.index_v, s.weight_v, v)

    def build_exact(self) -> None:
        """Fill the matrix with the grid's own projection: one Poisson solve for every unit force."""
        grid = self.grid
        u = np.zeros((grid.ny + 2, grid.nx + 3))
        v = np.zeros((grid.ny + 3, grid.nx + 2))
        phi, scratch = np.zeros((grid.ny + 2, grid.nx + 2)), np.zeros((grid.ny + 2, grid.nx + 2))
        source = np.zeros((grid.ny, grid.nx))
        response = np.zeros((self.count, 2))
        unit = np.zeros((self.count, 2))
        for column in range(2 * self.count):
            unit[...] = 0.0
            unit[column // 2, column % 2] = 1.0
            u[...] = 0.0
            v[...] = 0.0
            self.spread(unit, 1.0, u, v)
            momentum.divergence(u, v, grid.x_metrics, grid.y_metrics, 1.0, source)
            self._poisson.solve(source, phi[1:-1, 1:-1])
            self._sides.fill_scalar(phi)
            momentum.correct(phi, grid.x_metrics, grid.y_metrics, 1.0, self._sides.ranges, u, v, scratch)
            self.interpolate(u, v, response)
            self.matrix[:, column] = response.ravel()
        self.matrix += self.matrix.T
        self.matrix *= 0.5

    def build_from_lattice(self, rows: np.ndarray | None = None) -> None:
        """Fill the rows and columns of the given points (None: all) from the lattice Green's function."""
        s = self.stencils
        changed = np.arange(self.count) if rows is None else rows
        tables = projected_response(TABLE_REACH)
        coupling_kernel.lattice_rows(changed, s.cells, s.arrays, self._scale, tables, self.matrix)
        both = (2 * changed[:, None] + np.arange(2)).ravel()
        self.matrix[:, both] = self.matrix[both].T

    def factorise(self, weights: np.ndarray, moving: np.ndarray | None) -> None:
        """Factor the matrix for the given weights, shape (n,).

        Parameters
        ----------
        moving : ndarray of int or None
            Points whose rows and weights change from step to step; None means all. The first call settles it.
        """
        self.weights = weights
        w = np.repeat(weights, 2)
        self._compliance = np.diag(self.matrix) * (1.0 - w) / w
        if self._factor is None:
            changing = np.arange(self.count) if moving is None else moving
            both = (2 * changing[:, None] + np.arange(2)).ravel()
            self._factor = CouplingFactor(self.matrix, self._compliance, both)
        else:
            self._factor.update(self.matrix, self._compliance)

    def force_change(self, slip: np.ndarray, dt: float, force: np.ndarray) -> np.ndarray:
        """Return the change of point forces that removes the slip.

        Parameters
        ----------
        slip : ndarray, shape (n, 2)
            Wanted minus present velocity at the points.
        dt : float
            Time step.
        force : ndarray, shape (n, 2)
            Present point forces, which compliant points give back in part.
        """
        right = slip.ravel() / dt - self._compliance * force.ravel()
        return self._factor.solve(right).reshape(slip.shape)

    def whole_force(self, slip: np.ndarray, dt: float, velocity: np.ndarray) -> np.ndarray:
        """Return the point forces that remove the slip and replace forces at earlier places.

        Parameters
        ----------
        slip : ndarray, shape (n, 2)
            Wanted minus present velocity at the points, the present one with the earlier forces in it.
        dt : float
            Time step.
        velocity : ndarray, shape (n, 2)
            What those earlier forces give, per time (`velocity_from_earlier`).
        """
        right = (slip / dt + velocity).ravel()
        return self._factor.solve(right).reshape(slip.shape)

    def response(self, velocities: np.ndarray) -> np.ndarray:
        """Return point forces times time that give the points these velocities, shape (m, n, 2) to (m, n, 2)."""
        columns = velocities.reshape(velocities.shape[0], -1).T
        return np.ascontiguousarray(self._factor.solve(columns).T).reshape(velocities.shape)

    def worst_slip(self, slip: np.ndarray) -> float:
        """Return the largest slip speed on points that carry their whole force."""
        whole = self.weights >= 1.0
        return float(np.sqrt((slip[whole] ** 2).sum(axis=1).max())) if whole.any() else 0.0
