"""The one module that turns dimensionless numbers into SI and back.

Length by the reference length c (chord or diameter), velocity by the final tow speed U, time by c / U, density by
the fluid's. Everything in SI is None in a purely dimensionless run.
"""

from __future__ import annotations

from bisect import bisect_right

from ibsolver.case.model import Case


def reference_length(case: Case) -> float | None:
    """Return chord or diameter (m)."""
    if case.cylinder is not None:
        return case.cylinder.diameter
    body = case.plate or case.outline
    return None if body is None else body.chord


def span(case: Case) -> float | None:
    """Return the span of the model (m)."""
    body = case.plate or case.cylinder or case.outline
    return None if body is None else body.span


def dimensional(case: Case) -> bool:
    """Return whether the case is in SI: it has a fluid, a reference length and a speed."""
    return case.fluid is not None and case.tow.speed is not None and reference_length(case) is not None


def convective_time(case: Case) -> float | None:
    """Return c / U (s)."""
    return reference_length(case) / case.tow.speed if dimensional(case) else None


def velocity_scale(case: Case) -> float | None:
    """Return U (m/s)."""
    return case.tow.speed if dimensional(case) else None


def frequency_scale(case: Case) -> float | None:
    """Return U / c (Hz): what a Strouhal number is multiplied by."""
    return case.tow.speed / reference_length(case) if dimensional(case) else None


def pressure_scale(case: Case) -> float | None:
    """Return rho U^2 (Pa); the pressure of a frame is multiplied by it."""
    return case.fluid.density * case.tow.speed**2 if dimensional(case) else None


def force_per_span_scale(case: Case) -> float | None:
    """Return rho U^2 c / 2 (N/m): what a force coefficient is multiplied by, per unit span."""
    return 0.5 * pressure_scale(case) * reference_length(case) if dimensional(case) else None


def force_scale(case: Case) -> float | None:
    """Return rho U^2 c span / 2 (N): what a force coefficient is multiplied by."""
    if not dimensional(case) or span(case) is None:
        return None
    return force_per_span_scale(case) * span(case)


def moment_scale(case: Case) -> float | None:
    """Return rho U^2 c^2 span / 2 (N m): what a moment coefficient is multiplied by."""
    force = force_scale(case)
    return None if force is None else force * reference_length(case)


def tow_length(case: Case) -> float | None:
    """Return the travel of the run (m)."""
    length = reference_length(case)
    return case.run.travel * length if dimensional(case) else None


def seconds(case: Case, time: float) -> float | None:
    """Return a convective time in s."""
    scale = convective_time(case)
    return None if scale is None else time * scale


def spring_scale(case: Case) -> float | None:
    """Return rho U^2 c^2 span (N m/rad): what a dimensionless spring constant of a flap is multiplied by."""
    moment = moment_scale(case)
    return None if moment is None else 2 * moment


def damping_scale(case: Case) -> float | None:
    """Return rho U c^3 span (N m s/rad): what a dimensionless damping of a flap is multiplied by."""
    spring = spring_scale(case)
    return None if spring is None else spring * convective_time(case)


def mass_per_area_scale(case: Case) -> float | None:
    """Return rho c (kg/m2): what a dimensionless mass per area of a flap is multiplied by."""
    return case.fluid.density * reference_length(case) if dimensional(case) else None


def acceleration_scale(case: Case) -> float | None:
    """Return U^2 / c (m/s2): what a dimensionless acceleration is multiplied by."""
    return case.tow.speed**2 / reference_length(case) if dimensional(case) else None


# The start of the tow, in convective times and chords. Ramp of length T = 2 s0 / U, x = t / T:
# linear u = U x; smooth u = U (10 x^3 - 15 x^4 + 6 x^5); "hold acceleration": linear with T = 2 travel;
# "still": the carriage stays, U is only the reference speed, and travel counts convective times.


def ramp_time(case: Case) -> float:
    """Return how long the start lasts (convective times): 0 impulsive, and of an encoder's record all of it."""
    if case.tow.profile:
        return case.tow.profile[-1][0]
    if case.tow.start in ("impulsive", "still"):
        return 0.0
    if case.tow.start == "hold acceleration":
        return 2 * case.run.travel
    return 2 * case.tow.start_distance


def tow_speed(case: Case, time: float) -> float:
    """Return the speed of the carriage at a convective time, in U; past the end of a record its last value."""
    if case.tow.start == "still" and not case.tow.profile:
        return 0.0
    if time <= 0 and case.tow.start != "impulsive" and not case.tow.profile:
        return 0.0
    if case.tow.profile:
        return _record_at(case.tow.profile, time)[0]
    ramp = ramp_time(case)
    if time >= ramp:
        return 1.0
    x = time / ramp
    return x**3 * (10 - 15 * x + 6 * x * x) if case.tow.start == "smooth" else x


def travel_at(case: Case, time: float) -> float:
    """Return the travel of the carriage at a convective time (chords), exact for the start shapes.

    For an encoder's record the speed is taken as linear between its points.
    """
    if time <= 0:
        return 0.0
    if case.tow.profile:
        return _record_at(case.tow.profile, time)[1]
    ramp = ramp_time(case)
    if ramp == 0:
        return time
    x = min(time / ramp, 1.0)
    if case.tow.start == "smooth":
        return ramp * x**4 * (2.5 - 3 * x + x * x) + max(0.0, time - ramp)
    return ramp * 0.5 * x * x + max(0.0, time - ramp)


def _record_at(profile: tuple[tuple[float, float], ...], time: float) -> tuple[float, float]:
    """Return (speed, travel) of a piecewise linear record."""
    travel = 0.0
    last = bisect_right(profile, (time, float("inf")))
    for (t0, u0), (t1, u1) in zip(profile[: max(last - 1, 0)], profile[1:last], strict=True):
        travel += 0.5 * (u0 + u1) * (t1 - t0)
    if last == 0:
        return profile[0][1], 0.0
    t0, u0 = profile[last - 1]
    if last == len(profile):
        return u0, travel + u0 * (time - t0)
    t1, u1 = profile[last]
    u = u0 + (u1 - u0) * (time - t0) / (t1 - t0)
    return u, travel + 0.5 * (u0 + u) * (time - t0)


def time_at(case: Case, travel: float) -> float:
    """Return the convective time at which the carriage has gone `travel` chords, by bisection."""
    low, high = 0.0, 1.0
    while travel_at(case, high) < travel and high < 1e9:
        high *= 2
    for _ in range(200):
        middle = 0.5 * (low + high)
        if middle in (low, high):
            break
        low, high = (middle, high) if travel_at(case, middle) < travel else (low, middle)
    return high


def duration(case: Case) -> float:
    """Return how long the run lasts (convective times)."""
    return time_at(case, case.run.travel)
