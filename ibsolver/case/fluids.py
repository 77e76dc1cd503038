"""Density and viscosity of the fluid in the tank, from published correlations, each with its source and range.

All temperatures are in K at the interface. At atmospheric pressure (0.1 MPa); the depth of a tank changes nothing
that matters here.
"""

from __future__ import annotations

import math

from ibsolver.case.model import Fluid
from ibsolver.errors import IbsolverError

ZERO_CELSIUS = 273.15
PRESSURE = 101325.0  # Pa
GAS_CONSTANT_AIR = 287.05287  # J/(kg K), dry air, ISO 2533

WATER_SOURCE = (
    "density: Tanaka et al. 2001, Metrologia 38, 301 (without dissolved air); "
    "viscosity: IAPWS SR6-08 (liquid water at 0.1 MPa)"
)
GLYCEROL_SOURCE = (
    "viscosity: Cheng 2008, Ind. Eng. Chem. Res. 47, 3285; density: Volk & Kaehler 2018, Exp. Fluids 59, 75 "
    "(fitted from 15 to 30 degC, extrapolated outside)"
)
AIR_SOURCE = "density: ideal gas, dry air at 101325 Pa (ISO 2533); viscosity: Sutherland's law (ISO 2533 constants)"
GIVEN_SOURCE = "given in the case file"


class FluidError(IbsolverError):
    """A property is asked for outside the range of its correlation; `problem` and `suggestion` are sentences."""

    exit_status = 3

    def __init__(self, key: str, problem: str, suggestion: str = ""):
        self.key = key
        self.problem = problem
        self.suggestion = suggestion
        super().__init__(f"{key}: {problem} {suggestion}".strip())


def fresh_water(temperature: float) -> Fluid:
    """Return fresh water at atmospheric pressure.

    Parameters
    ----------
    temperature : float
        K, from 0 to 40 degC (range of the density formula).

    Raises
    ------
    FluidError
        Outside the range.

    Examples
    --------
    >>> round(fresh_water(293.15).density, 3)
    998.207
    """
    _within(temperature, 0, 40, "fresh water")
    density = water_density(temperature)
    viscosity = water_viscosity(temperature) / density
    return Fluid("fresh water", density, viscosity, WATER_SOURCE, temperature)


def water_density(temperature: float) -> float:
    """Return the density (kg/m3) of air-free water at `temperature` (K): Tanaka et al. 2001, equation (1)."""
    celsius = temperature - ZERO_CELSIUS
    a1, a2, a3, a4, a5 = -3.983035, 301.797, 522528.9, 69.34881, 999.974950
    return a5 * (1 - (celsius + a1) ** 2 * (celsius + a2) / (a3 * (celsius + a4)))


def water_viscosity(temperature: float) -> float:
    """Return the dynamic viscosity (Pa s) of liquid water at 0.1 MPa and `temperature` (K): IAPWS SR6-08."""
    reduced = temperature / 300
    terms = ((280.68, -1.9), (511.45, -7.7), (61.131, -19.6), (0.45903, -40.0))
    return 1e-6 * sum(factor * reduced**power for factor, power in terms)


def glycerol_solution(temperature: float, mass_fraction: float) -> Fluid:
    """Return a solution of glycerol in water.

    Parameters
    ----------
    temperature : float
        K, from 10 to 40 degC (the viscosity formula holds from 0 to 100 degC, the density is fitted from 15 to 30).
    mass_fraction : float
        Mass of glycerol over mass of solution, 0 to 1.

    Raises
    ------
    FluidError
        Outside the ranges.
    """
    _within(temperature, 10, 40, "glycerol solution")
    if not 0 <= mass_fraction <= 1:
        raise FluidError("glycerol_mass_fraction", "must be at least 0 and at most 1.", "Write for example 0.4.")
    celsius = temperature - ZERO_CELSIUS
    density = glycerol_solution_density(celsius, mass_fraction)
    viscosity = glycerol_solution_viscosity(celsius, mass_fraction) / density
    return Fluid("glycerol solution", density, viscosity, GLYCEROL_SOURCE, temperature, mass_fraction)


def glycerol_solution_viscosity(celsius: float, mass_fraction: float) -> float:
    """Return the dynamic viscosity (Pa s) of a glycerol solution: Cheng 2008, equations (6), (11), (12), (21), (22)."""
    p = 0.705 - 0.0017 * celsius
    q = (4.9 + 0.036 * celsius) * p**2.5
    c = mass_fraction
    weight = 1 - c + p * q * c * (1 - c) / (p * c + q * (1 - c))
    water = 1.790 * math.exp((-1230 - celsius) * celsius / (36100 + 360 * celsius))
    glycerol = 12100 * math.exp((-1233 + celsius) * celsius / (9900 + 70 * celsius))
    return 1e-3 * water**weight * glycerol ** (1 - weight)


def glycerol_solution_density(celsius: float, mass_fraction: float) -> float:
    """Return the density (kg/m3) of a glycerol solution: Volk & Kaehler 2018, volumes added and then contracted."""
    water = 1000 * (1 - abs((celsius - 3.98) / 615) ** 1.71)
    glycerol = 1273.3 - 0.6121 * celsius
    added = 1 / ((1 - mass_fraction) / water + mass_fraction / glycerol)
    strength = 1.78e-6 * celsius**2 - 1.82e-4 * celsius + 1.41e-2
    return added * (1 + strength * max(0.0, math.sin(math.pi * mass_fraction**1.31)) ** 0.81)


def air(temperature: float) -> Fluid:
    """Return dry air at 101325 Pa and `temperature` (K), from -50 to 100 degC."""
    _within(temperature, -50, 100, "air")
    density = PRESSURE / (GAS_CONSTANT_AIR * temperature)
    viscosity = 1.458e-6 * temperature**1.5 / (temperature + 110.4)  # Sutherland's law, constants of ISO 2533
    return Fluid("air", density, viscosity / density, AIR_SOURCE, temperature)


def given(density: float, kinematic_viscosity: float, temperature: float | None = None) -> Fluid:
    """Return a fluid of given density (kg/m3) and kinematic viscosity (m2/s)."""
    return Fluid("given", density, kinematic_viscosity, GIVEN_SOURCE, temperature)


def _within(temperature: float, low: float, high: float, what: str) -> None:
    celsius = temperature - ZERO_CELSIUS
    if not low - 1e-9 <= celsius <= high + 1e-9:
        raise FluidError(
            "temperature",
            f"is outside the range of the formulas for {what}: {low:g} degC to {high:g} degC.",
            'Give density and kinematic_viscosity with kind = "given" instead.',
        )
