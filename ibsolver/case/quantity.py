"""Quantities with units: ``"50 mm"`` to 0.05, by dimension.

A unit is one or several factors with whole exponents: ``kg/m3``, ``m2/s``, ``N m/rad``, ``N m s/rad``, ``m/s2``.
An angle is a dimension of its own here, so that a frequency in ``rad/s`` is not taken for one in ``Hz``.
"""

from __future__ import annotations

import difflib
import math
import re
from dataclasses import dataclass

from ibsolver.errors import IbsolverError


class QuantityError(IbsolverError):
    """A text is not a quantity of the dimension that is due."""

    exit_status = 3

    def __init__(self, problem: str, suggestion: str = ""):
        self.problem = problem
        self.suggestion = suggestion
        super().__init__(f"{problem} {suggestion}".strip())


@dataclass(frozen=True)
class Dimension:
    """A physical dimension: exponents of (length, mass, time, temperature, angle), SI unit, usual spelling."""

    name: str
    exponents: tuple[int, int, int, int, int]
    si: str
    example: str


DIMENSIONS: dict[str, Dimension] = {
    dimension.name: dimension
    for dimension in (
        Dimension("length", (1, 0, 0, 0, 0), "m", "50 mm"),
        Dimension("speed", (1, 0, -1, 0, 0), "m/s", "125 mm/s"),
        Dimension("acceleration", (1, 0, -2, 0, 0), "m/s2", "9.81 m/s2"),
        Dimension("time", (0, 0, 1, 0, 0), "s", "5 min"),
        Dimension("frequency", (0, 0, -1, 0, 0), "Hz", "0.5 Hz"),
        Dimension("angle", (0, 0, 0, 0, 1), "rad", "15 deg"),
        Dimension("angular rate", (0, 0, -1, 0, 1), "rad/s", "10 deg/s"),
        Dimension("temperature", (0, 0, 0, 1, 0), "K", "20 degC"),
        Dimension("density", (-3, 1, 0, 0, 0), "kg/m3", "998 kg/m3"),
        Dimension("mass per area", (-2, 1, 0, 0, 0), "kg/m2", "1.1 kg/m2"),
        Dimension("kinematic viscosity", (2, 0, -1, 0, 0), "m2/s", "1.0e-6 m2/s"),
        Dimension("dynamic viscosity", (-1, 1, -1, 0, 0), "Pa s", "1.0 mPa s"),
        Dimension("spring constant", (2, 1, -2, 0, -1), "N m/rad", "1e-4 N m/rad"),
        Dimension("angular damping", (2, 1, -1, 0, -1), "N m s/rad", "1e-6 N m s/rad"),
        Dimension("force", (1, 1, -2, 0, 0), "N", "20 mN"),
        Dimension("pressure", (-1, 1, -2, 0, 0), "Pa", "101325 Pa"),
    )
}

