"""The frozen `Case`: what one case file says, checked, in SI units and radians.

Plain scalars and tuples only, so that a case compares and hashes. A length that the case file gives in
chords stays in chords here; everything with a unit string is in SI (m, s, kg, rad, K). In a purely
dimensionless run (`reynolds` without `[fluid]`) the SI fields are None.
"""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True)
class Fluid:
    """Fluid at rest in the tank; `source` names where its properties come from."""

    kind: str
    density: float  # kg/m3
    kinematic_viscosity: float  # m2/s
    source: str
    temperature: float | None = None  # K
    glycerol_mass_fraction: float | None = None


@dataclass(frozen=True)
class Plate:
    """Flat plate of zero thickness; the reference length is its chord."""

    chord: float | None  # m
    span: float | None  # m
    incidence: float  # rad, nose-up
    pivot: float = 0.25  # chords from the leading edge


@dataclass(frozen=True)
class Cylinder:
    """Circular cylinder; the reference length is its diameter."""

    diameter: float | None  # m
    span: float | None  # m


@dataclass(frozen=True)
class Outline:
    """Closed curve; `points` are in units of `chord`, counter-clockwise, first point not repeated."""

    file: str
    points: tuple[tuple[float, float], ...]
    chord: float | None  # m
    span: float | None  # m
    incidence: float = 0.0  # rad, nose-up
    pivot: float = 0.25  # chords from the leftmost point of the outline


@dataclass(frozen=True)
class Motion:
    """One quantity against time: incidence or opening (rad), or heave (chords).

    `begin`, `duration`, `hold`, `times` are in convective times c/U ("chords" of a steady tow).
    kind: "constant" | "ramp" | "ramp-hold-return" | "oscillation" | "table".
    """

    kind: str
    value: float = 0.0  # constant; start value of a ramp; mean of an oscillation
    to: float = 0.0  # value reached by a ramp
    begin: float = 0.0
    duration: float = 1.0
    hold: float = 0.0
    smoothing: str = "log-cosh"  # "log-cosh" | "quintic"
    smoothing_parameter: float = 0.9  # sigma of Eldredge, Wang & Ol (2009)
    amplitude: float = 0.0
    reduced_frequency: float = 0.0  # k = pi f c / U
    phase: float = 0.0  # rad
    times: tuple[float, ...] = ()
    values: tuple[float, ...] = ()
    file: str = ""  # table: where the values come from


@dataclass(frozen=True)
class Flap:
    """Rigid plate hinged on the main plate (or on another flap: `on`).

    A closed flap (opening 0) lies on its parent and points away from the parent's leading edge (or hinge).
    "upper" is the side to the left of the parent's own direction (leading to trailing edge, or hinge to tip).
    """

    name: str
    hinge: float  # chords from the leading edge (on another flap: from that flap's hinge)
    side: str  # "upper" | "lower"
    length: float  # chords
    mount: str  # "fixed" | "driven" | "free"
    opening: float  # rad from the plate surface; start value for "free"
    on: str = "plate"
    motion: Motion | None = None  # driven
    thickness: float | None = None  # m
    density: float | None = None  # kg/m3
    mass_per_area: float | None = None  # kg/m2
    spring: float = 0.0  # N m/rad, whole span
    damping: float = 0.0  # N m s/rad, whole span
    rest: float = 0.0  # rad
    limits: tuple[float, float] | None = None  # rad
    opening_rate: float = 0.0  # rad/s, start value for "free"


@dataclass(frozen=True)
class Tow:
    """Carriage motion. Exactly one of `profile` and `start` shapes the speed."""

    speed: float | None  # m/s, final
    reynolds: float  # final, on the reference length
    start: str = "smooth"  # "impulsive" | "linear" | "smooth" | "hold acceleration" | "still"
    start_distance: float = 0.5  # chords
    profile_file: str | None = None
    profile: tuple[tuple[float, float], ...] = ()  # (t U/c, u/U) from the encoder
    coefficient_speed: str = "final"  # "final" | "instantaneous": reference speed of coefficients


@dataclass(frozen=True)
class Tank:
    """Side walls that stay with the water (they slide past the carriage); distances in chords from the pivot."""

    wall_above: float | None = None
    wall_below: float | None = None
    gravity: float | None = None  # m/s2 if gravity lies in the plane of the flow
    gravity_direction: float | None = None  # rad, direction of gravity, 0 along the stream, -pi/2 "down"


@dataclass(frozen=True)
class Side:
    """Condition on one side of the domain; `speed` is the wall's tangential speed in units of U."""

    condition: str  # "inflow" | "outflow" | "slip" | "no slip" | "periodic"
    speed: float = 0.0
    profile: str = "uniform"  # inflow: "uniform" | "parabola" (mean of U over the height)


@dataclass(frozen=True)
class Domain:
    """Extent of the computed region in chords from the pivot (bodies), or a plain box (`width`, `height`)."""

    upstream: float = 6.0
    downstream: float = 10.0
    lateral: float = 6.0
    width: float | None = None  # box without a body: x from 0 to width
    height: float | None = None
    above: float | None = None  # chords, where it differs from `lateral`
    below: float | None = None
    left: Side = Side("inflow")
    right: Side = Side("outflow")
    bottom: Side = Side("slip")
    top: Side = Side("slip")


@dataclass(frozen=True)
class Initial:
    """Start field of a run: "rest" (the tow's own start) or an exact periodic vortex for verification."""

    field: str = "tow"  # "tow" | "taylor green" | "rest"
    stream: tuple[float, float] = (0.0, 0.0)  # superposed uniform stream, in U


@dataclass(frozen=True)
class Grid:
    """Resolution; lengths in chords."""

    cells_per_chord: float = 64
    stretch: float = 1.04  # growth ratio of cells outside the core
    core_margin: float = 0.15  # chords of uniform core around everything a body can reach
    largest_cell: float = 0.5  # chords; growth stops there
    uniform: bool = False  # no stretching at all


@dataclass(frozen=True)
class Run:
    """How far and how carefully to march."""

    travel: float = 8.0  # chords
    courant: float = 0.5
    slip_tolerance: float = 1e-3
    repeats: int = 4  # at most, solves of the body force a step
    fixed_step: float | None = None  # convective times; verification only


@dataclass(frozen=True)
class Output:
    """What is written when."""

    frame_every: float = 0.1  # chords of travel
    checkpoint_every: float = 300.0  # s of wall clock


@dataclass(frozen=True)
class Case:
    """One run, complete and checked. Build it with `ibsolver.load_case`."""

    title: str
    tow: Tow
    fluid: Fluid | None = None
    plate: Plate | None = None
    cylinder: Cylinder | None = None
    outline: Outline | None = None
    flaps: tuple[Flap, ...] = ()
    incidence_motion: Motion | None = None  # replaces plate.incidence in time
    heave_motion: Motion | None = None
    tank: Tank = field(default_factory=Tank)
    domain: Domain = field(default_factory=Domain)
    initial: Initial = field(default_factory=Initial)
    grid: Grid = field(default_factory=Grid)
    run: Run = field(default_factory=Run)
    output: Output = field(default_factory=Output)
    text: str = field(default="", compare=False, repr=False)  # the case file as the user wrote it
    file: str = field(default="", compare=False)  # its name
