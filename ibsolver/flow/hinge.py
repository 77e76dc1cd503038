"""Free flaps, solved together with the fluid: one small linear system a step, no extra Poisson solve.

The points of a flap move with U_b = U_0 + sum_k omega_k w_k, w_k their velocity per unit opening rate of flap k. The point
forces are then linear in the unknown rates, q = q_0 + sum_k omega_k s_k with s_k = B^-1 w_k / dt, and the hinge equations
(virtual power of each opening, all at the middle of the step)

    sum_i mu_i w_ki . (a_i - g) - sum_p e_p w_kp . (a_p - g) = -w_k . q - k (theta - theta_0) - c omega + weight + stop

close in the rates at the end of the step. mu_i is the flap's mass, e_p the fluid that the regularised flap holds (its
inertia is in q and is not the flap's), a the change of velocity over the step, g the acceleration of the frame. The added
inertia of the fluid is part of the matrix, so a flap without mass is stable. The angle follows by the trapezoidal rule:
second order.

Stops: a flap that would pass a limit is put on it with zero rate; it stays while the stop has to push, and is let go when
the torque turns. Which flaps lie on a stop is found together with the rates, so there is no chatter.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

LOWER, FREE, UPPER = -1.0, 0.0, 1.0


@dataclass(frozen=True)
class Mechanics:
    """What a flap is made of; dimensionless (rho, c, U).

    Parameters
    ----------
    mount : {"fixed", "driven", "free"}
    mass : float
        Per length of flap and unit span (rho c).
    buoyant_mass : float
        The same less the displaced fluid: what gravity acts on.
    spring, damping : float
        Per unit span (rho U^2 c^2 per rad, rho U c^3 per rad).
    rest : float
        Opening at which the spring is slack (rad).
    limits : tuple of float
        Least and greatest opening (rad).
    """

    mount: str = "fixed"
    mass: float = 0.0
    buoyant_mass: float = 0.0
    spring: float = 0.0
    damping: float = 0.0
    rest: float = 0.0
    limits: tuple[float, float] = (-math.inf, math.inf)

    @property
    def free(self) -> bool:
        """Whether the opening is found with the fluid."""
        return self.mount == "free"


@dataclass(frozen=True, eq=False)
class HingeTerms:
    """The hinge equations of one step, before the point forces are known.

    Parameters
    ----------
    flaps : ndarray of int, shape (m,)
        The free flaps, as indices among all flaps.
    unit : ndarray, shape (m, n, 2)
        Velocity of the Lagrangian points per unit rate.
    response : ndarray, shape (m, n, 2)
        Point forces per unit rate, s_k.
    matrix : ndarray, shape (m, m)
        Everything that multiplies the rates.
    right : ndarray, shape (m,)
        Everything that does not, but for -w . q_0.
    angle, rate : ndarray, shape (m,)
        At the start of the step.
    limits : ndarray, shape (m, 2)
    dt : float
    """

    flaps: np.ndarray
    unit: np.ndarray
    response: np.ndarray
    matrix: np.ndarray
    right: np.ndarray
    angle: np.ndarray
    rate: np.ndarray
    limits: np.ndarray
    dt: float

    def solve(self, force: np.ndarray, held: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Return rates at the end of the step, which stops hold, and the stops' torques, each of shape (m,).

        Parameters
        ----------
        force : ndarray, shape (n, 2)
            Point forces q_0 at zero rates.
        held : ndarray, shape (m,)
            `LOWER`, `FREE` or `UPPER` at the start of the step.
        """
        right = self.right - np.einsum("kni,ni->k", self.unit, force)
        held = held.copy()
        for _ in range(4 * held.size + 4):
            rates = self._rates(right, held)
            reaction = np.where(held != FREE, self.matrix @ rates - right, 0.0)
            changed = self._revise(rates, reaction, held)
            if not changed:
                break
        return rates, held, reaction

    def _rates(self, right: np.ndarray, held: np.ndarray) -> np.ndarray:
        rates = np.zeros_like(right)
        loose = held == FREE
        if loose.any():
            rates[loose] = np.linalg.solve(self.matrix[np.ix_(loose, loose)], right[loose])
        return rates

    def _revise(self, rates: np.ndarray, reaction: np.ndarray, held: np.ndarray) -> bool:
        """Hold the flap that passes its limit furthest, or else let go the one its stop pulls hardest. In place."""
        angles = self.angle + 0.5 * self.dt * (self.rate + rates)
        over = np.where(held == FREE, np.maximum(self.limits[:, 0] - angles, angles - self.limits[:, 1]), -1.0)
        k = int(np.argmax(over))
        if over[k] > 0:
            held[k] = LOWER if angles[k] < self.limits[k, 0] else UPPER
            return True
        pull = np.where(held != FREE, held * reaction, -1.0)  # a lower stop pushes up, an upper one down
        k = int(np.argmax(pull))
        if pull[k] > 0:
            held[k] = FREE
            return True
        return False

    def angles_after(self, rates: np.ndarray, held: np.ndarray) -> np.ndarray:
        """Return the openings at the end of the step."""
        angles = self.angle + 0.5 * self.dt * (self.rate + rates)
        angles = np.where(held == LOWER, self.limits[:, 0], angles)
        return np.where(held == UPPER, self.limits[:, 1], angles)


