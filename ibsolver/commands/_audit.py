"""Numbers that `check` prints, as pure functions of the case: what the tank must be ready for.

Rules marked "common practice" have no single source; the others name theirs.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from ibsolver.case import scales
from ibsolver.case.model import Case

GREATEST_OVER_MEAN = {"linear": 1.0, "hold acceleration": 1.0, "smooth": 1.875}  # of the acceleration while starting


def greatest_incidence(case: Case) -> float:
    """Return the greatest incidence of the body (rad), motions included."""
    body = case.plate or case.outline
    steady = abs(body.incidence) if body is not None else 0.0
    motion = case.incidence_motion
    if motion is None:
        return steady
    values = [motion.value, motion.value + motion.amplitude, motion.value - motion.amplitude, *motion.values]
    if motion.kind.startswith("ramp"):
        values.append(motion.to)
    return max(abs(value) for value in values)


def normal_force_band(case: Case) -> tuple[float, float] | None:
    """Return a band for the normal-force coefficient of a plate after its start, None without a plate.

    The upper end is thin-aerofoil theory with the leading-edge vortex in place, 2 pi sin a (Polhamus 1966, NASA TN
    D-3767, from memory: the suction turned normal to the plate); the lower one the fully separated plate of Kirchhoff and
    Rayleigh, 2 pi sin a / (4 + pi sin a) (Lamb, Hydrodynamics, art. 76). A flap lies outside both.
    """
    if case.plate is None:
        return None
    s = math.sin(greatest_incidence(case))
    return 2 * math.pi * s / (4 + math.pi * s), 2 * math.pi * s


def greatest_acceleration(case: Case) -> float:
    """Return the greatest tow acceleration (U^2/c); infinite for an impulsive start."""
    tow = case.tow
    if tow.profile:
        pairs = zip(tow.profile[:-1], tow.profile[1:], strict=True)
        return max(abs(u1 - u0) / (t1 - t0) for (t0, u0), (t1, u1) in pairs)
    if tow.start in ("impulsive", "still"):
        return math.inf if tow.start == "impulsive" else 0.0
    return GREATEST_OVER_MEAN[tow.start] / scales.ramp_time(case)


def starting_time(case: Case) -> float:
    """Return how long the start lasts (c/U); of an encoder's record until it first reaches 99 % of the final speed."""
    if not case.tow.profile:
        return scales.ramp_time(case)
    final = case.tow.profile[-1][1]
    return next(time for time, speed in case.tow.profile if speed >= 0.99 * final)


def added_mass_coefficient(case: Case) -> float | None:
    """Return the peak normal-force coefficient of the added mass while starting, None without a plate.

    Potential flow (exact): force per span rho pi c^2/4 times the normal acceleration, so C_N = (pi/2) a sin(incidence),
    a the acceleration in U^2/c.
    """
    if case.plate is None:
        return None
    return 0.5 * math.pi * greatest_acceleration(case) * math.sin(abs(case.plate.incidence))


@dataclass(frozen=True)
class TankNumbers:
    """What the tank must be ready for; SI, None where the case is dimensionless.

    Parameters
    ----------
    convective_time, tow_time, start_time : float
        c/U, duration of the tow, duration of its start (s).
    tow_length : float
        Travel (m).
    force_scale : float
        rho U^2 c span / 2 (N).
    load_low, load_high : float
        Expected normal force (N), `normal_force_band`.
    added_mass_load : float
        Peak load of the added mass while starting (N); infinite for an impulsive start.
    highest_frequency : float
        Highest frequency of interest (Hz): the fifth multiple of shedding at St = 0.2 on the projected height, or the
        inverse of the start's duration, whichever is greater (common practice).
    natural_frequency : tuple of float
        Lowest wet natural frequency of the balance: 5 to 10 times the highest frequency of interest (Hz).
    sample_rate : tuple of float
        10 to 20 times the highest frequency of interest (Hz).
    """

    convective_time: float | None
    tow_time: float | None
    start_time: float | None
    tow_length: float | None
    force_scale: float | None
    load_low: float | None
    load_high: float | None
    added_mass_load: float | None
    highest_frequency: float | None
    natural_frequency: tuple[float, float] | None
    sample_rate: tuple[float, float] | None


def tank_numbers(case: Case) -> TankNumbers:
    """Return the tank's numbers of a case."""
    seconds, force = scales.convective_time(case), scales.force_scale(case)
    if seconds is None:
        return TankNumbers(*[None] * 11)
    band, added = normal_force_band(case), added_mass_coefficient(case)
    highest = highest_frequency(case) / seconds
    start = starting_time(case) * seconds
    return TankNumbers(
        convective_time=seconds,
        tow_time=scales.duration(case) * seconds,
        start_time=start,
        tow_length=scales.tow_length(case),
        force_scale=force,
        load_low=force * band[0] if force and band else None,
        load_high=force * band[1] if force and band else None,
        added_mass_load=force * added if force and added is not None else None,
        highest_frequency=highest,
        natural_frequency=(5 * highest, 10 * highest),
        sample_rate=(10 * highest, 20 * highest),
    )


def highest_frequency(case: Case) -> float:
    """Return the highest frequency of interest (U/c), see `TankNumbers`."""
    height = max(math.sin(greatest_incidence(case)), 0.1) if case.cylinder is None else 1.0
    shedding = 5 * 0.2 / height
    ramp = starting_time(case)
    return max(shedding, 1.0 / ramp if ramp > 0 else 0.0)


def blockage(case: Case) -> float | None:
    """Return projected height over tank width, None in open water (Maskell 1963, R&M 3400)."""
    above, below = case.tank.wall_above, case.tank.wall_below
    if above is None or below is None:
        return None
    height = 1.0 if case.cylinder is not None else math.sin(greatest_incidence(case))
    return height / (above + below)


def boundary_layer_cells(case: Case) -> float:
    """Return cells across a laminar boundary layer of thickness 5 c / sqrt(Re) at the trailing edge (Blasius 1908)."""
    return 5.0 * case.grid.cells_per_chord / math.sqrt(case.tow.reynolds)


def domain_effect(case: Case) -> float | None:
    """Return the likely excess of lift (fraction) through the finite domain, None without a body or with tank walls.

    Measured with this solver's predecessor: +0.6 to 0.8 % at +-8 chords against +-20; taken to fall as the square of the
    distance, as the image of a bound vortex pair does.
    """
    if not (case.plate or case.outline or case.cylinder) or case.tank.wall_above or case.tank.wall_below:
        return None
    nearest = min(case.domain.upstream, case.domain.lateral)
    return 0.007 * (8.0 / nearest) ** 2
