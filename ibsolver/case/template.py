"""Starter cases for ``ibsolver new KIND``: the schema table's own words beside sensible values."""

from __future__ import annotations

from ibsolver.case.schema import SECTION, Key, default_text
from ibsolver.errors import UsageError

Lines = tuple[tuple[str, str | None], ...]  # key and TOML text; None: the key is shown commented out
Parts = tuple[tuple[str, Lines], ...]

_FLUID: Parts = (("fluid", (("kind", '"fresh water"'), ("temperature", '"21 degC"'))),)
_PLATE: Parts = (
    ("plate", (("chord", '"60 mm"'), ("span", '"200 mm"'), ("incidence", '"18 deg"'), ("pivot", "0.25"))),
)
_FIXED = (("name", '"front"'), ("hinge", "0.12"), ("side", '"upper"'), ("length", "0.20"))
_FLAP: Parts = (("flap", (*_FIXED, ("mount", '"fixed"'), ("opening", '"20 deg"'))),)
_FREE: Parts = (
    ("flap", (*_FIXED, ("mount", '"free"'), ("opening", '"5 deg"'), ("thickness", '"0.5 mm"'),
              ("density", '"2200 kg/m3"'), ("spring", '"1e-5 N m/rad"'), ("rest", '"5 deg"'), ("damping", None),
              ("limits", '["3 deg", "80 deg"]'))),
)  # fmt: skip
_DRIVEN: Parts = (
    ("flap", (*_FIXED, ("mount", '"driven"'),
              ("opening", '{kind = "ramp", from = "20 deg", to = "40 deg", begin = 1.0, duration = 1.0}'))),
)  # fmt: skip
_STEADY: Parts = (
    ("tow", (("speed", '"20 mm/s"'), ("reynolds", None), ("start", '"smooth"'), ("start_distance", "0.5"),
             ("profile", None))),
)  # fmt: skip
_ACCELERATING: Parts = (
    ("tow", (("speed", '"20 mm/s"'), ("reynolds", None), ("start", '"hold acceleration"'),
             ("coefficient_speed", '"final"'))),
)  # fmt: skip
_PITCH: Parts = (
    ("motion", (("incidence", '{kind = "ramp-hold-return", from = "0 deg", to = "40 deg", begin = 1.0, '
                              'duration = 2.0, hold = 1.0}'), ("heave", None))),
)  # fmt: skip
_TANK: Parts = (("tank", (("wall_above", None), ("wall_below", None))),)
_RUN: Parts = (
    ("grid", (("cells_per_chord", "48"), ("stretch", None))),
    ("run", (("travel", "4"), ("courant", "0.5"), ("slip_tolerance", "1e-3"))),
    ("output", (("frame_every", "0.1"), ("checkpoint_every", '"5 min"'))),
)

