"""One raw TOML value, checked against its key of the schema table."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from ibsolver.case.quantity import DIMENSIONS, QuantityError, parse_quantity, unit_to_si
from ibsolver.case.schema import Key, allowed, kind_text
from ibsolver.errors import IbsolverError


class ValueFault(IbsolverError):
    """A value does not fit its key; `problem` and `suggestion` are sentences.

    Where the fault lies inside another file that the case names, `file`, `line` and `found` say where and what.
    """

    exit_status = 3

    def __init__(self, problem: str, suggestion: str = "", file: str = "", line: int = 0, found: str = ""):
        self.problem = problem
        self.suggestion = suggestion
        self.file = file
        self.line = line
        self.found = found
        super().__init__(f"{problem} {suggestion}".strip())


@dataclass(frozen=True)
class Length:
    """A length as written: in chords, or (`si`) in metres."""

    value: float
    si: bool

    def in_chords(self, chord: float | None) -> float | None:
        """Return the length in chords; None where a chord in metres is needed and missing."""
        if not self.si:
            return self.value
        return None if chord is None else self.value / chord


def read_value(raw: object, key: Key) -> object:
    """Return the checked value of `raw`: a float in SI, an int, a text, a tuple.

    Raises
    ------
    ValueFault
        With what is wrong, what is allowed, and the right spelling.
    """
    return _READERS[key.kind](raw, key)


def show(value: object, limit: int = 60) -> str:
    """Return a raw TOML value for a message: one line, printable, short."""
    return _shortened(_shown(value, 0), limit)


def _shown(value: object, depth: int) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return '"' + printable(value[:200]) + '"'
    if isinstance(value, int):
        return str(value) if abs(value) < 10**40 else "a number of more than 40 digits"
    if isinstance(value, (list, tuple)):
        return "[...]" if depth > 2 else "[" + ", ".join(_shown(item, depth + 1) for item in value[:6]) + "]"
    if isinstance(value, dict):
        pairs = list(value.items())[:6]
        inner = ", ".join(f"{printable(str(name)[:60])} = {_shown(item, depth + 1)}" for name, item in pairs)
        return "{...}" if depth > 2 else "{" + inner + "}"
    return printable(str(value)[:200])


def printable(text: str) -> str:
    """Return `text` with what a terminal could obey written as escapes."""
    return "".join(c if c.isprintable() else c.encode("unicode_escape", "backslashreplace").decode() for c in text)


def _shortened(text: str, limit: int) -> str:
    return text if len(text) <= limit else text[: limit - 3] + "..."


def as_number(raw: object, key: Key) -> float:
    """Return a finite float."""
    if isinstance(raw, bool) or not isinstance(raw, (int, float)):
        raise ValueFault(f"must be a {kind_text(key)}{_range_text(key)}.", _number_hint(raw, key))
    try:
        number = float(raw)
    except OverflowError:
        raise ValueFault("is too large to be a number.", _range_hint(key)) from None
    if not math.isfinite(number):
        raise ValueFault("is not a finite number.", _range_hint(key))
    return number + 0.0


def _number_hint(raw: object, key: Key) -> str:
    if isinstance(raw, str):
        text = raw.strip()
        try:
            if math.isfinite(float(text)):
                return f"Write it without quotes: {text}."
        except ValueError:
            pass
        return f"Write a plain number, such as {key.example}."
    return f"Write for example {key.example}."


def _range_text(key: Key) -> str:
    text = allowed(key)
    return f", {text}" if text else ""


def _range_hint(key: Key) -> str:
    text = allowed(key)
    return f"Allowed: {text}." if text else f"Write for example {key.example}."


def _number(raw: object, key: Key) -> float:
    number = as_number(raw, key)
    check_range(number, key, lambda bound: bound)
    return number


def check_range(value: float, key: Key, convert: Callable[[float], float]) -> None:
    """Raise a `ValueFault` unless `value` lies between the key's bounds, which `convert` takes to its unit."""
    low = None if key.low is None else convert(key.low)
    high = None if key.high is None else convert(key.high)
    slack = 1e-12  # "180 deg" must pass although its radians are rounded
    too_low = low is not None and (value <= low if key.low_open else value < low - slack * abs(low))
    too_high = high is not None and (value >= high if key.high_open else value > high + slack * abs(high))
    if too_low or too_high:
        raise ValueFault(f"must be {allowed(key)}.", _bound_hint(key, too_high))


def _bound_hint(key: Key, too_high: bool) -> str:
    if too_high and key.name == "courant":
        return (
            "The time scheme (second-order Adams-Bashforth) loses its stability above it, because the velocity at a "
            "plate's edge grows like one over the square root of the cell width. Write 0.5."
        )
    if too_high and key.name == "reynolds":
        return "A two-dimensional laminar flow is not a model of the tank there. Tow slower or use a smaller chord."
    return f"Write for example {key.example}." if key.example else ""


