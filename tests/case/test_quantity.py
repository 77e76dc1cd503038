"""Units to SI: factors are those of the SI brochure (9th edition) and of the international inch of 1959."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from ibsolver.case.quantity import DIMENSIONS, QuantityError, parse_quantity, si_to_unit, unit_to_si


@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("50 mm", "length", 0.05),
        ("5cm", "length", 0.05),
        ("2 in", "length", 0.0508),
        ("1 ft", "length", 0.3048),
        ("250 µm", "length", 250e-6),
        ("125 mm/s", "speed", 0.125),
        ("7.5 m/min", "speed", 0.125),
        ("15 deg", "angle", math.pi / 12),
        ("15°", "angle", math.pi / 12),
        ("-0.5 rad", "angle", -0.5),
        ("20 degC", "temperature", 293.15),
        ("20 °C", "temperature", 293.15),
        ("293.15 K", "temperature", 293.15),
        ("998 kg/m3", "density", 998.0),
        ("0.998 g/cm3", "density", 998.0),
        ("0.998 g/ml", "density", 998.0),
        ("998 kg m-3", "density", 998.0),
        ("1.0e-6 m2/s", "kinematic viscosity", 1e-6),
        ("1 mm2/s", "kinematic viscosity", 1e-6),
        ("1 mm²/s", "kinematic viscosity", 1e-6),
        ("1 cSt", "kinematic viscosity", 1e-6),
        ("1 mPa s", "dynamic viscosity", 1e-3),
        ("1 cP", "dynamic viscosity", 1e-3),
        ("1 Pa·s", "dynamic viscosity", 1.0),
        ("1e-4 N m/rad", "spring constant", 1e-4),
        ("0 N m s/rad", "angular damping", 0.0),
        ("5 mN m s/rad", "angular damping", 5e-3),
        ("5 min", "time", 300.0),
        ("0.5 h", "time", 1800.0),
        ("9.81 m/s2", "acceleration", 9.81),
        ("9.81 m/s^2", "acceleration", 9.81),
        ("0.5 Hz", "frequency", 0.5),
        ("0.5 1/s", "frequency", 0.5),
        ("90 deg/s", "angular rate", math.pi / 2),
        ("1.1 kg/m2", "mass per area", 1.1),
        (".5 mm", "length", 0.5e-3),
        ("+5. mm", "length", 5e-3),
    ],
)
def test_value_in_si(text, dimension, value):
    assert parse_quantity(text, dimension) == pytest.approx(value, rel=1e-15, abs=0)


def test_decimal_units_round_like_decimals():
    assert parse_quantity("125 mm/s", "speed") == 0.125
    assert parse_quantity("60 mm", "length") == 0.06
    assert parse_quantity("0.998 g/cm3", "density") == 998.0


@pytest.mark.parametrize(
    ("text", "dimension", "sentence"),
    [
        ("50", "length", 'has no unit. Write for example "50 mm".'),
        ("0,5 mm", "length", 'has a decimal comma. Write a decimal point: "0.5 mm".'),
        ("50 mm", "speed", 'mm is not a unit of speed. Write for example "125 mm/s".'),
        ("20 degC", "angle", 'degC is not a unit of angle. Write for example "15 deg".'),
        ("20 C", "temperature", '"C" is not a known unit. Did you mean degC? Write for example "20 degC".'),
        ("5 mn", "length", '"mn" is not a known unit. Did you mean mm? Write for example "50 mm".'),
        ("5 furlong", "length", '"furlong" is not a known unit. Write for example "50 mm".'),
        ("nan mm", "length", 'is not a finite number. Write for example "50 mm".'),
        ("-inf mm", "length", 'is not a finite number. Write for example "50 mm".'),
        ("1e400 mm", "length", 'is too large to be a number. Write for example "50 mm".'),
        ("1e308 km", "length", 'is too large to be a number. Write for example "50 mm".'),
        ("mm", "length", 'is not a number with a unit of length. Write for example "50 mm".'),
        ("", "length", 'is not a number with a unit of length. Write for example "50 mm".'),
        ("1_000 mm", "length", '"_000 mm" is not a known unit. Write for example "50 mm".'),
        ("1 N m/rad s", "angular damping",
         '"N m/rad s" can be read in two ways. Put one factor after each slash. Write for example "1e-6 N m s/rad".'),
        ("1 m/", "speed", '"m/" is not a unit. Write for example "125 mm/s".'),
        ("1 rad/s", "frequency", 'rad/s is not a unit of frequency. Write for example "0.5 Hz".'),
    ],
)  # fmt: skip
def test_refused_with_the_right_spelling(text, dimension, sentence):
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, dimension)
    assert str(caught.value) == sentence


def test_every_example_parses_in_its_own_dimension_only():
    for dimension in DIMENSIONS.values():
        parse_quantity(dimension.example, dimension.name)
        for other in DIMENSIONS.values():
            if other.exponents != dimension.exponents:
                with pytest.raises(QuantityError):
                    parse_quantity(dimension.example, other.name)


@pytest.mark.parametrize(
    ("unit", "dimension"),
    [("mm", "length"), ("deg", "angle"), ("degC", "temperature"), ("N m/rad", "spring constant"), ("min", "time")],
)
def test_there_and_back(unit, dimension):
    assert si_to_unit(unit_to_si(12.5, unit, dimension), unit) == pytest.approx(12.5, rel=1e-13)


@given(st.text(max_size=30), st.sampled_from(sorted(DIMENSIONS)))
def test_any_text_is_a_finite_number_or_refused(text, dimension):
    try:
        assert math.isfinite(parse_quantity(text, dimension))
    except QuantityError as error:
        assert error.problem


@given(st.floats(-1e6, 1e6), st.sampled_from(["mm", "cm", "m", "in", "um"]))
def test_any_number_with_a_unit_of_length_is_read(number, unit):
    factor = {"mm": 1e-3, "cm": 1e-2, "m": 1.0, "in": 0.0254, "um": 1e-6}[unit]
    assert parse_quantity(f"{number!r} {unit}", "length") == pytest.approx(number * factor, rel=1e-15)
