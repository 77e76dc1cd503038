"""Loads on the bodies from the Lagrangian point forces.

A point pushes the fluid with q (per unit span); the body feels -q. In the accelerating frame the fluid inside a
closed body is carried along by the frame, and the points hold it, so the hydrodynamic force of a closed body is
-sum q - A dU/dt, A its area: what a balance reads after the body's own inertia is taken off. A regularised thin plate
holds a layer of fluid one to two cells thick in the same way (`ibsolver.body.regularisation`), and its points feel that
layer's inertia too; it is taken off point by point, so that the load of an accelerating plate converges with the cells.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ibsolver.body.rig import Placement, Rig


@dataclass(frozen=True)
class Loads:
    """Mean loads over one step, per unit span (rho U^2 c, rho U^2 c^2).

    Parameters
    ----------
    drag, lift : float
        Along the stream and across it, on the whole rig.
    moment : float
        About the pivot, nose-up positive.
    hinge_moments : tuple of float
        Of the fluid on each flap (and all that hangs on it) about its hinge, opening positive.
    """

    drag: float
    lift: float
    moment: float
    hinge_moments: tuple[float, ...] = ()


@dataclass(frozen=True, eq=False)
class Acceleration:
    """Mean accelerations over a step.

    Parameters
    ----------
    frame : float
        Of the carriage's frame along x: what the fluid feels as a push.
    points : ndarray, shape (n, 2), or None
        Of the Lagrangian points on the grid; None where they rest.
    base : ndarray, shape (3,), or None
        Of the base body's centroid, and its counter-clockwise angular acceleration.
    """

    frame: float
    points: np.ndarray | None = None
    base: np.ndarray | None = None


def loads_of(rig: Rig, placement: Placement, force: np.ndarray, acceleration: Acceleration) -> Loads:
    """Return the loads.

    Parameters
    ----------
    rig, placement
        The bodies and where they are.
    force : ndarray, shape (n, 2)
        Point forces on the fluid.
    acceleration : Acceleration
    """
    if not rig.links:
        return Loads(0.0, 0.0, 0.0)
    on_body = hydrodynamic(rig, force, acceleration)
    inside = inside_force(rig, acceleration)
    drag, lift = on_body.sum(axis=0) + inside
    turning = torque(placement.points, on_body, placement.origins[0])
    turning += _inside_torque(rig, placement, inside, acceleration)
    hinge_moments = []
    for k, link in enumerate(rig.links[1:], start=1):
        mine = rig.points_beyond[k]
        about_hinge = torque(placement.points[mine], on_body[mine], placement.origins[k])
        hinge_moments.append(link.side * about_hinge)
    return Loads(float(drag), float(lift), -float(turning), tuple(map(float, hinge_moments)))


def hydrodynamic(rig: Rig, force: np.ndarray, acceleration: Acceleration) -> np.ndarray:
    """Return the force of the fluid on the body at each point, less the inertia of the layer a plate holds.

    The inside of a closed body is not included here (it has no place on the points).

    Returns
    -------
    ndarray, shape (n, 2)
    """
    on_body = -force
    on_body[:, 0] -= rig.held * acceleration.frame
    if acceleration.points is not None:
        on_body += rig.held[:, None] * acceleration.points
    return on_body


def inside_force(rig: Rig, acceleration: Acceleration) -> np.ndarray:
    """Return the force (x, y) that the inertia of the fluid inside a closed body adds to the point forces' reaction."""
    pull = np.array([-acceleration.frame, 0.0])
    if acceleration.base is not None:
        pull = pull + acceleration.base[:2]
    return rig.links[0].area * pull


def _inside_torque(rig: Rig, placement: Placement, inside: np.ndarray, acceleration: Acceleration) -> float:
    """Return the counter-clockwise torque of that inertia about the base's origin."""
    base = rig.links[0]
    if not base.area:
        return 0.0
    c, s = np.cos(placement.angles[0]), np.sin(placement.angles[0])
    x, y = base.centroid[0] * c - base.centroid[1] * s, base.centroid[0] * s + base.centroid[1] * c
    spin = base.polar_moment * acceleration.base[2] if acceleration.base is not None else 0.0
    return float(x * inside[1] - y * inside[0] + spin)


def inertia_of_held_fluid(rig: Rig, acceleration: Acceleration) -> np.ndarray:
    """Return what has to be added to the reaction of the point forces for the load on the body, shape (2,)."""
    if not rig.links:
        return np.zeros(2)
    layer = hydrodynamic(rig, np.zeros((rig.size, 2)), acceleration).sum(axis=0)
    return layer + inside_force(rig, acceleration)


def torque(points: np.ndarray, force: np.ndarray, about: np.ndarray) -> float:
    """Return the counter-clockwise torque of point forces about a point."""
    arm = points - about
    return float(arm[:, 0] @ force[:, 1] - arm[:, 1] @ force[:, 0])
