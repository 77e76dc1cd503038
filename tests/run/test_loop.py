"""The march and its run directory: contract, interruption and resumption, divergence, refusals."""

from __future__ import annotations

import dataclasses
import filecmp
import json
import math
import os
import signal

import numpy as np
import pytest

import ibsolver
from ibsolver.case import load_case
from ibsolver.case.model import Grid
from ibsolver.errors import CaseError, DivergedError, InterruptedRun, StorageError
from ibsolver.run.loop import resume_case, run_case
from ibsolver.runfile.frame import read_frame
from ibsolver.runfile.history import read_history
from tests.runs import SMALL_CASE, write_case

CONTRACT_COLUMNS = (
    "step, time_s, time, travel, tow_speed, incidence_deg, CL, CD, CM, CL_momentum, CD_momentum, courant, slip, "
    "divergence, dt, repeats, opening_deg_front, CH_front"
).split(", ")


@pytest.fixture
def case(tmp_path):
    return load_case(str(write_case(tmp_path)))


def test_run_directory_is_that_of_the_contract(small_run):
    names = {p.name for p in small_run.iterdir()}
    assert {"case.toml", "resolved.json", "manifest.json", "status.json", "log.jsonl", "history.csv", "frames"} <= names
    assert any(name.startswith("checkpoint-") for name in names) and "writer.lock" not in names
    history = read_history(small_run / "history.csv")
    assert set(CONTRACT_COLUMNS) <= set(history.columns)
    assert history["travel"][-1] >= 0.6 and history["step"].tolist() == list(range(1, len(history) + 1))
    assert history["opening_deg_front"][0] == pytest.approx(25.0) and history["incidence_deg"][0] == pytest.approx(18.0)
    files = sorted(p.name for p in (small_run / "frames").iterdir())
    assert files == [f"{k:06d}.h5" for k in range(7)]
    travels = [read_frame(small_run / "frames" / name).travel for name in files]
    assert travels[0] == 0 and np.allclose(travels[1:], [0.1, 0.2, 0.3, 0.4, 0.5, 0.6], atol=0.02)


def test_status_and_manifest_tell_the_end(small_run):
    status = json.loads((small_run / "status.json").read_text())
    manifest = json.loads((small_run / "manifest.json").read_text())
    assert status["state"] == "finished" and status["travel"] >= 0.6
    assert manifest["ns_per_cell_step"] > 0 and manifest["cells"] == manifest["nx"] * manifest["ny"]
    for key in (
        "ibsolver",
        "python",
        "packages",
        "threads",
        "threading_layer",
        "blas",
        "processor",
        "case_hash",
        "steps",
    ):
        assert manifest[key], key


def test_frame_agrees_with_the_history(small_run):
    """The load along the bodies adds up to the lift of the step that ends at the frame."""
    frame, history = read_frame(small_run / "frames" / "000006.h5"), read_history(small_run / "history.csv")
    from ibsolver.run.assemble import assemble

    ds = assemble(load_case(str(small_run / "case.toml"))).rig.ds
    total = 2 * (frame.load * ds[:, None]).sum(axis=0)
    k = int(np.argmin(np.abs(history["time"] - frame.time)))
    np.testing.assert_allclose(total, [history["CD"][k], history["CL"][k]], rtol=1e-5)


def stop_at(step, number):
    def watch(report):
        if report.step == step:
            os.kill(os.getpid(), number)

    return watch


def test_resumed_twice_equals_uninterrupted_to_the_bit(case, small_run, tmp_path):
    out = tmp_path / "run"
    with pytest.raises(InterruptedRun, match=r"SIGTERM.*resume"):
        run_case(case, out, progress=stop_at(31, signal.SIGTERM))
    assert json.loads((out / "status.json").read_text())["state"] == "interrupted"
    with pytest.raises(InterruptedRun, match="SIGINT"):
        resume_case(out, progress=stop_at(50, signal.SIGINT))
    resume_case(out)
    assert (out / "history.csv").read_bytes() == (small_run / "history.csv").read_bytes()
    for path in sorted((small_run / "frames").iterdir()):
        assert filecmp.cmp(path, out / "frames" / path.name, shallow=False), path.name


def test_a_longer_travel_equals_a_run_that_was_longer_from_the_start(case, tmp_path):
    short = dataclasses.replace(case, run=dataclasses.replace(case.run, travel=0.3))
    run_case(short, tmp_path / "grown")
    resume_case(tmp_path / "grown", case=case)
    run_case(case, tmp_path / "whole")
    grown, whole = (read_history(tmp_path / name / "history.csv") for name in ("grown", "whole"))
    for name in whole.columns:
        assert (grown[name] == whole[name]).all(), name


