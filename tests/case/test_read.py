"""Reading a case file: what it gives, and the exact sentence for every fault that users meet."""

from __future__ import annotations

import math
import os
import subprocess
import sys
from pathlib import Path

import pytest

from ibsolver.case import load_case
from ibsolver.errors import CaseError

from .helpers import BARE, BOX, FLAP, PLATE, faults, one_fault, read

CASES = Path(__file__).resolve().parents[2] / "cases"


def test_a_plate_in_si():
    case = read(PLATE)
    assert case.title == "Test plate"
    assert case.plate.chord == 0.05 and case.plate.span == 0.2
    assert case.plate.incidence == pytest.approx(math.radians(15), rel=1e-15)
    assert case.tow.speed == 0.02
    assert case.tow.reynolds == pytest.approx(1000, rel=1e-14)
    assert (case.tow.start, case.tow.start_distance) == ("smooth", 0.5)
    assert case.output.checkpoint_every == 300.0
    assert case.text == PLATE and case.file == "case.toml"


def test_reynolds_gives_the_speed_where_there_is_a_fluid():
    case = read(PLATE.replace('speed = "20 mm/s"', "reynolds = 1000"))
    assert case.tow.reynolds == 1000
    assert case.tow.speed == pytest.approx(0.02, rel=1e-14)


def test_reynolds_alone_is_dimensionless():
    case = read(BARE)
    assert case.fluid is None and case.tow.speed is None and case.plate.chord is None
    assert case.tow.reynolds == 500


def test_the_text_does_not_take_part_in_comparison():
    assert read(BARE) == read(BARE + "# a remark\n")
    assert hash(read(BARE)) == hash(read(BARE + "# a remark\n"))


def test_a_box_has_a_uniform_grid():
    case = read(BOX)
    assert case.grid.uniform and case.plate is None
    assert case.domain.top.speed == 1.0 and case.domain.left.condition == "no slip"


def test_flaps_are_read_in_order():
    second = FLAP.replace("front", "rear").replace("0.12", "0.7")
    case = read(PLATE + FLAP + second + 'side = "lower"\n')
    assert [flap.name for flap in case.flaps] == ["front", "rear"]
    assert case.flaps[1].side == "lower" and case.flaps[0].mount == "fixed" and case.flaps[0].on == "plate"


def test_tank_walls_in_chords_or_as_a_length():
    case = read(PLATE + '[tank]\nwall_above = "250 mm"\nwall_below = 4\n')
    assert case.tank.wall_above == pytest.approx(5.0, rel=1e-14) and case.tank.wall_below == 4.0


def test_every_number_of_the_model_is_a_float():
    case = read(PLATE + "[grid]\ncells_per_chord = 32\n[run]\ntravel = 4\n")
    assert isinstance(case.grid.cells_per_chord, float) and isinstance(case.run.travel, float)
    assert isinstance(case.run.repeats, int)


def test_all_faults_at_once_in_the_order_of_the_file():
    text = PLATE.replace('"50 mm"', "50").replace('"15 deg"', '"15 mm"').replace('"20 mm/s"', '"-20 mm/s"')
    found = faults(text + "strat = 1\n[run]\ncourant = 0.9\ntravel = nan\n[gird]\n")
    assert [(fault.line, fault.key) for fault in found] == [
        (7, "plate.chord"),
        (9, "plate.incidence"),
        (11, "tow.speed"),
        (12, "tow.strat"),
        (14, "run.courant"),
        (15, "run.travel"),
        (16, "gird"),
    ]


