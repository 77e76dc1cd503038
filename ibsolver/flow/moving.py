"""Bodies that move: where they are at the end of a step, and the free flaps' rates found with the point forces."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from ibsolver.body.rig import Configuration, Placement, Rig
from ibsolver.flow.hinge import FREE, HingeTerms, RigidMotion, hinge_terms

if TYPE_CHECKING:
    from ibsolver.flow.advance import Problem
    from ibsolver.flow.state import FlowState


@dataclass(eq=False)
class Movement:
    """Motion of the rig over one step.

    Attributes
    ----------
    configuration : Configuration
        At the end of the step, free openings predicted, their rates zero.
    velocity : ndarray, shape (n, 2)
        Wanted velocity of the points: the base motion, and the free rates once they are known.
    mass_velocity : ndarray, shape (nm, 2)
        The same of the mass points.
    base_motion : ndarray, shape (3,)
        Velocity of the base body's centroid and its counter-clockwise rate.
    masses : Placement
        Of the mass points at the end of the step.
    terms : HingeTerms or None
        Hinge equations, None without a free flap.
    rates, held, reaction : ndarray, shape (m,)
        Solution of the hinge equations.
    """

    configuration: Configuration
    velocity: np.ndarray
    mass_velocity: np.ndarray
    base_motion: np.ndarray
    masses: Placement
    terms: HingeTerms | None = None
    mass_unit: np.ndarray | None = None
    rates: np.ndarray | None = None
    held: np.ndarray | None = None
    reaction: np.ndarray | None = None
    _base_velocity: np.ndarray | None = None
    _base_mass_velocity: np.ndarray | None = None

    def whole_force(self, problem: Problem, present: np.ndarray, state: FlowState, dt: float) -> np.ndarray:
        """Return the point forces of the step, which replace those carried at the points' earlier places.

        Parameters
        ----------
        present : ndarray, shape (n, 2)
            Velocity at the points with the earlier forces in it.
        """
        coupling = problem.coupling
        carried = coupling.velocity_from_earlier(state.force, problem.moving_points)
        return self._with_hinges(lambda wanted: coupling.whole_force(wanted - present, dt, carried), state)

    def corrected_force(self, problem: Problem, present: np.ndarray, state: FlowState, dt: float) -> np.ndarray:
        """Return the point forces that remove what slip is left after a projection."""
        coupling = problem.coupling
        return self._with_hinges(
            lambda wanted: state.force + coupling.force_change(wanted - present, dt, state.force), state
        )

    def _with_hinges(self, force_for: Callable[[np.ndarray], np.ndarray], state: FlowState) -> np.ndarray:
        """Return the force for the wanted velocity, the free rates found on the way."""
        if self.terms is None:
            return force_for(self.velocity)
        force = force_for(self._base_velocity)
        self.rates, self.held, self.reaction = self.terms.solve(force, state.held[self.terms.flaps])
        self.velocity = self._base_velocity + np.einsum("k,kni->ni", self.rates, self.terms.unit)
        self.mass_velocity = self._base_mass_velocity + np.einsum("k,kni->ni", self.rates, self.mass_unit)
        return force + np.einsum("k,kni->ni", self.rates, self.terms.response)


def configuration_of(problem: Problem, state: FlowState) -> Configuration:
    """Return the configuration of a state: prescribed motions at its time, free flaps as they are."""
    wanted = problem.configuration(state.time)
    return merged(wanted, problem, state.openings, state.opening_rates)


def merged(wanted: Configuration, problem: Problem, openings: np.ndarray, rates: np.ndarray) -> Configuration:
    """Return a prescribed configuration with the free flaps' openings and rates put in."""
    free = [flap.free for flap in problem.mechanics]
    return replace(
        wanted,
        openings=tuple(float(o) if f else w for o, w, f in zip(openings, wanted.openings, free, strict=True)),
        opening_rates=tuple(float(r) if f else w for r, w, f in zip(rates, wanted.opening_rates, free, strict=True)),
    )


def start_motion(state: FlowState, problem: Problem) -> None:
    """Fill the state's memory of openings and velocities at its time. Modified in place."""
    wanted = problem.configuration(state.time)
    if not problem.rig.links:
        return
    state.openings[:] = wanted.openings
    state.opening_rates[:] = wanted.opening_rates
    state.earlier_rates[:] = wanted.opening_rates
    placement = problem.rig.place(wanted)
    state.points[...] = placement.points
    state.point_velocity[...] = placement.velocities
    state.mass_velocity[...] = problem.mass_rig.place(wanted).velocities
    state.base_motion[:] = _base_motion(problem.rig, wanted)


def begin_step(state: FlowState, problem: Problem, dt: float) -> Movement:
    """Put points, stencils and coupling matrix where the bodies are at the end of the step."""
    wanted = problem.configuration(state.time + dt)
    configuration = merged(wanted, problem, _predicted(state, problem, dt), np.zeros_like(state.openings))
    problem.placement = problem.rig.place(configuration)
    coupling = problem.coupling
    coupling.move(state.points, problem.placement.points)
    coupling.build_from_lattice(problem.moving_points)
    coupling.factorise(problem.rig.weights(problem.placement, problem.grid.spacing), problem.moving_points)
    masses = problem.mass_rig.place(configuration)
    movement = Movement(
        configuration,
        problem.placement.velocities,
        masses.velocities,
        _base_motion(problem.rig, configuration),
        masses,
    )
    if any(flap.free for flap in problem.mechanics):
        _prepare_hinges(movement, state, problem, dt)
    return movement