KINDS: dict[str, tuple[str, Parts]] = {
    "plate": ("A thin plate, towed at constant speed", _FLUID + _PLATE + _STEADY + _TANK + _RUN),
    "plate-with-flap": (
        "A thin plate with a fixed flap, towed at constant speed",
        _FLUID + _PLATE + _FLAP + _STEADY + _TANK + _RUN,
    ),
    "accelerating-plate": (
        "A thin plate under constant acceleration",
        _FLUID + _PLATE + _ACCELERATING + _TANK + _RUN,
    ),
    "accelerating-plate-with-flap": (
        "A thin plate with a fixed flap under constant acceleration",
        _FLUID + _PLATE + _FLAP + _ACCELERATING + _TANK + _RUN,
    ),
    "plate-with-free-flap": (
        "A thin plate with a flap free on its hinge, towed at constant speed",
        _FLUID + _PLATE + _FREE + _STEADY + _TANK + _RUN,
    ),
    "plate-with-driven-flap": (
        "A thin plate with a driven flap, towed at constant speed",
        _FLUID + _PLATE + _DRIVEN + _STEADY + _TANK + _RUN,
    ),
    "pitching-plate": (
        "A thin plate that pitches up, holds and returns while it is towed",
        _FLUID
        + (("plate", (("chord", '"60 mm"'), ("span", '"200 mm"'), ("incidence", None), ("pivot", "0.25"))),)
        + _STEADY
        + _PITCH
        + _RUN,
    ),
    "cylinder": (
        "A circular cylinder, dimensionless",
        (("cylinder", (("diameter", None),)),)
        + (("tow", (("reynolds", "100"), ("start", '"smooth"'), ("start_distance", "0.5"))),)
        + (("domain", (("upstream", "12"), ("downstream", "25"), ("lateral", "12"))),)
        + (("grid", (("cells_per_chord", "32"),)), ("run", (("travel", "100"),)), ("output", (("frame_every", "1"),))),
    ),
    "outline": (
        "A closed body whose outline is read from a file beside this one",
        _FLUID
        + (("outline", (("file", '"outline.csv"'), ("chord", '"60 mm"'), ("span", '"200 mm"'),
                        ("incidence", '"10 deg"'), ("pivot", "0.25"))),)
        + (("tow", (("speed", '"8 mm/s"'), ("start", '"smooth"'), ("start_distance", "0.5"))),)
        + _RUN,
    ),
    "box": (
        "A box without a body, dimensionless: a lid slides over it",
        (("tow", (("reynolds", "100"), ("start", '"impulsive"'))),)
        + (("domain", (("width", "1"), ("height", "1"), ("left", '"no slip"'), ("right", '"no slip"'),
                       ("bottom", '"no slip"'), ("top", '{condition = "no slip", speed = 1.0}'))),)
        + (("initial", (("field", '"rest"'),)), ("grid", (("cells_per_chord", "64"),)))
        + (("run", (("travel", "30"),)), ("output", (("frame_every", "5"),))),
    ),
}  # fmt: skip

OUTLINE_CSV = """\
# A rhombus, 100 long and 16 high: replace it by the outline of your body.
x,y
0,0
50,-8
100,0
50,8
"""
_COLUMN = 32
_OPTIONAL = ("tank", "motion")


def new_case(kind: str) -> str:
    """Return a commented starter case that reads without faults.

    Parameters
    ----------
    kind : str
        A key of `KINDS`. "outline" needs a file ``outline.csv`` beside it, such as `OUTLINE_CSV`.

    Raises
    ------
    UsageError
        For an unknown kind.
    """
    import difflib

    if kind not in KINDS:
        near = difflib.get_close_matches(kind[:60], list(KINDS), 1)
        hint = f"Did you mean {near[0]}?" if near else f"Known: {', '.join(KINDS)}."
        raise UsageError(f"There is no starter case {kind[:60]!r}. {hint}")
    title, parts = KINDS[kind]
    lines = [
        f"# {title}.",
        "#",
        "# Whatever has a dimension is written in quotes with its unit; lengths along the plate and the travel are",
        "# plain numbers in chords. Lines that begin with # are left out; take the # away to use them.",
        "",
        f'title = "{title}"',
    ]
    for name, keys in parts:
        lines += _section(name, keys)
    return "\n".join(lines) + "\n"


def _section(name: str, keys: Lines) -> list[str]:
    section = SECTION[name]
    head = f"[[{name}]]" if section.array else f"[{name}]"
    written = [_line(section.key(key), value) for key, value in keys]
    if name in _OPTIONAL and all(value is None for _, value in keys):
        return ["", f"# {section.help}", f"# {head}", *written]
    return ["", f"# {section.help}", head, *written]


def _line(key: Key, value: str | None) -> str:
    """Return one key with the schema's help beside it, or above it where the line would be long."""
    text = f"{key.name} = {key.example}" if value is None else f"{key.name} = {value}"
    text = f"# {text}" if value is None else text
    default = "" if key.required or key.default is None else f" Default {default_text(key)}."
    comment = f"# {key.help}{default}"
    beside = f"{text:<{_COLUMN}}{comment}"
    return beside if len(text) < _COLUMN and len(beside) <= 120 else f"{comment}\n{text}"