_DEGREE = math.pi / 180
_UNITS: dict[str, tuple[float, tuple[int, int, int, int, int]]] = {
    "m": (1.0, (1, 0, 0, 0, 0)),
    "km": (1e3, (1, 0, 0, 0, 0)),
    "cm": (1e-2, (1, 0, 0, 0, 0)),
    "mm": (1e-3, (1, 0, 0, 0, 0)),
    "um": (1e-6, (1, 0, 0, 0, 0)),
    "in": (0.0254, (1, 0, 0, 0, 0)),
    "ft": (0.3048, (1, 0, 0, 0, 0)),
    "s": (1.0, (0, 0, 1, 0, 0)),
    "ms": (1e-3, (0, 0, 1, 0, 0)),
    "min": (60.0, (0, 0, 1, 0, 0)),
    "h": (3600.0, (0, 0, 1, 0, 0)),
    "kg": (1.0, (0, 1, 0, 0, 0)),
    "g": (1e-3, (0, 1, 0, 0, 0)),
    "mg": (1e-6, (0, 1, 0, 0, 0)),
    "K": (1.0, (0, 0, 0, 1, 0)),
    "rad": (1.0, (0, 0, 0, 0, 1)),
    "mrad": (1e-3, (0, 0, 0, 0, 1)),
    "deg": (_DEGREE, (0, 0, 0, 0, 1)),
    "Hz": (1.0, (0, 0, -1, 0, 0)),
    "kHz": (1e3, (0, 0, -1, 0, 0)),
    "mHz": (1e-3, (0, 0, -1, 0, 0)),
    "N": (1.0, (1, 1, -2, 0, 0)),
    "mN": (1e-3, (1, 1, -2, 0, 0)),
    "uN": (1e-6, (1, 1, -2, 0, 0)),
    "kN": (1e3, (1, 1, -2, 0, 0)),
    "Pa": (1.0, (-1, 1, -2, 0, 0)),
    "kPa": (1e3, (-1, 1, -2, 0, 0)),
    "hPa": (1e2, (-1, 1, -2, 0, 0)),
    "mPa": (1e-3, (-1, 1, -2, 0, 0)),
    "P": (0.1, (-1, 1, -1, 0, 0)),
    "cP": (1e-3, (-1, 1, -1, 0, 0)),
    "St": (1e-4, (2, 0, -1, 0, 0)),
    "cSt": (1e-6, (2, 0, -1, 0, 0)),
    "l": (1e-3, (3, 0, 0, 0, 0)),
    "ml": (1e-6, (3, 0, 0, 0, 0)),
}
_OFFSET = {"degC": 273.15}
_SPELLINGS = str.maketrans({"µ": "u", "μ": "u", "²": "2", "³": "3", "·": " ", "*": " ", "⁻": "-", "¹": "1", "−": "-"})
_RESPELT = {"°": "deg", "°C": "degC", "º": "deg", "ºC": "degC"}
_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_COMMA = re.compile(r"[+-]?[0-9]+,[0-9]+(?:[eE][+-]?[0-9]+)?(?![0-9,])")
_FACTOR = re.compile(r"([A-Za-z]+)\^?(-?[1-9])?$")
_NOT_FINITE = re.compile(r"[+-]?(nan|inf|infinity)\b", re.IGNORECASE)
_NEAR = {
    "C": "degC", "celsius": "degC", "Celsius": "degC", "degrees": "deg", "degree": "deg", "sec": "s", "second": "s",
    "seconds": "s", "hz": "Hz", "n": "N", "MM": "mm", "meter": "m", "metre": "m", "inch": "in", "minutes": "min",
    "hours": "h", "KG": "kg", "mn": "mN", "pa": "Pa", "hour": "h", "minute": "min", "radians": "rad",
}  # fmt: skip


def parse_quantity(text: str, dimension: str) -> float:
    """Return the value of `text` in the SI unit of `dimension`.

    Parameters
    ----------
    text : str
        Number, space, unit: ``"50 mm"``.
    dimension : str
        A key of `DIMENSIONS`.

    Raises
    ------
    QuantityError
        With a sentence that shows the right spelling.

    Examples
    --------
    >>> parse_quantity("125 mm/s", "speed")
    0.125
    >>> parse_quantity("1 cSt", "kinematic viscosity")
    1e-06
    """
    number, unit = _split(text.strip(), DIMENSIONS[dimension])
    return _to_si(number, unit, dimension)


def unit_to_si(value: float, unit: str, dimension: str) -> float:
    """Return `value`, given in `unit`, in the SI unit of `dimension`."""
    return _to_si(value, unit, dimension)


def si_to_unit(value: float, unit: str) -> float:
    """Return `value`, given in SI, in `unit`."""
    if unit in _OFFSET:
        return value - _OFFSET[unit]
    return value / _factor_of(unit)[0]


def _to_si(number: float, unit: str, dimension: str) -> float:
    due = DIMENSIONS[dimension]
    if unit in _OFFSET:
        factor, exponents, offset = 1.0, DIMENSIONS["temperature"].exponents, _OFFSET[unit]
    else:
        (factor, exponents), offset = _factor_of(unit, due), 0.0
    if exponents != due.exponents:
        raise QuantityError(f"{unit} is not a unit of {due.name}.", _write(due))
    value = number / round(1 / factor) if _is_inverse(factor) else number * factor
    if not math.isfinite(value + offset):
        raise QuantityError("is too large to be a number.", _write(due))
    return value + offset


