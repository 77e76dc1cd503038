"""Motion tables and motion files."""

from __future__ import annotations

import math

import pytest

from .helpers import BARE, FLAP, PLATE, faults, one_fault, read

FREE_INCIDENCE = BARE.replace('incidence = "15 deg"\n', "")
DEGREE = math.pi / 180


def with_incidence(table: str, base: str = FREE_INCIDENCE) -> str:
    return base + f"[motion]\nincidence = {table}\n"


def test_ramp():
    motion = read(
        with_incidence(
            '{kind = "ramp", from = "5 deg", to = "40 deg", begin = 1.0, duration = 2.0, smoothing = "quintic"}'
        )
    ).incidence_motion
    assert (motion.kind, motion.begin, motion.duration, motion.smoothing) == ("ramp", 1.0, 2.0, "quintic")
    assert motion.value == pytest.approx(5 * DEGREE) and motion.to == pytest.approx(40 * DEGREE)


def test_incidence_of_the_plate_follows_from_the_motion_and_the_other_way_round():
    case = read(with_incidence('{kind = "ramp", from = "5 deg", to = "40 deg"}'))
    assert case.plate.incidence == case.incidence_motion.value == pytest.approx(5 * DEGREE)
    case = read(with_incidence('{kind = "ramp", to = "40 deg"}', BARE))
    assert case.incidence_motion.value == case.plate.incidence == pytest.approx(15 * DEGREE)


def test_ramp_hold_return_has_the_published_defaults():
    # sigma = 0.9: smoothing parameter of Eldredge, Wang & Ol (2009), AIAA 2009-3687
    motion = read(with_incidence('{kind = "ramp-hold-return", to = "45 deg", hold = 0.5}')).incidence_motion
    assert (motion.hold, motion.smoothing, motion.smoothing_parameter) == (0.5, "log-cosh", 0.9)


def test_oscillation_by_frequency_or_reduced_frequency():
    # k = pi f c / U = pi * 0.08 Hz * 0.05 m / 0.02 m/s
    table = '{kind = "oscillation", amplitude = "5 deg", frequency = "0.08 Hz", phase = "90 deg"}'
    motion = read(with_incidence(table, PLATE)).incidence_motion
    assert motion.reduced_frequency == pytest.approx(math.pi * 0.2, rel=1e-14)
    assert motion.phase == pytest.approx(math.pi / 2) and motion.value == pytest.approx(15 * DEGREE)
    heave = "[motion]\nheave = {kind = 'oscillation', amplitude = 0.1, reduced_frequency = 2}\n"
    motion = read(BARE + heave).heave_motion
    assert (motion.amplitude, motion.reduced_frequency, motion.value) == (0.1, 2.0, 0.0)


def test_heave_as_a_length_becomes_chords():
    motion = read(PLATE + "[motion]\nheave = {kind = 'ramp', from = '-5 mm', to = '10 mm'}\n").heave_motion
    assert motion.value == pytest.approx(-0.1) and motion.to == pytest.approx(0.2)


def test_a_driven_flap_takes_an_angle_or_a_motion():
    case = read(BARE + FLAP + 'mount = "driven"\n')
    assert case.flaps[0].motion.kind == "constant"
    assert case.flaps[0].motion.value == case.flaps[0].opening == pytest.approx(20 * DEGREE)
    moving = FLAP.replace('"20 deg"', '{kind = "ramp", from = "10 deg", to = "30 deg"}') + 'mount = "driven"\n'
    flap = read(BARE + moving).flaps[0]
    assert flap.opening == pytest.approx(10 * DEGREE) and flap.motion.to == pytest.approx(30 * DEGREE)


def test_a_free_flap_is_read_completely():
    text = PLATE + FLAP + (
        'mount = "free"\nthickness = "0.5 mm"\ndensity = "2200 kg/m3"\nspring = "1e-4 N m/rad"\nrest = "10 deg"\n'
        'damping = "1e-6 N m s/rad"\nlimits = ["3 deg", "80 deg"]\nopening_rate = "90 deg/s"\n'
    )
    flap = read(text).flaps[0]
    assert (flap.mount, flap.thickness, flap.density, flap.spring, flap.damping) == ("free", 0.0005, 2200, 1e-4, 1e-6)
    assert flap.rest == pytest.approx(10 * DEGREE) and flap.opening_rate == pytest.approx(math.pi / 2)
    assert flap.limits == pytest.approx((3 * DEGREE, 80 * DEGREE))


def test_a_massless_free_flap_without_spring_may_be_dimensionless():
    flap = read(BARE + FLAP + 'mount = "free"\nmass_per_area = "0 kg/m2"\n').flaps[0]
    assert flap.mass_per_area == 0.0 and flap.limits is None


@pytest.mark.parametrize(
    ("header", "scale"),
    [("time, incidence_deg", 1.0), ("time_s, incidence_deg", 0.4), ("time_ms, angle_deg", 0.4e-3)],
)
def test_a_table_from_a_file(tmp_path, header, scale):
    # c / U = 0.05 m / 0.02 m/s = 2.5 s
    (tmp_path / "pitch.csv").write_text(f"# made up\n{header}\n0, 15\n10, 20\n20, 18\n")
    motion = read(with_incidence('"pitch.csv"', PLATE), tmp_path).incidence_motion
    assert motion.kind == "table" and motion.file == "pitch.csv"
    assert motion.times == pytest.approx((0, 10 * scale, 20 * scale))
    assert motion.values == pytest.approx((15 * DEGREE, 20 * DEGREE, 18 * DEGREE))


