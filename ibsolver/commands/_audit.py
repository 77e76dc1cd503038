"""Numbers that `check` prints, as pure functions of the case: what the tank must be ready for.

Rules marked "common practice" have no single source; the others name theirs.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

from ibsolver.case import scales
from ibsolver.case.cautions import MOST_BLOCKAGE
from ibsolver.case.model import Case, Motion
from ibsolver.case.placement import extent, has_body, motion_range

GREATEST_OVER_MEAN = {"linear": 1.0, "hold acceleration": 1.0, "smooth": 1.875}  # of the acceleration while starting
STROUHAL = 0.2  # shedding frequency times projected height over speed, of bluff bodies (common practice)
MULTIPLE = 5  # highest multiple of a periodic load's frequency worth resolving (common practice)
DOMAIN_TRAVEL = 2.0  # chords after which `domain_effect` is told
CELL_RESOLUTION = (1e-3, 2e-3)  # N, of a usual load cell (common practice)


def incidence_range(case: Case) -> tuple[float, float]:
    """Return the least and greatest incidence of the body (rad), motions included; zeros for a cylinder or a box."""
    body = case.plate or case.outline
    return motion_range(case.incidence_motion, body.incidence) if body is not None else (0.0, 0.0)


def greatest_incidence(case: Case) -> float:
    """Return the greatest size of the incidence (rad), motions included."""
    return max(abs(value) for value in incidence_range(case))


def steepest(case: Case) -> float:
    """Return the size of the incidence (rad, at most pi/2) at which the body stands most across the stream."""
    low, high = incidence_range(case)
    if low <= -0.5 * math.pi or high >= 0.5 * math.pi:
        inside = any(low <= side <= high for side in (-0.5 * math.pi, 0.5 * math.pi))
        return 0.5 * math.pi if inside else math.asin(max(abs(math.sin(low)), abs(math.sin(high))))
    return max(abs(low), abs(high))


@dataclass(frozen=True)
class NormalForce:
    """Coefficients of the force normal to a plate, between which and below which a tow is to be expected.

    Parameters
    ----------
    separated : float
        Free streamlines from both edges over a dead wake at the pressure of the stream (Kirchhoff 1869; Rayleigh 1876;
        Lamb, Hydrodynamics, art. 76): 2 pi sin a / (4 + pi sin a). A real wake sucks, so means lie above it.
    attached : float
        Thin aerofoil whose leading-edge suction is lost: 2 pi sin a cos a; or `separated`, where that is more.
    peak : float
        The same with the whole suction, 2 pi sin^2 a, turned normal to the plate by a leading-edge vortex (the analogy
        of Polhamus 1966, NASA TN D-3767, from memory, taken in two dimensions): a bound rather than a forecast.
    """

    separated: float
    attached: float
    peak: float


def normal_force(case: Case) -> NormalForce | None:
    """Return the normal force to be expected of a plate after its start, at its steepest; None without a plate.

    A flap and the speed of pitch and heave lie outside all three numbers.
    """
    if case.plate is None:
        return None
    angle = steepest(case)
    s, c = math.sin(angle), math.cos(angle)
    separated = 2 * math.pi * s / (4 + math.pi * s)
    return NormalForce(separated, max(separated, 2 * math.pi * s * c), 2 * math.pi * s * (s + c))


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


def starting_incidence(case: Case) -> float:
    """Return the size of the incidence while the carriage starts (rad).

    Before a ramp or a table begins this is its first value; of an oscillation it is the steepest, which is a bound.
    """
    motion = case.incidence_motion
    if motion is None or motion.kind == "oscillation":
        return steepest(case)
    return abs(motion.values[0] if motion.kind == "table" else motion.value)


def added_mass_coefficient(case: Case) -> float | None:
    """Return the peak normal-force coefficient of the added mass while the carriage starts, None without a plate.

    Potential flow (exact): force per span rho pi c^2/4 times the normal acceleration, so C_N = (pi/2) a sin(incidence),
    a the acceleration in U^2/c. With constant acceleration over s_a this is (pi/4) (c/s_a) sin(incidence). The speed of
    pitch and heave adds to it and is not counted.
    """
    if case.plate is None:
        return None
    across = abs(math.sin(starting_incidence(case)))
    return 0.5 * math.pi * greatest_acceleration(case) * across if across > 1e-12 else 0.0


@dataclass(frozen=True)
class TankNumbers:
    """What the tank must be ready for; SI, None where the case is dimensionless or has no plate.

    Parameters
    ----------
    convective_time, tow_time, start_time : float
        c/U, duration of the tow, duration of its start (s).
    tow_length : float
        Travel (m).
    force_scale : float
        rho U^2 c span / 2 (N).
    load_separated, load_attached, load_peak : float
        Expected normal force (N), see `NormalForce`.
    added_mass_load : float
        Peak load of the added mass while starting (N); infinite for an impulsive start.
    load_cell : tuple of float
        Range of the load cell (N): 3 to 5 times the greater of the two peaks (common practice).
    resolution_share : tuple of float
        The usual resolution of a load cell, 1 to 2 mN, as fractions of that peak.
    highest_frequency : float
        Highest frequency of interest (Hz), see `highest_frequency`.
    natural_frequency : tuple of float
        Lowest wet natural frequency of the balance: 5 to 10 times the highest frequency of interest (Hz); the start then
        lasts at least 5 natural periods, where 2 to 3 are the least (common practice).
    sample_rate : tuple of float
        10 to 20 times the highest frequency of interest (Hz). It may lie at the natural frequency, whose ringing would
        then pass for a steady load (sampling theorem): an analogue filter or twice that rate keeps it out.
    filter_below : float
        Cut-off of the low-pass filter at most (Hz): 0.4 times the lowest of the natural frequencies above.
    """

    convective_time: float | None = None
    tow_time: float | None = None
    start_time: float | None = None
    tow_length: float | None = None
    force_scale: float | None = None
    load_separated: float | None = None
    load_attached: float | None = None
    load_peak: float | None = None
    added_mass_load: float | None = None
    load_cell: tuple[float, float] | None = None
    resolution_share: tuple[float, float] | None = None
    highest_frequency: float | None = None
    natural_frequency: tuple[float, float] | None = None
    sample_rate: tuple[float, float] | None = None
    filter_below: float | None = None


def tank_numbers(case: Case) -> TankNumbers:
    """Return the tank's numbers of a case."""
    seconds = scales.convective_time(case)
    if seconds is None:
        return TankNumbers()
    highest = highest_frequency(case) / seconds
    return TankNumbers(
        convective_time=seconds,
        tow_time=scales.duration(case) * seconds,
        start_time=starting_time(case) * seconds,
        tow_length=scales.tow_length(case),
        force_scale=scales.force_scale(case),
        highest_frequency=highest,
        natural_frequency=(5 * highest, 10 * highest),
        sample_rate=(10 * highest, 20 * highest),
        filter_below=0.4 * 5 * highest,
        **_loads(case),
    )