def _integer(raw: object, key: Key) -> int:
    if isinstance(raw, bool) or not isinstance(raw, int):
        raise ValueFault(f"must be a {kind_text(key)}{_range_text(key)}.", f"Write for example {key.example}.")
    check_range(min(max(raw, -(10**18)), 10**18), key, lambda bound: bound)
    return raw


def _boolean(raw: object, key: Key) -> bool:
    if not isinstance(raw, bool):
        raise ValueFault("must be true or false, without quotes.", f"Write {key.example}.")
    return raw


def _text(raw: object, key: Key) -> str:
    if not isinstance(raw, str):
        raise ValueFault("must be a text in quotes.", f"Write for example {key.example}.")
    if len(raw) > 500:
        raise ValueFault("is longer than 500 characters.", "Shorten it.")
    return raw


def _file(raw: object, key: Key) -> str:
    if not isinstance(raw, str) or not raw.strip():
        raise ValueFault("must be the name of a file, in quotes.", f"Write for example {key.example}.")
    return raw


def _choice(raw: object, key: Key) -> str:
    import difflib

    if isinstance(raw, str) and raw in key.choices:
        return raw
    near = difflib.get_close_matches(str(raw)[:60].lower(), key.choices, 1, 0.5) if isinstance(raw, str) else []
    raise ValueFault(f"must be {allowed(key)}.", f'Did you mean "{near[0]}"?' if near else "")


def _quantity(raw: object, key: Key) -> float:
    value = parse_raw_quantity(raw, key)
    check_range(value, key, lambda bound: unit_to_si(bound, key.unit, key.dimension))
    return value + 0.0


def parse_raw_quantity(raw: object, key: Key) -> float:
    """Return a quantity in SI, not yet checked against the key's range."""
    name = DIMENSIONS[key.dimension].name
    if isinstance(raw, bool) or not isinstance(raw, (int, float, str)):
        raise ValueFault(f"must be a text in quotes: {_article(name)} {name} with its unit.", _example(key))
    if not isinstance(raw, str):
        as_number(raw, key)
        raise ValueFault(
            f"is a bare number where {_article(name)} {name} with its unit is due.",
            f'Write for example {key.name} = "{show(raw)} {key.unit}".',
        )
    try:
        return parse_quantity(raw, key.dimension)
    except QuantityError as error:
        raise ValueFault(error.problem, error.suggestion) from None


def _article(name: str) -> str:
    return "an" if name[0] in "aeiou" else "a"


def _example(key: Key) -> str:
    return f"Write for example {key.name} = {key.example}."


def _length(raw: object, key: Key) -> Length:
    """Return a length in chords or metres; the range of the key is one of chords."""
    if isinstance(raw, str):
        value = parse_raw_quantity(raw, key)
        if value < 0 or (value == 0 and key.low_open):
            raise ValueFault("must be greater than 0.", _example(key))
        return Length(value, si=True)
    number = as_number(raw, key)
    check_range(number, key, lambda bound: bound)
    return Length(number, si=False)


def _signed_length(raw: object, key: Key) -> Length:
    """Return a length of either sign; the range of the key is one of chords."""
    if isinstance(raw, str):
        return Length(parse_raw_quantity(raw, key), si=True)
    number = as_number(raw, key)
    check_range(number, key, lambda bound: bound)
    return Length(number, si=False)


def _pair(raw: object, key: Key, one: Callable[[object, Key], float], what: str) -> tuple[float, float]:
    if not isinstance(raw, list) or len(raw) != 2:
        raise ValueFault(f"must be {what} in brackets.", f"Write for example {key.name} = {key.example}.")
    return one(raw[0], key), one(raw[1], key)


def _pair_of_numbers(raw: object, key: Key) -> tuple[float, float]:
    return _pair(raw, key, _number, "two numbers")


def _pair_of_angles(raw: object, key: Key) -> tuple[float, float]:
    first, second = _pair(raw, key, _quantity, "two angles")
    if first > second:
        raise ValueFault("has its least value after its greatest.", "Swap the two.")
    return first, second


def _left_to_its_reader(raw: object, key: Key) -> object:
    """Return motions and sides as they are: `motions` and `sides` read them with lines of their own."""
    return raw


_READERS: dict[str, Callable[[object, Key], object]] = {
    "number": _number,
    "integer": _integer,
    "boolean": _boolean,
    "text": _text,
    "choice": _choice,
    "file": _file,
    "quantity": _quantity,
    "length": _length,
    "signed length": _signed_length,
    "pair of numbers": _pair_of_numbers,
    "pair of angles": _pair_of_angles,
    "motion": _left_to_its_reader,
    "angle or motion": _left_to_its_reader,
    "moved": _left_to_its_reader,
    "side": _left_to_its_reader,
}
