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
    momentum : ndarray, shape (2, 2)
        Momentum in the control volume at `time` and its flux out of it, for the balance of the next step.
    openings, opening_rates, earlier_rates : ndarray, shape (flaps,)
        Of all flaps at `time`, and the rates one step before (rad, rad per c/U).
    held : ndarray, shape (flaps,)
        Whether a stop holds a free flap (`ibsolver.flow.hinge`).
    points : ndarray, shape (n, 2)
        Where the Lagrangian points were put in the last step.
    point_velocity, mass_velocity : ndarray, shape (n, 2), (nm, 2)
        Velocity of Lagrangian and mass points at `time`.
    base_motion : ndarray, shape (3,)
        Velocity of the base body's centroid and its counter-clockwise rate at `time`.
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
    openings: np.ndarray
    opening_rates: np.ndarray
    earlier_rates: np.ndarray
    held: np.ndarray
    points: np.ndarray
    point_velocity: np.ndarray
    mass_velocity: np.ndarray
    base_motion: np.ndarray
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


def empty_state(grid: StaggeredGrid, points: int, flaps: int = 0, mass_points: int = 0) -> FlowState:
    """Return fluid at rest with room for so many Lagrangian points, flaps and mass points."""
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
        openings=np.zeros(flaps),
        opening_rates=np.zeros(flaps),
        earlier_rates=np.zeros(flaps),
        held=np.zeros(flaps),
        points=np.zeros((points, 2)),
        point_velocity=np.zeros((points, 2)),
        mass_velocity=np.zeros((mass_points, 2)),
        base_motion=np.zeros(3),
    )
