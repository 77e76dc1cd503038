"""Fluid properties against published tables."""

from __future__ import annotations

import pytest

from ibsolver.case import fluids
from ibsolver.case.fluids import FluidError

# IAPWS-95 (R12-08) at 0.101325 MPa, as tabulated in ITTC 7.5-02-01-03: degC, kg/m3, 1e-6 m2/s
ITTC = [(10, 999.7025, 1.30629), (15, 999.1026, 1.13859), (20, 998.2072, 1.00340), (25, 997.0476, 0.89266)]

# Glycerine Producers' Association 1963, "Physical properties of glycerine and its solutions", at 20 degC (from memory):
# mass fraction, density in kg/m3, dynamic viscosity in mPa s
GLYCEROL = [(0.2, 1046.9, 1.76), (0.4, 1099.3, 3.72), (0.5, 1126.3, 6.00), (0.6, 1153.8, 10.8), (0.8, 1208.5, 60.1)]


@pytest.mark.parametrize(("celsius", "density", "viscosity"), ITTC)
def test_fresh_water_against_the_ittc_table(celsius, density, viscosity):
    water = fluids.fresh_water(celsius + 273.15)
    assert water.density == pytest.approx(density, rel=2e-6)
    assert water.kinematic_viscosity == pytest.approx(viscosity * 1e-6, rel=5e-5)


@pytest.mark.parametrize("celsius", [0.1, 4, 12.5, 21, 33, 40])
def test_fresh_water_against_the_iapws_package(celsius):
    iapws = pytest.importorskip("iapws")
    oracle = iapws.IAPWS95(T=celsius + 273.15, P=0.101325)
    water = fluids.fresh_water(celsius + 273.15)
    assert water.density == pytest.approx(oracle.rho, rel=2e-6)
    assert water.kinematic_viscosity == pytest.approx(oracle.nu, rel=5e-5)


def test_viscosity_formula_check_value():
    # IAPWS SR6-08, table of check values: 889.996774e-6 Pa s at 298.15 K (from memory; the package agrees)
    assert fluids.water_viscosity(298.15) == pytest.approx(889.996774e-6, rel=1e-9)


@pytest.mark.parametrize(("fraction", "density", "viscosity"), GLYCEROL)
def test_glycerol_solution_against_published_tables(fraction, density, viscosity):
    solution = fluids.glycerol_solution(293.15, fraction)
    assert solution.density == pytest.approx(density, rel=5e-4)
    assert solution.kinematic_viscosity * solution.density == pytest.approx(viscosity * 1e-3, rel=0.03)


def test_glycerol_solution_without_glycerol_is_nearly_water():
    solution, water = fluids.glycerol_solution(293.15, 0.0), fluids.fresh_water(293.15)
    assert solution.density == pytest.approx(water.density, rel=3e-4)
    assert solution.kinematic_viscosity == pytest.approx(water.kinematic_viscosity, rel=0.01)


def test_pure_glycerol():
    # Density 1261 kg/m3 and viscosity 1412 mPa s at 20 degC (Glycerine Producers' Association 1963, from memory)
    glycerol = fluids.glycerol_solution(293.15, 1.0)
    assert glycerol.density == pytest.approx(1261.1, rel=3e-4)
    assert glycerol.kinematic_viscosity * glycerol.density == pytest.approx(1.412, rel=0.01)


def test_air_of_the_standard_atmosphere():
    # ISO 2533 at sea level: 288.15 K, 1.225 kg/m3, 1.4607e-5 m2/s
    air = fluids.air(288.15)
    assert air.density == pytest.approx(1.225, rel=1e-5)
    assert air.kinematic_viscosity == pytest.approx(1.4607e-5, rel=1e-4)


@pytest.mark.parametrize(
    ("make", "what", "low", "high"),
    [
        (fluids.fresh_water, "fresh water", 0, 40),
        (lambda t: fluids.glycerol_solution(t, 0.5), "glycerol solution", 10, 40),
        (fluids.air, "air", -50, 100),
    ],
)
def test_temperature_outside_the_range_is_refused(make, what, low, high):
    make(low + 273.15)
    make(high + 273.15)
    for celsius in (low - 0.1, high + 0.1):
        with pytest.raises(FluidError) as caught:
            make(celsius + 273.15)
        assert str(caught.value) == (
            f"temperature: is outside the range of the formulas for {what}: {low} degC to {high} degC. "
            'Give density and kinematic_viscosity with kind = "given" instead.'
        )


def test_mass_fraction_outside_the_range_is_refused():
    with pytest.raises(FluidError, match="at least 0 and at most 1"):
        fluids.glycerol_solution(293.15, 1.1)


def test_every_fluid_names_its_source():
    assert "Tanaka" in fluids.fresh_water(293.15).source and "SR6-08" in fluids.fresh_water(293.15).source
    assert "Cheng 2008" in fluids.glycerol_solution(293.15, 0.3).source
    assert "Sutherland" in fluids.air(293.15).source
    assert fluids.given(1000, 1e-6).source == "given in the case file"
