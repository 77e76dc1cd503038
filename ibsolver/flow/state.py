"""The only mutable thing: what the flow is at one time. `arrays` and `numbers` are exactly what a checkpoint stores."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from ibsolver.grid.staggered import StaggeredGrid


@dataclass(eq=False)
class FlowState:
    """Fields and memory of the march; all dimensionless.

    Attributes
    ----------
    u, v, p : ndarray
        Velocity at `time` and pressure of the step that ended there, with ghosts (`ibsolver.grid.staggered`).
    tendency_u, tendency_v : ndarray
        Explicit tendency of the step before, for Adams-Bashforth.
    force : ndarray, shape (n, 2)
        Force of each Lagrangian point on the fluid over the last step (rho U^2 c).
    momentum : ndarray, shape (3, 2)
        Of the control volume at `time`: momentum, flux, and angular terms are kept for the balance of the next step.
    time, dt, travel : float
        Time, length of the last step (0 before the first), distance towed (chords).
    step : int
    rate : float
        Largest |u|/dx + |v|/dy at `time`; the next step follows from it.
    """

    u: np.ndarray
    v: np.ndarray
    p: np.ndarray
    tendency_u: np.ndarray
    tendency_v: np.ndarray
    force: np.ndarray
    momentum: np.ndarray
    time: float = 0.0
    dt: float = 0.0
    travel: float = 0.0
    step: int = 0
    rate: float = 0.0

    def arrays(self) -> dict[str, np.ndarray]:
        """Return every array by name."""
        return {f.name: value for f in fields(self) if isinstance(value := getattr(self, f.name), np.ndarray)}

    def numbers(self) -> dict[str, float | int]:
        """Return every scalar by name."""
        return {f.name: value for f in fields(self) if not isinstance(value := getattr(self, f.name), np.ndarray)}


def empty_state(grid: StaggeredGrid, points: int) -> FlowState:
    """Return fluid at rest with room for the forces of `points` points."""
    nx, ny = grid.nx, grid.ny
    u_shape, v_shape = (ny + 2, nx + 3), (ny + 3, nx + 2)
    return FlowState(
        u=np.zeros(u_shape),
        v=np.zeros(v_shape),
        p=np.zeros((ny + 2, nx + 2)),
        tendency_u=np.zeros(u_shape),
        tendency_v=np.zeros(v_shape),
        force=np.zeros((points, 2)),
        momentum=np.zeros((2, 2)),
    )