def test_a_table_of_heave_in_millimetres(tmp_path):
    (tmp_path / "heave.csv").write_text("heave_mm,time\n0,0\n5,1\n")
    text = PLATE + '[motion]\nheave = {kind = "table", file = "heave.csv"}\n'
    assert read(text, tmp_path).heave_motion.values == pytest.approx((0.0, 0.1))


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        ("0, 15\n1, 16\n",
         'pitch.csv:1: has no header that names the time. Head the columns with their units, such as '
         '"time_s, incidence_deg", or "time" in chords / speed.'),
        ("time, heave_mm\n0, 15\n1, 16\n",
         "pitch.csv:1: time, heave_mm: has no column that names the value: one of incidence_deg, incidence_rad, "
         "opening_deg, opening_rad, angle_deg, angle_rad. Head the columns with their units, such as "
         '"time_s, incidence_deg", or "time" in chords / speed.'),
        ("time, incidence_deg\n0, 15\n", "pitch.csv: has 1 rows; 2 to 20000 are read. Thin the table out."),
        ("time, incidence_deg\n0, 15\n0, 16\n",
         "pitch.csv:3: 0, 16: repeats the time of the row before. Keep one row for each time."),
        ("time, incidence_deg\n0, 15\n1, 200\n",
         "pitch.csv:3: 1, 200: leaves the range -180 to 180 deg. Check the units."),
    ],
)  # fmt: skip
def test_faults_of_a_motion_file(tmp_path, content, sentence):
    (tmp_path / "pitch.csv").write_text(content)
    fault = one_fault(with_incidence('"pitch.csv"'), tmp_path)
    place = f"{fault.file}:{fault.line}" if fault.line else fault.file
    found = f"{place}: {fault.value}: " if fault.value else f"{place}: "
    assert found + f"{fault.problem} {fault.suggestion}" == sentence


def test_seconds_need_a_dimensional_case(tmp_path):
    (tmp_path / "pitch.csv").write_text("time_s, incidence_deg\n0, 15\n1, 16\n")
    fault = one_fault(with_incidence('"pitch.csv"'), tmp_path)
    assert fault.problem == "has times in seconds, but the case is dimensionless."


@pytest.mark.parametrize(
    ("table", "key", "problem"),
    [
        ("3", "motion.incidence", "must be a motion table or the name of a CSV file."),
        ("{}", "motion.incidence.kind", "is missing."),
        ('{kind = "rmp"}', "motion.incidence.kind",
         'must be one of "constant", "ramp", "ramp-hold-return", "oscillation", "table".'),
        ('{kind = "ramp"}', "motion.incidence.to", 'is missing; kind = "ramp" needs it.'),
        ('{kind = "ramp", to = 40}', "motion.incidence.to",
         "is a bare number where an angle with its unit is due."),
        ('{kind = "ramp", to = "400 deg"}', "motion.incidence.to", "must be at least -180 deg and at most 180 deg."),
        ('{kind = "ramp", to = "4 deg", hold = 1}', "motion.incidence.hold", 'has no meaning for kind = "ramp".'),
        ('{kind = "ramp", to = "4 deg", duration = 0}', "motion.incidence.duration",
         "must be at least 0.001 and at most 100000."),
        ('{kind = "ramp", to = "4 deg", start = "1 deg"}', "motion.incidence.start", "is not a key of a motion table."),
        ('{kind = "oscillation", amplitude = "4 deg"}', "motion.incidence.frequency",
         "give frequency or reduced_frequency, one of the two."),
        ('{kind = "oscillation", amplitude = "4 deg", frequency = "1 Hz"}', "motion.incidence.frequency",
         "needs a chord and a speed in SI units, and the case is dimensionless."),
        ('"none.csv"', "motion.incidence.file", "names a file, but the case has no folder."),
    ],
)  # fmt: skip
def test_faults_of_a_motion_table(table, key, problem):
    fault = one_fault(with_incidence(table))
    assert (fault.line, fault.key, fault.problem) == (5, key, problem)


def test_faults_of_a_heave():
    heave = "[motion]\nheave = {kind = 'ramp', to = %s}\n"
    assert one_fault(BARE + heave % "'5 mm'").problem == "is a length, but the case has no chord to divide it by."
    assert one_fault(PLATE + heave % "'90 m'").problem == "is 1800 chords; at most 100 are taken."
    assert one_fault(PLATE + heave % "1000").problem == "must be at least -100 and at most 100."


def test_a_motion_of_a_flap_that_is_not_driven_is_refused():
    moving = FLAP.replace('"20 deg"', '{kind = "ramp", to = "30 deg"}')
    fault = one_fault(BARE + moving)
    assert fault.problem == 'is a motion, but mount = "fixed".'
    assert fault.suggestion == 'Write mount = "driven", or an angle such as "20 deg".'


def test_a_slip_in_mount_is_one_fault():
    free = 'mount = "fre"\nmass_per_area = "1 kg/m2"\nspring = "1 N m/rad"\n'
    assert [fault.key for fault in faults(PLATE + FLAP + free)] == ["flap[0].mount"]