def _is_inverse(factor: float) -> bool:
    """Return whether 1/factor is whole: dividing by it then rounds as decimal reading does (125 mm/s = 0.125 m/s)."""
    return factor < 1 and 1 / factor < 1e15 and abs(1 / factor - round(1 / factor)) < 1e-12 / factor


def _split(text: str, due: Dimension) -> tuple[float, str]:
    """Return number and unit of a text such as ``"50 mm"``."""
    if _NOT_FINITE.match(text):
        raise QuantityError("is not a finite number.", _write(due))
    comma = _COMMA.match(text)
    if comma:
        corrected = comma.group().replace(",", ".") + text[comma.end():]
        raise QuantityError("has a decimal comma.", f'Write a decimal point: "{corrected}".')
    match = _NUMBER.match(text)
    if match is None:
        raise QuantityError(f"is not a number with a unit of {due.name}.", _write(due))
    number, unit = float(match.group()), text[match.end():].strip()
    if not math.isfinite(number):
        raise QuantityError("is too large to be a number.", _write(due))
    if not unit:
        raise QuantityError("has no unit.", f'Write for example "{match.group()} {due.example.split(" ", 1)[1]}".')
    return number, _RESPELT.get(unit, unit)


def _factor_of(unit: str, due: Dimension | None = None) -> tuple[float, tuple[int, ...]]:
    """Return (factor to SI, exponents) of a unit text; factors with a temperature offset are not units here."""
    example = _write(due) if due else ""
    plain = unit.translate(_SPELLINGS).replace("°", "deg")
    parts = plain.split("/")
    if not plain.strip() or any(not part.strip() for part in parts):
        raise QuantityError(f'"{_short(unit)}" is not a unit.', example)
    if any(len(part.split()) > 1 for part in parts[1:]):
        raise QuantityError(f'"{_short(unit)}" can be read in two ways.', f"Put one factor after each slash. {example}")
    factor, exponents = 1.0, [0, 0, 0, 0, 0]
    for position, part in enumerate(parts):
        for word in part.split():
            one, powers, power = _symbol(word, unit, due)
            power = -power if position else power
            factor *= _power(one, power)
            exponents = [total + power * single for total, single in zip(exponents, powers, strict=True)]
    return factor, tuple(exponents)


def _power(base: float, exponent: int) -> float:
    """Return base**exponent without the rounding of 0.01**-3."""
    if exponent < 0 and _is_inverse(base):
        return float(round(1 / base) ** -exponent)
    return base**exponent


def _symbol(word: str, unit: str, due: Dimension | None) -> tuple[float, tuple[int, ...], int]:
    """Return (factor, exponents, power) of one factor of a unit, such as ``m2``."""
    example = _write(due) if due else ""
    if word == "1":
        return 1.0, (0, 0, 0, 0, 0), 1
    match = _FACTOR.match(word)
    if match is None or match.group(1) not in _UNITS:
        near = _near(word, due) if due else ""
        remedy = f"Did you mean {near}? {example}" if near else example
        raise QuantityError(f'"{_short(unit)}" is not a known unit.', remedy)
    return *_UNITS[match.group(1)], int(match.group(2) or 1)


def _near(word: str, due: Dimension) -> str:
    """Return the unit of the due dimension that `word` may have meant, or nothing."""
    fitting = [name for name, (_, exponents) in _UNITS.items() if exponents == due.exponents]
    fitting += ["degC"] if due.name == "temperature" else []
    if _NEAR.get(word) in fitting:
        return _NEAR[word]
    near = difflib.get_close_matches(word, fitting, 5, 0.5)
    return min(near, key=lambda name: (name[0] != word[0], abs(len(name) - len(word))), default="")


def _write(due: Dimension) -> str:
    return f'Write for example "{due.example}".'


def _short(text: str) -> str:
    return text if len(text) <= 24 else text[:21] + "..."
