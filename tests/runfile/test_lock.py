"""One writer per run directory."""

from __future__ import annotations

import json
import os
import socket
import subprocess
import sys
import time

import pytest

from ibsolver.errors import StorageError
from ibsolver.runfile.lock import WriterLock, writer_alive


def test_a_second_writer_is_told_who_the_first_is(tmp_path):
    with WriterLock(tmp_path):
        with pytest.raises(StorageError, match=f"process {os.getpid()} on {socket.gethostname()} is writing"):
            with WriterLock(tmp_path):
                pass
    assert list(tmp_path.iterdir()) == []


def test_the_lock_of_a_killed_process_is_taken_over(tmp_path):
    code = (
        "import sys, os, signal; from ibsolver.runfile.lock import WriterLock;"
        "WriterLock(sys.argv[1]).__enter__(); os.kill(os.getpid(), signal.SIGKILL)"
    )
    subprocess.run([sys.executable, "-c", code, str(tmp_path)], check=False)
    assert (tmp_path / "writer.lock").exists()
    with WriterLock(tmp_path):
        pass


def test_a_number_given_to_another_process_does_not_hold_the_lock(tmp_path):
    holder = {"host": socket.gethostname(), "pid": os.getpid(), "begun": "1"}
    (tmp_path / "writer.lock").write_text(json.dumps(holder))
    with WriterLock(tmp_path):
        pass


def test_a_writer_on_another_host_counts_as_gone_only_after_ten_minutes(tmp_path):
    path = tmp_path / "writer.lock"
    path.write_text(json.dumps({"host": "elsewhere", "pid": 1, "begun": None}))
    with pytest.raises(StorageError, match="elsewhere"):
        with WriterLock(tmp_path):
            pass
    old = time.time() - 700
    os.utime(path, (old, old))
    with WriterLock(tmp_path):
        pass


RIVAL = """
import json, sys, time
from pathlib import Path
from ibsolver.errors import StorageError
from ibsolver.runfile.lock import WriterLock
folders = sorted(Path(sys.argv[1]).iterdir())
print("ready", flush=True)
sys.stdin.readline()
won = []
for folder in folders:
    try:
        WriterLock(folder).__enter__()
        won.append(folder.name)
    except StorageError:
        pass
print(json.dumps(won), flush=True)
sys.stdin.readline()
"""


def test_of_several_who_find_a_dead_writer_exactly_one_goes_on(tmp_path):
    """Six processes go for the same sixty directories at once; all live until the last has looked."""
    dead = subprocess.Popen([sys.executable, "-c", ""])
    dead.wait()
    for k in range(60):
        (tmp_path / f"{k:02d}").mkdir()
        holder = {"host": socket.gethostname(), "pid": dead.pid, "begun": "1"}
        (tmp_path / f"{k:02d}" / "writer.lock").write_text(json.dumps(holder))
    pipes = {"stdin": subprocess.PIPE, "stdout": subprocess.PIPE, "text": True}
    rivals = [subprocess.Popen([sys.executable, "-c", RIVAL, str(tmp_path)], **pipes) for _ in range(6)]
    for rival in rivals:
        assert rival.stdout.readline() == "ready\n"
    for rival in rivals:
        rival.stdin.write("\n")
        rival.stdin.flush()
    won = [name for rival in rivals for name in json.loads(rival.stdout.readline())]
    for rival in rivals:
        rival.communicate("\n")
    assert sorted(won) == [f"{k:02d}" for k in range(60)]


def test_leaving_does_not_remove_the_lock_of_a_successor(tmp_path):
    path = tmp_path / "writer.lock"
    with WriterLock(tmp_path):
        path.write_text(json.dumps({"host": "elsewhere", "pid": 1, "begun": None}))
    assert json.loads(path.read_text())["host"] == "elsewhere"


@pytest.mark.parametrize("text", ["[1]", "{", "\x00" * 50, '{"host": null}', "[" * 100000])
def test_a_damaged_lock_counts_as_held_until_it_is_old(tmp_path, text):
    path = tmp_path / "writer.lock"
    path.write_text(text)
    assert writer_alive(tmp_path)
    with pytest.raises(StorageError, match="is writing this run"):
        with WriterLock(tmp_path):
            pass
    os.utime(path, (time.time() - 700,) * 2)
    assert not writer_alive(tmp_path)
    with WriterLock(tmp_path):
        pass


@pytest.mark.parametrize("pid", [-1, 0, 1 << 40, "7"])
def test_a_number_that_no_process_has_is_no_writer(tmp_path, pid):
    path = tmp_path / "writer.lock"
    path.write_text(json.dumps({"host": socket.gethostname(), "pid": pid, "begun": None}))
    os.utime(path, (time.time() - 10,) * 2)
    with WriterLock(tmp_path):
        assert json.loads(path.read_text())["pid"] == os.getpid()
