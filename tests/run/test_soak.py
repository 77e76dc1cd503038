"""A night in short: kills at random moments, and a disk that fills up at many points.

By default a few of each; `pytest -m long` does a hundred kills. IBSOLVER_SOAK sets another number.
"""

from __future__ import annotations

import dataclasses
import errno
import filecmp
import os
import random
import signal
import subprocess
import sys
import time

import pytest

from ibsolver.case import load_case
from ibsolver.errors import StorageError
from ibsolver.run.loop import resume_case, run_case
from ibsolver.runfile import atomic
from ibsolver.runfile.checkpoint import has_checkpoint, read_latest
from ibsolver.runfile.frame import read_frame
from ibsolver.runfile.history import read_history
from tests.runs import SMALL_CASE, write_case

TEXT = SMALL_CASE.replace("travel = 0.6", "travel = 6").replace(
    "frame_every = 0.1", 'frame_every = 0.1\ncheckpoint_every = "1 s"'
)


def small_case(folder):
    case = load_case(str(write_case(folder, TEXT)))
    return dataclasses.replace(case, output=dataclasses.replace(case.output, checkpoint_every=0.1))


@pytest.fixture(scope="module")
def uninterrupted(tmp_path_factory):
    folder = tmp_path_factory.mktemp("whole")
    run_case(small_case(folder), folder / "run")
    return folder / "run"


def assert_all_files_are_whole(directory):
    for path in (directory / "frames").glob("[0-9]*.h5"):
        read_frame(path)
    if (directory / "history.csv").exists():
        read_history(directory / "history.csv")
    if has_checkpoint(directory):
        assert read_latest(directory).skipped == ()


def assert_equal_runs(one, other):
    assert (one / "history.csv").read_bytes() == (other / "history.csv").read_bytes()
    names = sorted(p.name for p in (one / "frames").iterdir())
    assert names == sorted(p.name for p in (other / "frames").glob("[0-9]*.h5"))
    for name in names:
        assert filecmp.cmp(one / "frames" / name, other / "frames" / name, shallow=False), name
    final, again = read_latest(one), read_latest(other)
    assert final.numbers["state"] == again.numbers["state"]
    for name, array in final.arrays.items():
        assert (array == again.arrays[name]).all(), name


WORKER = """
import dataclasses, sys
from ibsolver.case import load_case
from ibsolver.run.loop import run_case
case = load_case(sys.argv[1])
case = dataclasses.replace(case, output=dataclasses.replace(case.output, checkpoint_every=0.1))
print("begins", flush=True)
run_case(case, sys.argv[2])
"""


def kill_and_resume(folder, uninterrupted, count, seed):
    chance = random.Random(seed)
    case_file, resumed_from = write_case(folder, TEXT), []
    for number in range(count):
        out = folder / f"run{number}"
        command = [sys.executable, "-c", WORKER, str(case_file), str(out)]
        process = subprocess.Popen(command, stdout=subprocess.PIPE, text=True)
        process.stdout.readline()
        time.sleep(chance.uniform(0.02, 2.2))
        process.send_signal(signal.SIGKILL)
        process.wait()
        process.stdout.close()
        if not out.exists():  # killed before the directory was made: nothing to lose
            continue
        assert_all_files_are_whole(out)
        resume_case(out)
        assert_equal_runs(uninterrupted, out)
        resumed_from.append(number)
    return resumed_from


def test_killed_runs_are_whole_and_resume_to_the_same_bits(tmp_path, uninterrupted):
    assert kill_and_resume(tmp_path, uninterrupted, int(os.environ.get("IBSOLVER_SOAK", "6")), 1)


@pytest.mark.long
def test_a_hundred_kills(tmp_path, uninterrupted):
    assert len(kill_and_resume(tmp_path, uninterrupted, 100, 2)) > 50


class FullDisk:
    """Lets a number of durable writes pass, then refuses every further byte until there is space again."""

    def __init__(self, monkeypatch, passing):
        self.left = passing
        self.full = False
        real = os.fsync

        def fsync(descriptor):
            self.left -= 1
            self.full = self.left < 0
            if self.full:
                raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
            real(descriptor)

        monkeypatch.setattr(atomic.os, "fsync", fsync)


@pytest.mark.parametrize("passing", range(3, 83, 4))
def test_a_disk_that_fills_up_loses_nothing_earlier(tmp_path, uninterrupted, monkeypatch, passing):
    case = small_case(tmp_path)
    with monkeypatch.context() as patch:
        FullDisk(patch, passing)
        with pytest.raises(StorageError, match=r"the disk is full.*bytes"):
            run_case(case, tmp_path / "run")
    out = tmp_path / "run"
    if not (out / "resolved.json").exists():
        assert not out.exists()
        return
    assert_all_files_are_whole(out)
    assert not list(out.rglob("*.part"))
    resume_case(out)
    assert_equal_runs(uninterrupted, out)