def test_the_error_message_is_all_faults_one_a_line():
    with pytest.raises(CaseError) as caught:
        read(BARE + "[run]\ntravel = 0\nrepeats = 1.5\n")
    assert str(caught.value) == (
        "case.toml:6: run.travel = 0: must be at least 0.001 and at most 10000. Write for example 8.\n"
        "case.toml:7: run.repeats = 1.5: must be a whole number, at least 1 and at most 100. Write for example 4."
    )


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        (PLATE.replace('"50 mm"', "50"),
         'case.toml:7: plate.chord = 50: is a bare number where a length with its unit is due. '
         'Write for example chord = "50 mm".'),
        (PLATE.replace('"15 deg"', "15"),
         'case.toml:9: plate.incidence = 15: is a bare number where an angle with its unit is due. '
         'Write for example incidence = "15 deg".'),
        (PLATE.replace('"50 mm"', '"0,05 m"'),
         'case.toml:7: plate.chord = "0,05 m": has a decimal comma. Write a decimal point: "0.05 m".'),
        (PLATE.replace('"50 mm"', '"-50 mm"'),
         'case.toml:7: plate.chord = "-50 mm": must be at least 0.01 mm and at most 100000 mm. '
         'Write for example "60 mm".'),
        (PLATE.replace('"50 mm"', "true"),
         'case.toml:7: plate.chord = true: must be a text in quotes: a length with its unit. '
         'Write for example chord = "60 mm".'),
        (PLATE.replace("chord", "cord"),
         'case.toml:7: plate.cord = "50 mm": is not a key of [plate]. Did you mean chord?'),
        (PLATE.replace("incidence", "aoa"),
         'case.toml:9: plate.aoa = "15 deg": is not a key of [plate]. Did you mean incidence?'),
        (BARE + "[grid]\ncourant = 0.5\n",
         "case.toml:6: grid.courant = 0.5: is not a key of [grid]. It belongs to [run]."),
        (BARE + "[grid]\ncfl = 0.5\n",
         "case.toml:6: grid.cfl = 0.5: is not a key of [grid]. It belongs to [run] as courant."),
        (BARE + "[grid]\nzzzzzz = 0.5\n",
         "case.toml:6: grid.zzzzzz = 0.5: is not a key of [grid]. "
         "Known keys: cells_per_chord, stretch, core_margin, largest_cell, uniform."),
        ("travel = 3\n" + BARE, "case.toml:1: travel = 3: is not a key of a case. It belongs to [run]."),
        ("titel = 'x'\n" + BARE, 'case.toml:1: titel = "x": is not a key of a case. Did you mean title?'),
        (BARE + "[domian]\nlateral = 3\n", "case.toml:5: domian: is not a section of a case. Did you mean [domain]?"),
        (BARE + "[qwertz]\n",
         "case.toml:5: qwertz: is not a section of a case. Known sections: fluid, plate, cylinder, outline, flap, tow, "
         "motion, tank, domain, initial, grid, run, output."),
        (BARE + "[flap]\nname = 'a'\nhinge = 0.1\nlength = 0.2\nopening = '20 deg'\n",
         "case.toml:5: flap: must be written as a list of sections. Write [[flap]], with two brackets."),
        ("tow = 3\n" + BARE.split("[tow]")[0],
         "case.toml:1: tow = 3: must be a section of its own. Write [tow] once."),
        (BARE + "[run]\ncourant = 0.9\n",
         "case.toml:6: run.courant = 0.9: must be at least 0.001 and at most 0.7. The time scheme (second-order "
         "Adams-Bashforth) loses its stability above it, because the velocity at a plate's edge grows like one over "
         "the square root of the cell width. Write 0.5."),
        (BARE.replace("500", "30000"),
         "case.toml:4: tow.reynolds = 30000: must be at least 0.01 and at most 20000. A two-dimensional laminar flow "
         "is not a model of the tank there. Tow slower or use a smaller chord."),
        (PLATE.replace("20 mm/s", "2 m/s"),
         'case.toml:11: tow.speed = "2 m/s": gives a Reynolds number of 1e+05; at most 20000 is taken. '
         "A two-dimensional laminar flow is not a model of the tank there. Tow slower or use a smaller chord."),
        (BARE.replace("500", "inf"),
         "case.toml:4: tow.reynolds = inf: is not a finite number. Allowed: at least 0.01 and at most 20000."),
        (BARE.replace("500", '"500"'),
         'case.toml:4: tow.reynolds = "500": must be a number, at least 0.01 and at most 20000. '
         "Write it without quotes: 500."),
        (BARE.replace("500", "true"),
         "case.toml:4: tow.reynolds = true: must be a number, at least 0.01 and at most 20000. "
         "Write for example 1200."),
        (BARE + 'start = "smoth"\n',
         'case.toml:5: tow.start = "smoth": must be one of "impulsive", "linear", "smooth", "hold acceleration", "still". '
         'Did you mean "smooth"?'),
        (BARE + "[grid]\nuniform = 'yes'\n",
         'case.toml:6: grid.uniform = "yes": must be true or false, without quotes. Write false.'),
        ("title = 3\n" + BARE,
         "case.toml:1: title = 3: must be a text in quotes. "
         'Write for example "Thin plate at 18 deg, constant-speed tow".'),
        (BARE + "[output]\ncheckpoint_every = 5\n",
         "case.toml:6: output.checkpoint_every = 5: is a bare number where a time with its unit is due. "
         'Write for example checkpoint_every = "5 min".'),
        (BARE + "[initial]\nstream = 1\n",
         "case.toml:6: initial.stream = 1: must be two numbers in brackets. Write for example stream = [1.0, 0.0]."),
    ],
)  # fmt: skip
def test_sentence_of_a_single_fault(text, sentence):
    assert str(one_fault(text)) == sentence


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ("[plate]\nincidence = 15 deg\n",
         'case.toml:2: incidence = 15 deg: is a value with a unit without quotes. Write incidence = "15 deg".'),
        ("[plate]\npivot = 0,25\n", "case.toml:2: pivot = 0,25: has a decimal comma. Write pivot = 0.25."),
        ("[tow]\nstart = smooth  # so\n",
         'case.toml:2: start = smooth: is a text without quotes. Write start = "smooth".'),
        ("[plate]\n[plate]\n", "case.toml:2: text = [plate]: is not valid TOML: cannot declare ('plate',) twice."),
        ('title = "open\n', 'case.toml:1: text = title = "open: is not valid TOML: illegal character \'\\n\'.'),
        ("a = 1\n\nb = [1, 2", "case.toml:3: text = b = [1, 2: is not valid TOML: unclosed array."),
    ],
)  # fmt: skip
def test_syntax_errors_carry_their_line(text, sentence):
    assert str(one_fault(text)) == sentence


