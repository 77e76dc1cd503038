"""The one table of every key of a case file.

It drives reading, checking, the documentation (`schema_markdown`) and the starter cases of `ibsolver new`.
A validation library could read the values, but none of those at hand knows at which line of the file a value
stands, and it would need a second table for the help texts, units and starter cases; so this table is plain data
and the reader a few small functions over it.

Bounds and defaults are written in the unit that the key shows (``unit``), the way a user would write them.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from ibsolver.case.quantity import DIMENSIONS


@dataclass(frozen=True)
class Key:
    """One key.

    Parameters
    ----------
    name : str
        As written in the file.
    kind : str
        "number", "integer", "boolean", "text", "choice", "quantity", "length" (chords or a quantity), "motion",
        "angle or motion", "side", "file", "pair of numbers", "pair of angles".
    help : str
        One line; says what the number is counted in.
    dimension, unit : str
        Of quantities and lengths: dimension, and unit of the bounds and of the suggestion shown.
    default : object
        As a user would write it; None where the key may be absent (or is needed only together with others).
    required : bool
        Whether the section is invalid without it.
    low, high : float or None
        Allowed range, in `unit`; `low_open`, `high_open` exclude the end itself.
    choices : tuple of str
        Allowed words.
    example : str
        TOML text of a sensible value, for starter cases and messages.
    synonyms : tuple of str
        Other names people try; they only serve the suggestion.
    """

    name: str
    kind: str
    help: str
    dimension: str = ""
    unit: str = ""
    default: object = None
    required: bool = False
    low: float | None = None
    high: float | None = None
    low_open: bool = False
    high_open: bool = False
    choices: tuple[str, ...] = ()
    example: str = ""
    synonyms: tuple[str, ...] = ()


@dataclass(frozen=True)
class Section:
    """One table of the file; `nested` ones are inline tables that are values of keys of kind `nested`."""

    name: str
    help: str
    keys: tuple[Key, ...]
    array: bool = False
    nested: str = ""

    def key(self, name: str) -> Key:
        """Return the key called `name`."""
        return next(key for key in self.keys if key.name == name)


def _angle(name: str, help: str, low: float, high: float, **more: object) -> Key:
    return Key(name, "quantity", help, "angle", "deg", low=low, high=high, **more)


def _length(name: str, help: str, low: float, high: float, example: str, **more: object) -> Key:
    return Key(name, "quantity", help, "length", "mm", low=low, high=high, example=example, **more)


_SPAN = _length("span", "Width of the model across the flow, for loads in newtons.", 0.1, 1e5, '"200 mm"',
                synonyms=("width", "breadth"))  # fmt: skip
_INCIDENCE_HELP = "Angle of the chord to the stream, nose-up positive."
_PIVOT_HELP = "Pitch axis and moment reference, in chords from the leading edge."

SECTIONS: tuple[Section, ...] = (
    Section(
        "",
        "Top of the file.",
        (Key("title", "text", "One line that names the run in reports and plots.", default="",
             example='"Thin plate at 18 deg, constant-speed tow"', synonyms=("name",)),),
    ),
    Section(
        "fluid",
        "The fluid at rest in the tank. Leave the section out for a purely dimensionless run (then give tow.reynolds).",
        (
            Key("kind", "choice", "Fluid; its properties come from published correlations unless given.", required=True,
                choices=("fresh water", "glycerol solution", "air", "given"), example='"fresh water"'),
            Key("temperature", "quantity", "Temperature of the fluid.", "temperature", "degC", low=-50, high=150,
                example='"21 degC"'),
            Key("glycerol_mass_fraction", "number", "Mass of glycerol over mass of solution (glycerol solution only).",
                low=0, high=1, example="0.4"),
            Key("density", "quantity", 'Density (kind = "given" only).', "density", "kg/m3", low=1e-3,
                high=30000, example='"998 kg/m3"'),
            Key("kinematic_viscosity", "quantity", 'Kinematic viscosity (kind = "given" only).', "kinematic viscosity",
                "m2/s", low=1e-9, high=1, example='"1.0e-6 m2/s"', synonyms=("viscosity", "nu")),
        ),
    ),
    Section(
        "plate",
        "Flat plate of zero thickness; its chord is the unit of length.",
        (
            _length("chord", "Chord; needed with [fluid].", 0.01, 1e5, '"60 mm"', synonyms=("length", "c")),
            _SPAN,
            _angle("incidence", _INCIDENCE_HELP, -180, 180, example='"18 deg"',
                   synonyms=("angle", "angle_of_attack", "aoa", "alpha")),
            Key("pivot", "number", _PIVOT_HELP, default=0.25, low=-5, high=6, example="0.25", synonyms=("axis",)),
        ),
    ),
    Section(
        "cylinder",
        "Circular cylinder; its diameter is the unit of length (what is said of chords is then meant in diameters).",
        (
            _length("diameter", "Diameter; needed with [fluid].", 0.01, 1e5, '"20 mm"', synonyms=("d",)),
            _SPAN,
        ),
    ),
    Section(
        "outline",
        "Closed curve read from a file; its extent along x is the chord and the unit of length.",
        (
            Key("file", "file", "CSV of x,y (any unit; scaled to the chord) or a mesh file; beside the case file.",
                required=True, example='"outline.csv"'),
            _length("chord", "Chord; needed with [fluid].", 0.01, 1e5, '"60 mm"'),
            _SPAN,
            _angle("incidence", _INCIDENCE_HELP, -180, 180, default="0 deg", example='"10 deg"'),
            Key("pivot", "number", _PIVOT_HELP, default=0.25, low=-5, high=6, example="0.25"),
        ),
    ),
    Section(
        "flap",
        "Rigid flap hinged on the plate (or on another flap); repeat the section for several.",
        (
            Key("name", "text", "Short name (letters, digits, _ and -); heads its columns in history.csv.",
                required=True, example='"front"'),
            Key("on", "text", 'What it is hinged on: "plate" or the name of another flap.', default="plate",
                example='"plate"'),
            Key("hinge", "number", "Hinge, in chords from the leading edge (on a flap: from that flap's hinge).",
                required=True, low=0, high=5, example="0.12", synonyms=("position", "x")),
            Key("side", "choice", "Surface it opens from; upper is the suction side at positive incidence.",
                default="upper", choices=("upper", "lower"), example='"upper"'),
            Key("length", "number", "Length from hinge to tip, in chords.", required=True, low=0.001, high=5,
                example="0.20", synonyms=("chord",)),
            Key("mount", "choice", "How it is held.", default="fixed", choices=("fixed", "driven", "free"),
                example='"fixed"', synonyms=("kind", "type")),
            Key("opening", "angle or motion", "Angle from the plate surface; start value if free; a motion if driven.",
                "angle", "deg", low=-180, high=180, required=True, example='"20 deg"',
                synonyms=("angle", "deflection")),
            Key("thickness", "quantity", "Free: thickness.", "length", "mm", low=0, high=1e4, example='"0.5 mm"'),
            Key("density", "quantity", "Free: density of its material.", "density", "kg/m3", low=0, high=30000,
                example='"2200 kg/m3"'),
            Key("mass_per_area", "quantity", "Free: mass per area, instead of thickness and density.", "mass per area",
                "kg/m2", low=0, high=1e5, example='"1.1 kg/m2"', synonyms=("mass",)),
            Key("spring", "quantity", "Free: spring constant over the whole span.", "spring constant", "N m/rad",
                default="0 N m/rad", low=0, high=1e6, example='"1e-4 N m/rad"', synonyms=("stiffness",)),
            Key("damping", "quantity", "Free: damping over the whole span.", "angular damping", "N m s/rad",
                default="0 N m s/rad", low=0, high=1e6, example='"1e-6 N m s/rad"'),
            _angle("rest", "Free: opening at which the spring carries no torque.", -180, 180, default="0 deg",
                   example='"10 deg"', synonyms=("rest_angle",)),
            Key("limits", "pair of angles", "Free: stops, least and greatest opening.", "angle", "deg", low=-180,
                high=180, example='["3 deg", "80 deg"]', synonyms=("stops",)),
            Key("opening_rate", "quantity", "Free: rate of opening at the start.", "angular rate", "deg/s",
                default="0 deg/s", low=-1e5, high=1e5, example='"0 deg/s"'),
        ),
        array=True,
    ),
    Section(
        "tow",
        "How the carriage moves. Give speed or reynolds, never both.",
        (
            Key("speed", "quantity", "Final speed of the carriage.", "speed", "mm/s", low=1e-3, high=1e5,
                example='"20 mm/s"', synonyms=("velocity", "u")),
            Key("reynolds", "number", "Reynolds number speed * chord / viscosity at the final speed.", low=0.01,
                high=20000, example="1200", synonyms=("re", "reynolds_number")),
            Key("start", "choice", "Shape of the start; the ramp lasts 2 start_distance / speed.", default="smooth",
                choices=("impulsive", "linear", "smooth", "hold acceleration", "still"), example='"smooth"'),
            Key("start_distance", "number", "Travel during a linear or smooth start, in chords.", default=0.5,
                low=0.001, high=1e4, example="0.5"),
            Key("profile", "file", "CSV time_s, speed_m_s of the carriage's encoder, instead of start.",
                example='"carriage.csv"'),
            Key("coefficient_speed", "choice", "Speed that coefficients refer to.", default="final",
                choices=("final", "instantaneous"), example='"final"'),
        ),
    ),
    Section(
        "motion",
        "Pitch and heave on top of the tow. Each key is a table of a motion (below) or a CSV file.",
        (
            Key("incidence", "motion", "Incidence against time; replaces the body's fixed incidence.", "angle", "deg",
                low=-180, high=180,
                example='{kind = "ramp", from = "0 deg", to = "40 deg", begin = 1.0, duration = 2.0}',
                synonyms=("pitch",)),
            Key("heave", "motion", "Height of the pivot against time, in chords or a length.", "length", "mm", low=-100,
                high=100, example='{kind = "oscillation", amplitude = 0.1, reduced_frequency = 0.5}'),
        ),
    ),
    Section(
        "tank",
        "Side walls that stay with the water (they slide past the carriage); open water where left out.",
        (
            Key("wall_above", "length", "Distance from the pivot to the wall on the lift side, in chords or a length.",
                "length", "mm", low=0.01, high=1000, example='"250 mm"', synonyms=("above", "top")),
            Key("wall_below", "length", "Distance from the pivot to the other wall, in chords or a length.", "length",
                "mm", low=0.01, high=1000, example='"250 mm"', synonyms=("below", "bottom")),
            Key("gravity", "quantity", "Gravity, if it lies in the plane of the flow (free flaps).", "acceleration",
                "m/s2", low=0, high=100, example='"9.81 m/s2"'),
            _angle("gravity_direction", "Direction of gravity: 0 deg along the stream, -90 deg against the lift.", -180,
                   180, example='"-90 deg"'),
        ),
    ),
    Section(
        "domain",
        "Extent of the computed region in chords from the pivot; or width and height of a box without a body.",
        (
            Key("upstream", "number", "Distance to the inflow side, in chords.", default=6.0, low=0.01,
                high=1000, example="6"),
            Key("downstream", "number", "Distance to the outflow side, in chords.", default=10.0, low=0.01,
                high=1000, example="10"),
            Key("lateral", "number", "Distance to either side across the stream, in chords.", default=6.0, low=0.01,
                high=1000, example="6"),
            Key("above", "number", "Distance to the upper side, in chords, if not lateral.", low=0.01,
                high=1000, example="6"),
            Key("below", "number", "Distance to the lower side, in chords, if not lateral.", low=0.01,
                high=1000, example="6"),
            Key("width", "number", "Box without a body: length along x, in units of length.", low=0.01,
                high=1000, example="1"),
            Key("height", "number", "Box without a body: length along y, in units of length.", low=0.01,
                high=1000, example="1"),
            Key("left", "side", "Condition on the left side.", default="inflow", example='"inflow"'),
            Key("right", "side", "Condition on the right side.", default="outflow", example='"outflow"'),
            Key("bottom", "side", "Condition on the lower side.", default="slip", example='"slip"'),
            Key("top", "side", "Condition on the upper side.", default="slip", example='"slip"'),
        ),
    ),
    Section(
        "initial",
        "Velocity at the start.",
        (
            Key("field", "choice", "What fills the domain at time 0.", default="tow",
                choices=("tow", "taylor green", "rest"), example='"rest"'),
            Key("stream", "pair of numbers", "Uniform stream added to the vortex, (x, y) in units of speed.",
                default=(0.0, 0.0), low=-100, high=100, example="[1.0, 0.0]"),
        ),
    ),
    Section(
        "grid",
        "Resolution.",
        (
            Key("cells_per_chord", "number", "Cells per chord in the uniform core.", default=64, low=4, high=2048,
                example="64", synonyms=("cells", "resolution")),
            Key("stretch", "number", "Growth of the cells outside the core, from one to the next.", default=1.04, low=1,
                low_open=True, high=1.2, example="1.04"),
            Key("core_margin", "number", "Uniform core around all that a body can reach, in chords.", default=0.15,
                low=0, high=100, example="0.15"),
            Key("largest_cell", "number", "Growth stops at this width, in chords.", default=0.5, low=1e-4,
                high=100, example="0.5"),
            Key("uniform", "boolean", "No stretching at all (boxes are always uniform).", default=False,
                example="false"),
        ),
    ),
    Section(
        "run",
        "How far and how carefully to march.",
        (
            Key("travel", "number", "Length of the run, in chords of travel.", default=8.0, low=1e-3,
                high=10000, example="8", synonyms=("distance", "duration")),
            Key("courant", "number", "Greatest Courant number max(|u|/dx + |v|/dy) dt.", default=0.5, low=0.001,
                high=0.7, example="0.5", synonyms=("cfl",)),
            Key("slip_tolerance", "number", "Slip left at the worst point of a body, in units of the tow speed.",
                default=1e-3, low=1e-12, high=0.1, example="1e-3", synonyms=("tolerance",)),
            Key("repeats", "integer", "Solves of the body force a step, at most.", default=4, low=1, high=100,
                example="4"),
            Key("fixed_step", "number", "Step in convective times; for verification only.", low=1e-7,
                high=1, example="1e-3", synonyms=("step", "dt", "time_step")),
        ),
    ),
    Section(
        "output",
        "What is written when.",
        (
            Key("frame_every", "number", "Chords of travel between stored fields.", default=0.1, low=1e-5,
                high=10000, example="0.1"),
            Key("checkpoint_every", "quantity", "Wall-clock time between checkpoints.", "time", "min", default="5 min",
                low=0.01, high=1e5, example='"5 min"'),
        ),
    ),
    Section(
        "motion table",
        "A motion: {kind = ..., ...}. Values are angles with a unit, or for heave chords or a length.",
        (
            Key("kind", "choice", "Shape of the motion.", required=True,
                choices=("constant", "ramp", "ramp-hold-return", "oscillation", "table"), example='"ramp"'),
            Key("value", "moved", "constant: the value.", example='"10 deg"'),
            Key("from", "moved", "ramp: value before; the body's own incidence, or 0, if left out.", example='"0 deg"',
                synonyms=("start",)),
            Key("to", "moved", "ramp: value reached.", example='"40 deg"', synonyms=("end",)),
            Key("begin", "number", "Begin, in convective times chord / speed.", default=0.0, low=0, high=1e5,
                example="1.0"),
            Key("duration", "number", "ramp: how long it lasts, in convective times.", default=1.0, low=0.001,
                high=1e5, example="2.0"),
            Key("hold", "number", "ramp-hold-return: how long the value is held, in convective times.", default=0.0,
                low=0, high=1e5, example="1.0"),
            Key("smoothing", "choice", "ramp: form of its corners.", default="log-cosh",
                choices=("log-cosh", "quintic"), example='"log-cosh"'),
            Key("smoothing_parameter", "number", "log-cosh: sigma of Eldredge, Wang & Ol (2009); sharper toward 1.",
                default=0.9, low=0.1, high=0.999, example="0.9"),
            Key("mean", "moved", "oscillation: mean value.", example='"10 deg"'),
            Key("amplitude", "moved", "oscillation: half the way from peak to peak.", example='"5 deg"'),
            Key("frequency", "quantity", "oscillation: frequency; needs a chord and a speed.", "frequency", "Hz",
                low=1e-6, high=1e4, example='"0.5 Hz"'),
            Key("reduced_frequency", "number", "oscillation: k = pi f chord / speed, instead of frequency.",
                low=1e-6, high=1000, example="0.5", synonyms=("k",)),
            _angle("phase", "oscillation: phase of the sine at its begin.", -360, 360, default="0 deg",
                   example='"90 deg"'),
            Key("file", "file", "table: CSV with the header that names the units, such as time_s, incidence_deg.",
                example='"pitch.csv"'),
        ),
        nested="motion",
    ),
    Section(
        "side table",
        'A side of the domain: a word such as "slip", or {condition = ..., ...}.',
        (
            Key("condition", "choice", "Condition.", required=True,
                choices=("inflow", "outflow", "slip", "no slip", "periodic"), example='"no slip"', synonyms=("kind",)),
            Key("speed", "number", "no slip: speed of the wall along itself (toward +x or +y), in tow speeds.",
                default=0.0, low=-100, high=100, example="1.0"),
            Key("profile", "choice", "inflow: shape; a parabola has its mean at the tow speed.", default="uniform",
                choices=("uniform", "parabola"), example='"parabola"'),
        ),
        nested="side",
    ),
)  # fmt: skip

SECTION: dict[str, Section] = {section.name: section for section in SECTIONS}
FILE_SECTIONS: tuple[Section, ...] = tuple(section for section in SECTIONS if not section.nested)


def schema() -> Iterator[tuple[Section, Key]]:
    """Yield every key with its section, in the order of the documentation."""
    for section in SECTIONS:
        for key in section.keys:
            yield section, key


def allowed(key: Key) -> str:
    """Return what a key allows, as the end of a sentence: ``greater than 0 and at most 0.7``."""
    if key.choices:
        return "one of " + ", ".join(f'"{choice}"' for choice in key.choices)
    if key.kind == "boolean":
        return "true or false"
    unit = f" {key.unit}" if key.unit and key.kind not in ("length", "signed length") else ""
    parts = []
    if key.low is not None:
        parts.append(f"{'greater than' if key.low_open else 'at least'} {key.low:g}{unit}")
    if key.high is not None:
        parts.append(f"{'less than' if key.high_open else 'at most'} {key.high:g}{unit}")
    return " and ".join(parts)


def kind_text(key: Key) -> str:
    """Return what has to be written for a key, in words."""
    if key.kind == "quantity":
        return f"{key.dimension} with a unit, such as {key.example}"
    if key.kind in ("length", "signed length"):
        return f"chords (a number) or a length, such as {key.example}"
    if key.kind == "moved":
        return f"angle with a unit, such as {key.example}; for heave chords or a length"
    texts = {
        "number": "number",
        "integer": "whole number",
        "boolean": "true or false",
        "text": "text in quotes",
        "choice": "one word or phrase in quotes",
        "file": "name of a file beside the case file",
        "motion": "motion table or CSV file",
        "angle or motion": f"angle with a unit, such as {key.example}; driven: motion table or CSV file",
        "side": "word or side table",
        "pair of numbers": "two numbers in brackets",
        "pair of angles": f"two angles in brackets, such as {key.example}",
    }
    return texts[key.kind]


def schema_markdown() -> str:
    """Return the table as Markdown, one part a section."""
    lines: list[str] = []
    for section in SECTIONS:
        head = f"[[{section.name}]]" if section.array else f"[{section.name}]"
        head = section.name if section.nested else head if section.name else "top of the file"
        lines += [f"### {head}", "", section.help, ""]
        lines += ["| key | meaning | write | allowed | default |", "|---|---|---|---|---|"]
        lines += [_markdown_row(key) for key in section.keys]
        lines.append("")
    return "\n".join(lines)


def _markdown_row(key: Key) -> str:
    cells = (f"`{key.name}`", key.help, kind_text(key), allowed(key), default_text(key))
    return "| " + " | ".join(cell.replace("|", "\\|") for cell in cells) + " |"


def default_text(key: Key) -> str:
    """Return the default as TOML text, "required", or nothing."""
    if key.required:
        return "required"
    if key.default is None:
        return ""
    return toml_text(key.default)


def toml_text(value: object) -> str:
    """Return a plain value as TOML text."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return f'"{value}"'
    if isinstance(value, tuple):
        return "[" + ", ".join(toml_text(item) for item in value) + "]"
    return f"{value:g}" if isinstance(value, float) else str(value)


def usual_unit(key: Key) -> str:
    """Return the unit a key is usually written in, or nothing."""
    return key.unit or (DIMENSIONS[key.dimension].si if key.dimension else "")