def hinge_terms(
    mechanics: tuple[Mechanics, ...],
    motion: RigidMotion,
    points: RigidMotion,
    response: np.ndarray,
    state: tuple[np.ndarray, np.ndarray],
    pull: np.ndarray,
    gravity: np.ndarray,
    dt: float,
) -> HingeTerms:
    """Return the hinge equations of a step.

    Parameters
    ----------
    mechanics : tuple of Mechanics
        Of all flaps.
    motion : RigidMotion
        The mass points of all flaps; weights are their masses.
    points : RigidMotion
        The Lagrangian points; weights are the areas of fluid they hold.
    response : ndarray, shape (m, n, 2)
        Point forces per unit rate.
    state : (openings, rates)
        Of all flaps at the start of the step.
    pull : ndarray, shape (2,)
        Acceleration of the fluid by the frame, g.
    gravity : ndarray, shape (2,)
        Gravity (U^2/c); acts on the buoyant mass.
    """
    flaps = np.array([k for k, flap in enumerate(mechanics) if flap.free])
    angle, rate = state[0][flaps], state[1][flaps]
    spring = np.array([mechanics[k].spring for k in flaps])
    damping = np.array([mechanics[k].damping for k in flaps])
    rest = np.array([mechanics[k].rest for k in flaps])
    matrix = np.einsum("kni,jni->kj", points.unit, response)
    matrix += (motion.inertia() - points.inertia()) / dt
    matrix += np.diag(0.5 * damping + 0.25 * dt * spring)
    right = points.power_of(pull, dt) - motion.power_of(pull, dt)
    right -= spring * (angle - rest + 0.25 * dt * rate) + 0.5 * damping * rate
    right += np.einsum("kni,i,n->k", motion.unit, gravity, motion.buoyant)
    return HingeTerms(
        flaps, points.unit, response, matrix, right, angle, rate, np.array([mechanics[k].limits for k in flaps]), dt
    )


@dataclass(frozen=True, eq=False)
class RigidMotion:
    """Points that move with the rig over a step.

    Parameters
    ----------
    unit : ndarray, shape (m, n, 2)
        Velocity per unit rate of each free flap.
    base : ndarray, shape (n, 2)
        Velocity at the end of the step with all free flaps at rest on their parents.
    before : ndarray, shape (n, 2)
        Velocity at the start of the step.
    weight : ndarray, shape (n,)
        Mass of each point (rho c^2).
    buoyant : ndarray, shape (n,)
        Mass less displaced fluid.
    """

    unit: np.ndarray
    base: np.ndarray
    before: np.ndarray
    weight: np.ndarray
    buoyant: np.ndarray

    def inertia(self) -> np.ndarray:
        """Return sum_i weight_i w_ki . w_ji, shape (m, m)."""
        return np.einsum("n,kni,jni->kj", self.weight, self.unit, self.unit)

    def power_of(self, pull: np.ndarray, dt: float) -> np.ndarray:
        """Return sum_i weight_i w_ki . ((base - before)/dt - g), shape (m,)."""
        return np.einsum("n,kni,ni->k", self.weight, self.unit, (self.base - self.before) / dt - pull)
