"""A case as plain data and back, its hash, and how two cases differ.

`encode` writes everything, defaults included, so that ``resolved.json`` alone says what was run. Numbers keep all
their digits: JSON writes a float such that it reads back to the same bits.
"""

from __future__ import annotations

import dataclasses
import hashlib
import json
import math
import types
import typing

from ibsolver.case.model import Case
from ibsolver.errors import CaseError, Fault

SCHEMA = 1
_HIDDEN = {"text", "file"}  # of a Case: what the user wrote, not what it means
_NAMES_ONLY = {"title", "file", "profile_file", "source"}  # words that change no result
_SI_UNITS = {
    "fluid.density": "kg/m3", "fluid.kinematic_viscosity": "m2/s", "fluid.temperature": "K",
    "plate.chord": "m", "plate.span": "m", "plate.incidence": "rad", "plate.pivot": "chords",
    "cylinder.diameter": "m", "cylinder.span": "m",
    "outline.chord": "m", "outline.span": "m", "outline.incidence": "rad", "outline.pivot": "chords",
    "outline.points": "chords",
    "flaps.hinge": "chords", "flaps.length": "chords", "flaps.opening": "rad", "flaps.thickness": "m",
    "flaps.density": "kg/m3", "flaps.mass_per_area": "kg/m2", "flaps.spring": "N m/rad",
    "flaps.damping": "N m s/rad", "flaps.rest": "rad", "flaps.limits": "rad", "flaps.opening_rate": "rad/s",
    "flaps.motion": "rad; times in chord / speed",
    "tow.speed": "m/s", "tow.start_distance": "chords", "tow.profile": "(time in chord / speed, speed in tow speeds)",
    "incidence_motion": "rad; times in chord / speed", "heave_motion": "chords; times in chord / speed",
    "tank.wall_above": "chords", "tank.wall_below": "chords", "tank.gravity": "m/s2",
    "tank.gravity_direction": "rad",
    "domain.upstream": "chords", "domain.downstream": "chords", "domain.lateral": "chords",
    "domain.above": "chords", "domain.below": "chords", "domain.width": "chords", "domain.height": "chords",
    "domain.*.speed": "tow speeds", "initial.stream": "tow speeds",
    "grid.core_margin": "chords", "grid.largest_cell": "chords",
    "run.travel": "chords", "run.slip_tolerance": "tow speeds", "run.fixed_step": "chord / speed",
    "output.frame_every": "chords", "output.checkpoint_every": "s",
}  # fmt: skip


def encode(case: Case) -> dict[str, object]:
    """Return a case as plain data for JSON: schema number, units, and everything it holds.

    Examples
    --------
    >>> from ibsolver.case.read import read_case_text
    >>> case = read_case_text('[plate]\\nincidence = "5 deg"\\n[tow]\\nreynolds = 100\\n')
    >>> decode(encode(case)) == case
    True
    """
    data = {name: value for name, value in _plain(case).items() if name not in _HIDDEN}
    return {"schema": SCHEMA, "units": dict(_SI_UNITS), "case": data}


def _plain(value: object) -> object:
    """Return dataclasses as dicts and tuples as lists, floats of the model as floats."""
    if dataclasses.is_dataclass(value):
        hints = typing.get_type_hints(type(value))
        names = [field.name for field in dataclasses.fields(value)]
        return {name: _plain(_as_declared(getattr(value, name), hints[name])) for name in names}
    if isinstance(value, tuple):
        return [_plain(item) for item in value]
    return value


def _as_declared(value: object, hint: object) -> object:
    """Return whole numbers as floats where the model declares floats, and no negative zeros."""
    number = isinstance(value, (int, float)) and not isinstance(value, bool)
    return float(value) + 0.0 if number and hint is not int else value