def test_a_changed_case_is_not_resumed_and_the_difference_is_told(case, tmp_path):
    short = dataclasses.replace(case, run=dataclasses.replace(case.run, travel=0.1))
    run_case(short, tmp_path / "run")
    other = dataclasses.replace(short, grid=Grid(cells_per_chord=32))
    with pytest.raises(CaseError, match="grid.cells_per_chord: 24.* and 32"):
        resume_case(tmp_path / "run", case=other)


def test_an_existing_run_is_not_overwritten_without_being_asked(case, tmp_path):
    short = dataclasses.replace(case, run=dataclasses.replace(case.run, travel=0.05))
    run_case(short, tmp_path / "run")
    (tmp_path / "run" / "notes.txt").write_text("mine")
    with pytest.raises(StorageError, match="--overwrite"):
        run_case(short, tmp_path / "run")
    run_case(short, tmp_path / "run", overwrite=True)
    assert (tmp_path / "run" / "notes.txt").read_text() == "mine"


def test_overwriting_spares_a_folder_that_never_was_a_run(case, tmp_path):
    mine = tmp_path / "mine"
    mine.mkdir()
    (mine / "history.csv").write_text("my own")
    with pytest.raises(StorageError, match="holds no earlier run"):
        run_case(case, mine, overwrite=True)
    assert (mine / "history.csv").read_text() == "my own"


def test_divergence_is_told_with_advice_and_keeps_what_was_good(case, tmp_path, monkeypatch):
    import ibsolver.run.loop as loop

    real = loop.advance

    def spoil(state, problem, dt):
        if state.step == 40:
            state.u[10, 10] = math.nan
        return real(state, problem, dt)

    monkeypatch.setattr(loop, "advance", spoil)
    with pytest.raises(DivergedError, match=r"no longer a finite number. Step 41.*run.courant"):
        run_case(case, tmp_path / "run")
    assert json.loads((tmp_path / "run" / "status.json").read_text())["state"] == "diverged"
    events = [json.loads(line) for line in (tmp_path / "run" / "log.jsonl").read_text().splitlines()]
    kept = next(event for event in events if event["event"] == "diverged")["last_steps"]
    assert len(kept) == 20
    assert len(read_history(tmp_path / "run" / "history.csv")) == 40


def test_too_little_disk_is_told_before_the_run(case, tmp_path, monkeypatch):
    import ibsolver.run.loop as loop

    monkeypatch.setattr(loop, "free_bytes", lambda folder: 1000)
    with pytest.raises(StorageError, match=r"needs about .* GB and 0\.00 GB are free"):
        run_case(case, tmp_path / "run")
    assert not (tmp_path / "run").exists()


def test_one_and_two_threads_agree(case, tmp_path):
    """To 1e-12 where a dense product is involved; here it is cut the same way for any number of threads."""
    short = dataclasses.replace(case, run=dataclasses.replace(case.run, travel=0.2))
    from ibsolver.kernels._jit import available_cores

    histories = []
    for threads in (1, min(2, available_cores())):
        run_case(short, tmp_path / str(threads), threads=threads)
        histories.append(read_history(tmp_path / str(threads) / "history.csv"))
    for name in histories[0].columns:
        np.testing.assert_allclose(histories[0][name], histories[1][name], rtol=1e-12, atol=1e-12)


def test_a_free_flap_is_recorded_and_resumes_to_the_same_bits(tmp_path):
    free = 'mount = "free"\nmass_per_area = "0.5 kg/m2"\nlimits = ["5 deg", "80 deg"]'
    text = SMALL_CASE.replace('mount = "fixed"', free)
    case = load_case(str(write_case(tmp_path, text)))
    run_case(case, tmp_path / "whole")
    with pytest.raises(InterruptedRun):
        run_case(case, tmp_path / "cut", progress=stop_at(37, signal.SIGTERM))
    resume_case(tmp_path / "cut")
    assert (tmp_path / "cut" / "history.csv").read_bytes() == (tmp_path / "whole" / "history.csv").read_bytes()
    history = read_history(tmp_path / "whole" / "history.csv")
    for name in ("opening_deg", "opening_rate", "CH", "CH_spring", "CH_stop", "power", "energy"):
        assert np.isfinite(history[f"{name}_front"]).all()
    assert np.ptp(history["opening_deg_front"]) > 0.1


def test_the_package_itself_runs_a_case(case, tmp_path):
    short = dataclasses.replace(case, run=dataclasses.replace(case.run, travel=0.05))
    result = ibsolver.run(short, out=tmp_path / "run")
    assert result.state == "finished" and result.directory == tmp_path / "run"
