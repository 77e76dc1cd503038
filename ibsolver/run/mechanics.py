"""Masses, springs and limits of the flaps of a case, dimensionless."""

from __future__ import annotations

import math

import numpy as np

from ibsolver.body.rig import Rig
from ibsolver.case import scales
from ibsolver.case.model import Case, Flap
from ibsolver.errors import CaseError, Fault
from ibsolver.flow.hinge import Mechanics
from ibsolver.flow.timestep import StepRule

STEPS_PER_PERIOD = 40  # of a spring, at least
MOST_REFINEMENT = 50  # by which a spring may shorten the step


def mechanics_of(case: Case, rig: Rig) -> tuple[Mechanics, ...]:
    """Return the mechanics of all flaps, in the order of the rig."""
    flaps = {flap.name: flap for flap in case.flaps}
    return tuple(_mechanics(case, flaps[link.name]) for link in rig.flaps)


def _mechanics(case: Case, flap: Flap) -> Mechanics:
    if flap.mount != "free":
        return Mechanics(flap.mount)
    mass_scale, spring_scale = scales.mass_per_area_scale(case), scales.spring_scale(case)
    damping_scale = scales.damping_scale(case)
    if mass_scale is None or spring_scale is None or damping_scale is None:
        problem = "a free flap needs a fluid, a chord, a span and a speed, for its mass and spring have units."
        raise CaseError(
            [Fault(case.file or "case", 0, f"flap {flap.name}", "", problem, "Add [fluid], chord and span.")]
        )
    per_area, displaced = _masses(case, flap)
    return Mechanics(
        "free",
        mass=per_area / mass_scale,
        buoyant_mass=(per_area - displaced) / mass_scale,
        spring=flap.spring / spring_scale,
        damping=flap.damping / damping_scale,
        rest=flap.rest,
        limits=flap.limits or (0.0, math.pi),
    )


def _masses(case: Case, flap: Flap) -> tuple[float, float]:
    """Return mass and displaced fluid of a flap (kg/m2); without a thickness nothing is displaced."""
    if flap.mass_per_area is not None:
        return flap.mass_per_area, 0.0
    thickness = flap.thickness or 0.0
    density = case.fluid.density if case.fluid else 0.0
    return thickness * (flap.density or 0.0), thickness * density


def gravity_of(case: Case) -> np.ndarray:
    """Return gravity in the plane of the flow (U^2/c), shape (2,); zero where it does not lie in the plane."""
    scale = scales.acceleration_scale(case)
    if case.tank.gravity is None or scale is None:
        return np.zeros(2)
    direction = case.tank.gravity_direction if case.tank.gravity_direction is not None else -0.5 * math.pi
    return case.tank.gravity / scale * np.array([math.cos(direction), math.sin(direction)])


def spring_period(flap: Mechanics, length: float) -> float:
    """Return the shortest likely period of a sprung flap (c/U): its own inertia and a tenth of the fluid's.

    The fluid's, from potential flow, is 9 pi/128 length^4 for a lone plate about its edge; a plate beside it only adds.
    """
    if flap.spring <= 0:
        return math.inf
    inertia = flap.mass * length**3 / 3.0 + 0.1 * 9.0 * math.pi / 128.0 * length**4
    return 2.0 * math.pi * math.sqrt(inertia / flap.spring)


def longest_for_springs(mechanics: tuple[Mechanics, ...], rig: Rig) -> float:
    """Return the longest step that resolves every spring (c/U)."""
    periods = [spring_period(flap, link.length) for flap, link in zip(mechanics, rig.flaps, strict=True) if flap.free]
    return min(periods, default=math.inf) / STEPS_PER_PERIOD


def require_resolvable_springs(rule: StepRule, mechanics: tuple[Mechanics, ...], rig: Rig) -> None:
    """Refuse a spring so stiff that resolving it would take very many steps.

    Raises
    ------
    CaseError
        With the step it needs and the spring that would do.
    """
    flow = rule.courant * rule.spacing
    for flap, link in zip(mechanics, rig.flaps, strict=True):
        needed = spring_period(flap, link.length) / STEPS_PER_PERIOD if flap.free else math.inf
        if needed * MOST_REFINEMENT < flow:
            factor = (needed * MOST_REFINEMENT / flow) ** 2
            problem = (
                f"the spring is so stiff that its swing needs steps of {needed:.2e} c/U, {flow / needed:.0f} times shorter than "
                "the flow's."
            )
            remedy = f'Use at most {100 * factor:.2g} % of this stiffness, or mount = "fixed".'
            raise CaseError([Fault("case", 0, f"flap {link.name}.spring", "", problem, remedy)])