def decode(data: dict[str, object]) -> Case:
    """Return the case that `encode` wrote.

    Raises
    ------
    CaseError
        If the data is not of this schema.
    """
    try:
        if data["schema"] != SCHEMA:
            raise ValueError(f"its schema is {data['schema']}, not {SCHEMA}")
        return _build(Case, data["case"])
    except (KeyError, TypeError, ValueError, AttributeError) as error:
        why = f"missing {error}" if isinstance(error, KeyError) else str(error)
        problem, remedy = f"does not hold a case of this version: {why}.", "Run the case again from its case.toml."
        raise CaseError([Fault("resolved.json", 0, "", "", problem, remedy)]) from None


def _build(hint: object, data: object) -> object:
    """Return `data` as the type that the model declares."""
    if isinstance(hint, types.UnionType):
        if data is None:
            return None
        hint = next(one for one in typing.get_args(hint) if one is not type(None))
    if dataclasses.is_dataclass(hint):
        hints = typing.get_type_hints(hint)
        unknown = set(data) - set(hints)
        if unknown:
            raise ValueError(f"unknown entries {', '.join(sorted(unknown))}")
        return hint(**{name: _build(hints[name], value) for name, value in data.items()})
    if typing.get_origin(hint) is tuple:
        arguments = typing.get_args(hint)
        inner = arguments[:1] * len(data) if arguments[-1] is Ellipsis else arguments
        return tuple(_build(one, item) for one, item in zip(inner, data, strict=True))
    if hint is float and (isinstance(data, bool) or not isinstance(data, (int, float)) or not math.isfinite(data)):
        raise ValueError(f"{data!r} is not a number")
    if hint in (str, bool, int) and type(data) is not hint:
        raise ValueError(f"{data!r} is not of the kind due")
    return float(data) if hint is float else data


def case_hash(case: Case) -> str:
    """Return 16 hexadecimal digits over all that affects a run, its length and output included."""
    return _digest(_essential(case))


def physics_hash(case: Case) -> str:
    """Return 16 hexadecimal digits over all that affects the flow, so that a run may be resumed with another length.

    Travel and output are left out; the travel stays in where it shapes the tow ("hold acceleration").
    """
    data = _essential(case)
    data.pop("output")
    if case.tow.start != "hold acceleration" or case.tow.profile:
        data["run"].pop("travel")
    return _digest(data)


def _essential(case: Case) -> dict[str, dict]:
    return _without_names(encode(case)["case"])


def _without_names(data: object) -> object:
    if isinstance(data, dict):
        return {name: _without_names(value) for name, value in data.items() if name not in _NAMES_ONLY}
    return [_without_names(item) for item in data] if isinstance(data, list) else data


def _digest(data: object) -> str:
    text = json.dumps(data, sort_keys=True, separators=(",", ":"), allow_nan=False)
    return hashlib.sha256(text.encode()).hexdigest()[:16]


def differences(one: Case, other: Case) -> list[str]:
    """Return a sentence for every entry in which two cases differ: ``tow.reynolds: 1000.0 and 2000.0.``"""
    first, second = _flat(encode(one)["case"]), _flat(encode(other)["case"])
    names = list(first) + [name for name in second if name not in first]
    return [
        f"{name}: {_word(first, name)} and {_word(second, name)}."
        for name in names
        if first.get(name) != second.get(name)
    ]


def _word(flat: dict[str, object], name: str) -> str:
    if flat.get(name) is None:
        return "nothing"
    text = json.dumps(flat[name])
    if len(text) <= 60:
        return text
    return f"{len(flat[name])} entries" if isinstance(flat[name], list) else text[:57] + "..."


def _flat(data: object, name: str = "") -> dict[str, object]:
    """Return nested dicts as one, with dotted names; lists of dicts are numbered, others stay whole, empty ones go."""
    if isinstance(data, dict) and data:
        pairs = [(f"{name}.{key}" if name else key, value) for key, value in data.items()]
    elif isinstance(data, list) and data and isinstance(data[0], dict):
        pairs = [(f"{name}[{index}]", value) for index, value in enumerate(data)]
    else:
        return {} if data == [] else {name: data}
    flat: dict[str, object] = {}
    for key, value in pairs:
        flat.update(_flat(value, key))
    return flat