def _predicted(state: FlowState, problem: Problem, dt: float) -> np.ndarray:
    """Return the openings extrapolated to the end of the step, within their limits."""
    ratio = dt / state.dt if state.dt > 0 else 0.0
    rates = state.opening_rates + 0.5 * ratio * (state.opening_rates - state.earlier_rates)
    low, high = np.array([flap.limits for flap in problem.mechanics]).reshape(-1, 2).T
    return np.clip(state.openings + dt * rates, low, high)


def _prepare_hinges(movement: Movement, state: FlowState, problem: Problem, dt: float) -> None:
    """Set up the hinge equations of the step."""
    speeds = (problem.tow_speed(state.time), problem.tow_speed(state.time + dt))
    pull = np.array([(speeds[1] - speeds[0]) / dt, 0.0])
    free = [k for k, flap in enumerate(problem.mechanics) if flap.free]
    unit = np.array([problem.rig.per_opening_rate(problem.placement, k) for k in free])
    mass_unit = np.array([problem.mass_rig.per_opening_rate(movement.masses, k) for k in free])
    held_layer = problem.rig.held
    points = RigidMotion(unit, movement.velocity, state.point_velocity, held_layer, held_layer)
    masses = RigidMotion(mass_unit, movement.mass_velocity, state.mass_velocity, problem.masses, problem.buoyant_masses)
    response = problem.coupling.response(unit) / dt
    movement.terms = hinge_terms(
        problem.mechanics, masses, points, response, (state.openings, state.opening_rates), pull, problem.gravity, dt
    )
    movement.mass_unit = mass_unit
    movement._base_velocity, movement._base_mass_velocity = movement.velocity, movement.mass_velocity


def _base_motion(rig: Rig, configuration: Configuration) -> np.ndarray:
    """Return the velocity of the base body's centroid and its counter-clockwise rate."""
    rate, angle = -configuration.incidence_rate, -configuration.incidence
    s, n = rig.links[0].centroid
    x, y = s * np.cos(angle) - n * np.sin(angle), s * np.sin(angle) + n * np.cos(angle)
    return np.array([-rate * y, configuration.heave_rate + rate * x, rate])


@dataclass(frozen=True)
class FlapReport:
    """One flap over one step; torques per unit span (rho U^2 c^2), opening positive.

    Parameters
    ----------
    opening, rate : float
        At the end of the step (rad, rad per c/U).
    fluid, spring, stop, driver : float
        Mean torques of the fluid, of spring and damper, of a stop, and of a drive.
    power : float
        Mean power of the drive (rho U^3 c).
    energy : float
        Kinetic energy of the flap in the carriage's frame and energy of its spring at the end of the step (rho U^2 c^2).
    """

    opening: float
    rate: float
    fluid: float
    spring: float = 0.0
    stop: float = 0.0
    driver: float = 0.0
    power: float = 0.0
    energy: float = 0.0


def end_step(
    state: FlowState, problem: Problem, movement: Movement, fluid_torques: tuple[float, ...], dt: float, pull: float
) -> tuple[FlapReport, ...]:
    """Take the openings to the end of the step, remember velocities, and report the flaps. The state is changed in place.

    Parameters
    ----------
    fluid_torques : tuple of float
        Of the fluid on each flap about its hinge, opening positive.
    pull : float
        Acceleration of the frame along x.
    """
    before, before_rates = state.openings.copy(), state.opening_rates.copy()
    wanted = movement.configuration
    state.earlier_rates[:] = before_rates
    state.openings[:], state.opening_rates[:] = wanted.openings, wanted.opening_rates
    stops = np.zeros(before.size)
    if movement.terms is not None:
        free = movement.terms.flaps
        state.openings[free] = movement.terms.angles_after(movement.rates, movement.held)
        state.opening_rates[free], state.held[free] = movement.rates, movement.held
        stops[free] = movement.reaction
    inertia = _inertial_torques(state, problem, movement, dt, pull)
    reports = []
    for k, flap in enumerate(problem.mechanics):
        opening, rate = float(state.openings[k]), float(state.opening_rates[k])
        middle, mean_rate = 0.5 * (before[k] + opening), 0.5 * (before_rates[k] + rate)
        spring = -flap.spring * (middle - flap.rest) - flap.damping * mean_rate if flap.free else 0.0
        driver = 0.0 if flap.free else float(inertia[k] - fluid_torques[k])
        energy = _kinetic_energy(problem, movement, k) + (
            0.5 * flap.spring * (opening - flap.rest) ** 2 if flap.free else 0.0
        )
        reports.append(
            FlapReport(opening, rate, fluid_torques[k], spring, float(stops[k]), driver, driver * mean_rate, energy)
        )
    state.points[...] = problem.placement.points
    state.point_velocity[...] = movement.velocity
    state.mass_velocity[...] = movement.mass_velocity
    state.base_motion[:] = movement.base_motion
    return tuple(reports)


def _inertial_torques(state: FlowState, problem: Problem, movement: Movement, dt: float, pull: float) -> np.ndarray:
    """Return the torque that each flap's own mass asks for, less its weight, shape (flaps,)."""
    count = len(problem.mechanics)
    if not problem.masses.any():
        return np.zeros(count)
    acceleration = (movement.mass_velocity - state.mass_velocity) / dt - np.array([pull, 0.0])
    load = problem.masses[:, None] * acceleration - problem.buoyant_masses[:, None] * problem.gravity
    return np.array([np.sum(problem.mass_rig.per_opening_rate(movement.masses, k) * load) for k in range(count)])


def _kinetic_energy(problem: Problem, movement: Movement, flap: int) -> float:
    mine = problem.mass_rig.link_of_point == flap + 1
    return 0.5 * float(problem.masses[mine] @ (movement.mass_velocity[mine] ** 2).sum(axis=1))


__all__ = ["FREE", "FlapReport", "Movement", "begin_step", "configuration_of", "end_step", "merged", "start_motion"]