def test_what_is_missing():
    body, tow = faults("")
    assert (body.line, body.key, body.problem, body.suggestion) == (
        0,
        "",
        "the case has no body: one of [plate], [cylinder] or [outline] is due.",
        "Or give domain.width and domain.height of a box without one.",
    )
    assert str(tow) == "case.toml: tow: needs speed or reynolds. Write for example reynolds = 1200."
    assert str(one_fault("[plate]\n[tow]\nreynolds = 5\n")) == (
        "case.toml:1: plate.incidence: is missing; without [motion] incidence it is needed. "
        'Write for example incidence = "18 deg".'
    )
    assert [fault.key for fault in faults(BARE + "[[flap]]\n")] == [
        "flap[0].name",
        "flap[0].hinge",
        "flap[0].length",
        "flap[0].opening",
    ]


@pytest.mark.parametrize(
    ("data", "problem"),
    [
        (b"\xff\xfet\x00i\x00", "is written in UTF-16."),
        (b"a\x00b", "holds NUL bytes: it is not a text file, or is written in UTF-16."),
        (b"a = 1\nb = '\xe9'\n", "is not UTF-8 text (line 2)."),
        (b"#" + b"x" * 1_000_000, "has 1000001 bytes; a case file has at most 1000000."),
        (b"a = " + b"[" * 3000, "is nested too deeply."),
        (b"a." * 70 + b"b = 1", "is nested too deeply."),
        (b"a = '" + b"x" * 5000 + b"'", "the line has 5006 characters; at most 4000 are read."),
        (b"[plate]\npivot = " + b"9" * 3999 , "the line has 4007 characters; at most 4000 are read."),
    ],
)
def test_files_that_are_no_case(tmp_path, data, problem):
    path = tmp_path / "case.toml"
    path.write_bytes(data)
    with pytest.raises(CaseError) as caught:
        load_case(path)
    assert [fault.problem for fault in caught.value.faults] == [problem]
    assert caught.value.faults[0].file == str(path)


