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
from ibsolver.runfile.lock import WriterLock


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
