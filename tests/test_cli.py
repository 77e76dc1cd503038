"""The command line as a user meets it: exit statuses, sentences, streams."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

from ibsolver.cli import VERBS
from tests.runs import SMALL_CASE, write_case

ROOT = Path(__file__).resolve().parent.parent


def ibsolver(*words, cwd, **environment):
    command = [sys.executable, "-m", "ibsolver", *map(str, words)]
    env = {**os.environ, "PYTHONPATH": str(ROOT), **environment}
    return subprocess.run(command, capture_output=True, text=True, cwd=cwd, env=env)


def test_no_words_gives_help_and_status_2(tmp_path):
    done = ibsolver(cwd=tmp_path)
    assert done.returncode == 2 and "first steps" in done.stdout


def test_help_lists_every_verb_and_fits_80_columns(tmp_path):
    done = ibsolver("--help", cwd=tmp_path, COLUMNS="80")
    assert done.returncode == 0 and max(map(len, done.stdout.splitlines())) < 80
    for verb in VERBS:
        assert f"  {verb.name} " in done.stdout and verb.does in done.stdout


def test_version(tmp_path):
    done = ibsolver("--version", cwd=tmp_path)
    assert done.returncode == 0 and done.stdout.startswith("ibsolver ")


@pytest.mark.parametrize("verb", [verb.name for verb in VERBS])
def test_help_of_every_verb_has_two_examples_in_80_columns(tmp_path, verb):
    done = ibsolver(verb, "--help", cwd=tmp_path, COLUMNS="80")
    assert done.returncode == 0 and max(map(len, done.stdout.splitlines())) < 80
    assert done.stdout.partition("examples:")[2].count(f"  ibsolver {verb}") >= 2
    assert "--json" in done.stdout and "--quiet" in done.stdout


@pytest.mark.parametrize(
    ("words", "sentence"),
    [
        (["chek"], "Did you mean 'check'?"),
        (["fly"], "There are: new, check"),
        (["run"], "required: CASE"),
        (["run", "x.toml", "--thread", "many"], "See `ibsolver run --help`"),
        (["run", "x.toml", "--ovewrite"], "did you mean --overwrite?"),
        (["run", "x.toml", "--over"], "'--over' is not known here"),
        (["run", "x.toml", "--threads", "0"], "'0' threads asked for; this machine has 1 to"),
        (["--json", "check", "x.toml"], "options follow the verb"),
        (["check", "--picture", "x.toml"], "'x.toml' must end in .png"),
        (["forces", "--csv", "x.toml", "r"], "'x.toml' must end in .csv"),
        (["picture", "nowhere"], "no such run directory"),
        (["status", "nowhere"], "no such run directory"),
        (["resume", "."], "there is no run in this folder"),
        (["run", "x.toml", "--out", ""], "an empty name"),
        (["check", ""], "an empty name"),
        (["check", "x.toml", "--picture", "nowhere/x.png"], "there is no folder nowhere"),
    ],
)
def test_wrong_usage_is_a_sentence_and_status_2(tmp_path, words, sentence):
    done = ibsolver(*words, cwd=tmp_path)
    assert done.returncode == 2 and sentence in done.stderr and "Traceback" not in done.stderr
    assert done.stdout == "" and list(tmp_path.iterdir()) == []


def test_a_picture_never_replaces_a_case(tmp_path):
    case, other = write_case(tmp_path), write_case(tmp_path, name="other.toml")
    assert ibsolver("check", case, "--picture", other, cwd=tmp_path).returncode == 2
    assert other.read_text() == SMALL_CASE


@pytest.mark.parametrize("words", [["check", "."], ["check", "none.toml"], ["run", "none.toml"]])
def test_a_case_that_is_no_file_is_a_sentence(tmp_path, words):
    done = ibsolver(*words, cwd=tmp_path)
    assert done.returncode == 3 and done.stderr.startswith(f"ibsolver: {words[1]}:") and "Traceback" not in done.stderr


def test_every_fault_of_a_case_is_told_at_once_with_its_line(tmp_path):
    text = (
        SMALL_CASE.replace('"18 deg"', "18")
        .replace("length = 0.3", "lenght = 0.3")
        .replace("reynolds = 300", "reynolds = -3")
    )
    done = ibsolver("check", write_case(tmp_path, text), cwd=tmp_path)
    assert done.returncode == 3 and "Traceback" not in done.stderr
    for words in ('"18 deg"', "length", "reynolds"):
        assert words in done.stderr
    assert done.stderr.count("small.toml:") >= 3


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ('"25 deg"', '"-10 deg"', "opening"),
        ("frame_every = 0.1", "frame_every = 5", "frame_every"),
        ("cells_per_chord = 24", "cells_per_chord = 90000", "at most 2048"),
        ("travel = 0.6", "travel = nan", "travel"),
        ("hinge = 0.12", "hinge = 1.4", "hinge"),
        ("length = 0.3", "length = 30", "length"),
    ],
)
def test_wrong_cases_give_status_3(tmp_path, old, new, words):
    done = ibsolver("run", write_case(tmp_path, SMALL_CASE.replace(old, new)), cwd=tmp_path)
    assert done.returncode == 3, done.stderr
    assert words in done.stderr and "Traceback" not in done.stderr


def test_new_check_run_forces_picture(tmp_path):
    case = write_case(tmp_path)
    checked = ibsolver("check", case, "--json", "--picture", cwd=tmp_path)
    assert checked.returncode == 0, checked.stderr
    numbers = json.loads(checked.stdout)
    assert numbers["cost"]["steps"] > 10 and numbers["cost"]["ns_per_cell_step"] > 0
    assert numbers["tank"]["tow_length"] == pytest.approx(0.036)
    assert (tmp_path / "small.png").exists()

    ran = ibsolver("run", case, "--json", cwd=tmp_path)
    assert ran.returncode == 0, ran.stderr
    result = json.loads(ran.stdout)
    assert result["state"] == "finished" and result["directory"] == "runs/small"
    assert {Path(f).name for f in result["files"]} == {"forces.csv", "forces.png", "vorticity.png"}
    assert "C_L" in ran.stderr and "time left" in ran.stderr

    again = ibsolver("run", case, cwd=tmp_path)
    assert again.returncode == 5 and "not overwritten" in again.stderr
    drawn = ibsolver("picture", "runs/small", "--travel", 0.3, "--out", "w.png", "--quiet", cwd=tmp_path)
    assert drawn.returncode == 0 and drawn.stdout == "" and (tmp_path / "w.png").exists()
    told = ibsolver("forces", "runs/small", "--cutoff-hz", "0.05", cwd=tmp_path)
    assert told.returncode == 0 and "Two-dimensional" in told.stdout and "filter: butterworth" in told.stdout
    assert max(map(len, told.stdout.splitlines())) < 80


NUMBERS_OF_A_RUN = (["status"], ["forces"], ["forces", "--cutoff", "1"], ["picture"])


@pytest.mark.parametrize("words", NUMBERS_OF_A_RUN, ids=" ".join)
def test_json_is_one_object_that_every_reader_takes(small_run, tmp_path, words):
    files = {"forces": ["--csv", "f.csv", "--plot", "f.png"], "picture": ["--out", "v.png"]}.get(words[0], [])
    done = ibsolver(words[0], small_run, *words[1:], *files, "--json", cwd=tmp_path)
    assert done.returncode == 0 and done.stderr == ""

    def refuse(word):
        raise AssertionError(f"{word} is not JSON")

    assert isinstance(json.loads(done.stdout, parse_constant=refuse), dict)


@pytest.mark.parametrize("words", ["--filter bessel", "--order 2", "--causal", "--rate-hz 50"])
def test_a_filter_that_is_described_but_has_no_cut_off_is_not_silently_left_out(small_run, tmp_path, words):
    done = ibsolver("forces", small_run, *words.split(), "--csv", "f.csv", "--plot", "f.png", cwd=tmp_path)
    assert done.returncode == 2 and "add --cutoff-hz or --cutoff" in done.stderr and list(tmp_path.iterdir()) == []


def test_overwrite_replaces_a_run_and_nothing_else(tmp_path):
    folder, case = tmp_path / "mine", write_case(tmp_path)
    folder.mkdir()
    (folder / "case.toml").write_text("# by hand")
    (folder / "history.csv").write_text("t, v")
    refused = ibsolver("run", case, "--out", "mine", "--overwrite", cwd=tmp_path)
    assert refused.returncode == 5 and "no run is in this folder" in refused.stderr
    assert (folder / "case.toml").read_text() == "# by hand" and len(list(folder.iterdir())) == 2
    for _ in range(2):
        assert ibsolver("run", case, "--out", "r", "--overwrite", "--bare", "--quiet", cwd=tmp_path).returncode == 0


def test_a_run_resumed_at_its_end_has_no_cost(small_run, tmp_path):
    import shutil

    shutil.copytree(small_run, tmp_path / "r")
    told = ibsolver("resume", "r", "--bare", cwd=tmp_path)
    assert told.returncode == 0 and "nothing was left to march" in told.stdout and "ns a cell" not in told.stdout
    assert json.loads(ibsolver("resume", "r", "--bare", "--json", cwd=tmp_path).stdout)["ns_per_cell_step"] is None


def test_signs_that_the_terminal_lacks_are_spelt_out(tmp_path):
    case = tmp_path / "case.toml"
    case.write_text(SMALL_CASE.replace("Small plate", "Fl\u00fcgel \u03b1"), encoding="utf-8")
    done = ibsolver("check", case, "--no-timing", cwd=tmp_path, PYTHONIOENCODING="ascii")
    assert done.returncode == 0 and done.stdout.startswith("Fl\\xfcgel \\u03b1 with a flap"), done.stderr


def test_help_costs_little_more_than_starting_python(tmp_path):
    """A ratio, the better of several tries: whatever is loaded for it costs the same machine the same way."""
    import time

    def seconds(*words: str) -> float:
        begin = time.perf_counter()
        subprocess.run([sys.executable, *words], cwd=ROOT, capture_output=True, check=True)
        return time.perf_counter() - begin

    tries = [(seconds("-c", "pass"), seconds("-m", "ibsolver", "--help")) for _ in range(7)]
    assert min(helped for _, helped in tries) < 8 * min(bare for bare, _ in tries)


def test_bare_and_quiet_write_no_plots_and_no_words(tmp_path):
    done = ibsolver("run", write_case(tmp_path), "--out", "r", "--bare", "--quiet", cwd=tmp_path)
    assert done.returncode == 0 and done.stderr == ""
    assert not (tmp_path / "r" / "forces.png").exists()


def test_new_writes_what_check_accepts_and_never_overwrites(tmp_path):
    made = ibsolver("new", "plate-with-flap", "--out", "p.toml", cwd=tmp_path)
    assert made.returncode == 0 and "ibsolver check p.toml" in made.stdout
    assert ibsolver("check", "p.toml", "--no-timing", cwd=tmp_path).returncode == 0
    assert ibsolver("new", "plate-with-flap", "--out", "p.toml", cwd=tmp_path).returncode == 5
    wrong = ibsolver("new", "plat", cwd=tmp_path)
    assert wrong.returncode == 2 and "Did you mean plate?" in wrong.stderr


def test_a_fault_of_ours_is_one_sentence_and_status_1(tmp_path):
    """A broken installation, as from a file that does not belong there."""
    (tmp_path / "tomllib.py").write_text("raise RuntimeError('broken')")
    done = ibsolver("check", write_case(tmp_path), cwd=tmp_path, PYTHONPATH=f"{tmp_path}{os.pathsep}{ROOT}")
    assert done.returncode == 1
    assert "a fault of ours" in done.stderr and "IBSOLVER_TRACEBACK=1" in done.stderr and "Traceback" not in done.stderr


@pytest.mark.parametrize("words", ["new plate-with-flap", "--help", "run --help", "new plate --json"])
def test_a_closed_pipe_is_no_fault(tmp_path, words):
    command = f"{sys.executable} -m ibsolver {words} | true; exit ${{PIPESTATUS[0]}}"
    env = {**os.environ, "PYTHONPATH": str(ROOT)}
    env.pop("PYTHONUNBUFFERED", None)  # what is buffered comes out at the very end
    done = subprocess.run(["bash", "-c", command], capture_output=True, text=True, cwd=tmp_path, env=env)
    assert done.returncode == 0 and done.stderr == ""


def test_no_output_at_all_is_no_fault(tmp_path):
    command = f"{sys.executable} -m ibsolver new plate >&-"
    env = {**os.environ, "PYTHONPATH": str(ROOT)}
    done = subprocess.run(["bash", "-c", command], capture_output=True, text=True, cwd=tmp_path, env=env)
    assert done.returncode == 0 and done.stderr == ""


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no device that is always full")
@pytest.mark.parametrize("unbuffered", ["", "1"])
def test_output_to_a_full_disk_is_status_5(tmp_path, unbuffered):
    env = {**os.environ, "PYTHONPATH": str(ROOT), "PYTHONUNBUFFERED": unbuffered}
    with open("/dev/full", "w") as full:
        command = [sys.executable, "-m", "ibsolver", "new", "plate"]
        done = subprocess.run(command, stdout=full, stderr=subprocess.PIPE, text=True, cwd=tmp_path, env=env)
    assert done.returncode == 5
    assert "the disk is full" in done.stderr and "Exception" not in done.stderr and "fault of ours" not in done.stderr


@pytest.mark.skipif(sys.platform == "win32", reason="no pseudo-terminals")
@pytest.mark.parametrize(("terminal", "redrawn"), [("xterm", True), ("dumb", False)])
def test_on_a_terminal_the_progress_line_is_redrawn_without_colour(tmp_path, terminal, redrawn):
    import pty
    import re

    case = write_case(tmp_path, SMALL_CASE.replace("travel = 0.6", "travel = 0.2"))
    ours, theirs = pty.openpty()
    env = {**os.environ, "PYTHONPATH": str(ROOT), "TERM": terminal, "NO_COLOR": "1", "COLUMNS": "80"}
    command = [sys.executable, "-m", "ibsolver", "run", str(case), "--bare", "--threads", "1"]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=theirs, text=True, cwd=tmp_path, env=env) as process:
        os.close(theirs)
        seen = drained(ours)
        printed = process.stdout.read()
    assert process.returncode == 0 and "chords in" in printed
    assert "time left" in seen and "\x1b" not in printed
    assert ("\x1b[2K" in seen) is redrawn and not re.search("\x1b\\[[0-9;]*m", seen)


def drained(terminal: int) -> str:
    """Return everything that is written to a pseudo-terminal until its last writer has gone."""
    seen = b""
    while True:
        try:
            piece = os.read(terminal, 4096)
        except OSError:  # what Linux says at the end
            piece = b""
        if not piece:
            os.close(terminal)
            return seen.decode()
        seen += piece


def test_status_and_resume_after_a_signal(tmp_path):
    import signal
    import time

    text = SMALL_CASE.replace("travel = 0.6", "travel = 60").replace("frame_every = 0.1", "frame_every = 1")
    case = write_case(tmp_path, text)
    command = [sys.executable, "-m", "ibsolver", "run", str(case), "--out", "r"]
    env = {**os.environ, "PYTHONPATH": str(ROOT)}
    process = subprocess.Popen(command, cwd=tmp_path, env=env, stderr=subprocess.PIPE, text=True)
    while not (tmp_path / "r" / "frames" / "000001.h5").exists():
        time.sleep(0.05)
    running = json.loads(ibsolver("status", "r", "--json", cwd=tmp_path).stdout)
    assert running["state"] == "running" and running["travel_end"] == 60
    locked = ibsolver("resume", "r", cwd=tmp_path)
    assert locked.returncode == 5 and "is writing this run" in locked.stderr
    process.send_signal(signal.SIGHUP)
    assert process.wait(10) == 7
    assert "SIGHUP" in process.stderr.read()
    process.stderr.close()
    told = ibsolver("status", "r", cwd=tmp_path)
    assert "interrupted" in told.stdout and "ibsolver resume r" in told.stdout

    edited = (tmp_path / "r" / "case.toml").read_text().replace("reynolds = 300", "reynolds = 400")
    kept = (tmp_path / "r" / "case.toml").read_text()
    (tmp_path / "r" / "case.toml").write_text(edited)
    refused = ibsolver("resume", "r", cwd=tmp_path)
    assert refused.returncode == 3 and "reynolds: 300" in refused.stderr
    (tmp_path / "r" / "case.toml").write_text(kept)
    shorter = ibsolver("resume", "r", "--travel", "3", cwd=tmp_path)
    assert shorter.returncode == 2 and "only a longer one" in shorter.stderr


def test_doctor_tells_what_to_do(tmp_path):
    done = ibsolver("doctor", "--json", cwd=tmp_path)
    assert done.returncode == 0, done.stderr
    findings = {f["name"]: f for f in json.loads(done.stdout)["findings"]}
    assert {"threads", "two threads against one", "BLAS", "compiled kernels", "disk", "movie encoder", "sleep"} == set(
        findings
    )
    assert "MB/s" in findings["disk"]["found"] and all(f["good"] or f["advice"] for f in findings.values())
    assert list(tmp_path.iterdir()) == []