def test_huge_whole_numbers_are_refused():
    digits = "9" * 3000
    assert one_fault(BARE + f"[run]\ntravel = {digits}\n").problem == "is too large to be a number."
    assert "at most 100" in one_fault(BARE + f"[run]\nrepeats = {digits}\n").problem


def test_digits_beyond_a_limit_set_for_python():
    code = (
        "from ibsolver.case import read_case_text\n"
        "try: read_case_text('[run]\\ntravel = ' + '9' * 3000)\n"
        "except Exception as error: print(type(error).__name__, error.faults[0].line, error.faults[0].problem)"
    )
    environment = os.environ | {"PYTHONINTMAXSTRDIGITS": "1000"}
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, env=environment)
    assert done.stdout.strip() == "CaseError 2 holds a number that is too large."


def test_missing_file_and_folder(tmp_path):
    with pytest.raises(CaseError) as caught:
        load_case(tmp_path / "none.toml")
    (fault,) = caught.value.faults
    assert (fault.file, fault.problem) == (str(tmp_path / "none.toml"), "is not there.")
    assert fault.suggestion == "Check the name; `ibsolver new plate` writes a case to start from."
    with pytest.raises(CaseError, match="is a folder. Name a case file, such as cases/towed_plate.toml."):
        load_case(tmp_path)
    with pytest.raises(CaseError, match="cannot be read: embedded null byte"):
        load_case("a\0b")


def test_a_pipe_is_not_opened(tmp_path):
    os.mkfifo(tmp_path / "pipe.toml")
    with pytest.raises(CaseError, match="is not a plain file"):
        load_case(tmp_path / "pipe.toml")


def test_byte_order_mark_and_windows_line_ends_are_accepted(tmp_path):
    path = tmp_path / "case.toml"
    path.write_bytes(b"\xef\xbb\xbf" + BARE.replace("\n", "\r\n").encode())
    assert load_case(path) == read(BARE)


def test_control_characters_do_not_reach_the_terminal():
    found = one_fault(BARE + '"\\u001b[31m" = "\\u001b[0m"\n')
    assert "\x1b" not in str(found) and "\\x1b[31m" in found.key


def test_a_flood_of_faults_is_cut():
    found = faults(BARE + "".join(f"k{i} = 1\n" for i in range(300)))
    assert len(found) == 201
    assert found[-1].problem == "100 more faults are not shown."


@pytest.mark.parametrize("path", sorted(CASES.rglob("*.toml")), ids=lambda path: str(path.relative_to(CASES)))
def test_every_shipped_case_loads(path):
    if "[campaign]" in path.read_text() or path.parent.name == "references":
        pytest.skip("not a case file")
    case = load_case(path)
    assert case.title


def test_reading_a_case_loads_no_heavy_library():
    code = (
        "import sys; from ibsolver.case import load_case; load_case(sys.argv[1]); "
        "print([m for m in ('numpy', 'scipy', 'numba', 'matplotlib', 'meshio', 'h5py') if m in sys.modules])"
    )
    command = [sys.executable, "-c", code, str(CASES / "towed_plate_with_flap.toml")]
    done = subprocess.run(command, capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


@pytest.mark.parametrize(
    ("text", "problem"),
    [
        ("\n".join(f"b{i} = {{{'.'.join('a' * 1900)} = 1}}" for i in range(240)), "is nested too deeply."),
        ("\n".join(f"k{i} = 1" for i in range(80_000)), None),
        (BARE + "[[flap]]\n" * 100_000, None),
        ("a = " + "\n[" * 100_000, None),
    ],
)
def test_texts_made_to_keep_the_reader_busy(text, problem):
    found = faults(text)
    assert len(found) <= 201 and (problem is None or found[0].problem == problem)


def test_the_case_of_the_vortex_street_is_not_symmetric():
    # Between equal sides the shedding would grow from round-off: a lift of 1e-7 after 150 diameters (measured)
    domain = load_case(CASES / "cylinder_re100.toml").domain
    assert domain.above != domain.below