def _loads(case: Case) -> dict[str, float | tuple[float, float] | None]:
    """Return the loads of `TankNumbers`; nothing without plate or span."""
    scale, band = scales.force_scale(case), normal_force(case)
    if scale is None or band is None:
        return {}
    added = scale * added_mass_coefficient(case)
    peak = max(scale * band.peak, added if math.isfinite(added) else 0.0)
    return {
        "load_separated": scale * band.separated,
        "load_attached": scale * band.attached,
        "load_peak": scale * band.peak,
        "added_mass_load": added,
        "load_cell": (3 * peak, 5 * peak) if peak > 0 else None,
        "resolution_share": tuple(step / peak for step in CELL_RESOLUTION) if peak > 0 else None,
    }


def highest_frequency(case: Case) -> float:
    """Return the highest frequency of interest (U/c).

    The greatest of: the fifth multiple of shedding, at a Strouhal number of 0.2 on the projected height (at least 0.1
    chords); one over the duration of the start; the fifth multiple of every oscillation, and one over the duration of
    every ramp, of plate and driven flaps (common practice). Tables and free flaps are not looked into.
    """
    height = 1.0 if case.cylinder is not None else max(math.sin(steepest(case)), 0.1)
    ramp = starting_time(case)
    start = 1.0 / ramp if ramp > 0 else 0.0
    return max(MULTIPLE * STROUHAL / height, start, *_motion_frequencies(case))


def least_tank_width(case: Case) -> float | None:
    """Return the width between side walls (chords) at which the blockage is 5 % (Maskell 1963); None without a body.

    Blockage is the projected height c sin(incidence) over the width, as in `ibsolver.case.cautions.blockage`.
    """
    if not has_body(case):
        return None
    return (1.0 if case.cylinder is not None else math.sin(steepest(case))) / MOST_BLOCKAGE


def _motion_frequencies(case: Case) -> Iterator[float]:
    motions: list[Motion | None] = [case.incidence_motion, case.heave_motion, *(flap.motion for flap in case.flaps)]
    for motion in motions:
        if motion is None:
            continue
        if motion.kind == "oscillation":
            yield MULTIPLE * motion.reduced_frequency / math.pi  # k = pi f c / U
        elif motion.kind.startswith("ramp"):
            yield 1.0 / motion.duration


def domain_effect(case: Case, travel: float = DOMAIN_TRAVEL) -> float | None:
    """Return the likely excess of lift (fraction) through the finite domain; None without lift or with tank walls.

    A fit to runs of this solver, good to about a third up to three chords: plate at 10, 15 and 25 deg, Re 500 and 1000,
    smooth start, sides at 4 to 12 chords against 20. The excess grows with travel and falls as the square of each side's
    distance; the sides add up. Later the shedding shifts in time, and one number no longer tells the difference.
    """
    if (case.plate is None and case.outline is None) or case.tank.wall_above or case.tank.wall_below:
        return None
    left, right, bottom, top = extent(case)
    lateral = 0.5 * (top**-2 + bottom**-2)
    return travel * (0.15 * left**-2 + 0.22 * lateral + 0.13 * right**-2)
