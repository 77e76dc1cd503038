"""Loads on the bodies from the Lagrangian point forces.

A point pushes the fluid with q (per unit span); the body feels -q. In the accelerating frame the fluid inside a
closed body is carried along by the frame, and the points hold it, so the hydrodynamic force of a closed body is
-sum q - A dU/dt, A its area: what a balance reads after the body's own inertia is taken off. A regularised thin plate
holds a layer of fluid 1.57 cells thick in the same way (`ibsolver.body.points.HELD_LAYER`), and its points feel that
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


def loads_of(rig: Rig, placement: Placement, force: np.ndarray, acceleration: float) -> Loads:
    """Return the loads.

    Parameters
    ----------
    rig, placement
        The bodies and where they are.
    force : ndarray, shape (n, 2)
        Point forces on the fluid.
    acceleration : float
        Mean acceleration of the frame along x over the step.
    """
    if not rig.links:
        return Loads(0.0, 0.0, 0.0)
    base = rig.links[0]
    on_body = hydrodynamic(rig, force, acceleration)
    drag, lift = on_body.sum(axis=0)
    drag -= base.area * acceleration
    turning = torque(placement.points, on_body, placement.origins[0])
    turning += base.area * acceleration * base.centroid[1]
    hinge_moments = []
    for k, link in enumerate(rig.links[1:], start=1):
        mine = np.isin(rig.link_of_point, descendants(rig, k))
        about_hinge = torque(placement.points[mine], on_body[mine], placement.origins[k])
        hinge_moments.append(link.side * about_hinge)
    return Loads(float(drag), float(lift), -float(turning), tuple(map(float, hinge_moments)))


def hydrodynamic(rig: Rig, force: np.ndarray, acceleration: float) -> np.ndarray:
    """Return the force of the fluid on the body at each point, less the inertia of the layer a plate holds.

    The inside of a closed body is not included here (it has no place on the points).

    Returns
    -------
    ndarray, shape (n, 2)
    """
    on_body = -force
    on_body[:, 0] -= rig.held * acceleration
    return on_body


def displaced(rig: Rig) -> float:
    """Return the area of fluid whose inertia the point forces include: closed bodies and held layers."""
    return float(rig.links[0].area + rig.held.sum()) if rig.links else 0.0


def torque(points: np.ndarray, force: np.ndarray, about: np.ndarray) -> float:
    """Return the counter-clockwise torque of point forces about a point."""
    arm = points - about
    return float(arm[:, 0] @ force[:, 1] - arm[:, 1] @ force[:, 0])


def descendants(rig: Rig, k: int) -> list[int]:
    """Return link k and every link that hangs on it."""
    family = [k]
    for index in range(k + 1, len(rig.links)):
        if rig.links[index].parent in family:
            family.append(index)
    return family
