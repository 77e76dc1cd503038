"""History: exact numbers, torn lines, cutting for a resumed run."""

from __future__ import annotations

import errno
import math
import subprocess
import sys
import time

import numpy as np
import pytest

from ibsolver.errors import StorageError
from ibsolver.runfile import history
from ibsolver.runfile.history import HistoryWriter, cut_after, read_history

COLUMNS = {"step": "number [1]", "time": "time [c/U]", "CL": "lift [1]"}


def written(path, rows=5):
    writer = HistoryWriter(path, COLUMNS, {"case": "t"})
    for k in range(1, rows + 1):
        writer.append({"step": k, "time": k / 3, "CL": math.sin(k)})
    writer.flush(sync=True)
    return path


def test_numbers_come_back_to_the_bit(tmp_path):
    rows = read_history(written(tmp_path / "h.csv"))
    assert rows["time"].tolist() == [k / 3 for k in range(1, 6)]
    assert rows["CL"].tolist() == [math.sin(k) for k in range(1, 6)]
    assert rows.meanings["time"] == "time [c/U]"
    assert len(rows) == 5 and "CD" not in rows
    with pytest.raises(KeyError, match="there are step, time, CL"):
        rows["CD"]


def test_any_torn_last_line_is_dropped(tmp_path):
    path = written(tmp_path / "h.csv")
    whole = path.read_bytes()
    last = whole.rstrip(b"\n").rfind(b"\n") + 1
    for end in range(last, len(whole)):
        path.write_bytes(whole[:end])
        assert read_history(path)["step"].tolist() == [1, 2, 3, 4]


def test_damage_in_the_middle_names_the_line(tmp_path):
    path = written(tmp_path / "h.csv")
    lines = path.read_text().splitlines(keepends=True)
    lines[-3] = "3,abc\n"
    path.write_text("".join(lines))
    with pytest.raises(StorageError, match=rf"h\.csv:{len(lines) - 2}: damaged line, 3 numbers"):
        read_history(path)


@pytest.mark.parametrize("line", ["7", "3,0.5", "3,1,2,3", "", "3,,1"])
def test_a_line_with_another_number_of_values_is_damage(tmp_path, line):
    path = written(tmp_path / "h.csv")
    lines = path.read_text().splitlines()
    lines[-3] = line
    path.write_text("\n".join(lines) + "\n")
    with pytest.raises(StorageError, match=rf"h\.csv:{len(lines) - 2}: damaged line, 3 numbers"):
        read_history(path)


class HalfWritten:
    """A file on a disk that fills up in the middle of a write."""

    def __init__(self, file, share):
        self.file, self.share = file, share

    def __enter__(self):
        return self

    def __exit__(self, *_):
        self.file.close()

    def __getattr__(self, name):
        return getattr(self.file, name)

    def write(self, data):
        self.file.write(data[: int(self.share * len(data))])
        self.file.flush()
        raise OSError(errno.ENOSPC, "No space left on device")


@pytest.mark.parametrize("share", [0.0, 0.3, 0.5, 0.99, 1.0])
def test_what_a_full_disk_took_half_is_taken_back_and_written_again(tmp_path, monkeypatch, share):
    path = tmp_path / "h.csv"
    writer = HistoryWriter(path, COLUMNS)
    writer.append({"step": 1, "time": 1 / 3, "CL": 0.1})
    writer.flush()
    before = path.read_bytes()
    for k in (2, 3):
        writer.append({"step": k, "time": k / 3, "CL": 0.1 * k})
    monkeypatch.setattr(history, "open", lambda *a, **k: HalfWritten(open(*a, **k), share), raising=False)
    with pytest.raises(StorageError, match="the disk is full"):
        writer.flush()
    monkeypatch.undo()
    assert path.read_bytes() == before
    writer.flush(sync=True)
    assert read_history(path)["time"].tolist() == [1 / 3, 2 / 3, 1.0]


def test_a_kill_in_the_middle_of_writing_leaves_whole_rows(tmp_path):
    """A writer is killed at five moments: what is there are rows 1, 2, 3 ... to the bit, and writing can go on."""
    code = (
        "import sys; from ibsolver.runfile.history import HistoryWriter\n"
        "writer = HistoryWriter(sys.argv[1], {'step': '', 'time': '', 'CL': ''}); k = 0\n"
        "while True:\n"
        "    k += 1; writer.append({'step': k, 'time': k / 3, 'CL': k / 7}); writer.flush()\n"
        "    if k == 20: print('begun', flush=True)\n"
    )
    for pause in (0.0, 0.003, 0.007, 0.02, 0.05):
        path = tmp_path / f"{pause}.csv"
        process = subprocess.Popen([sys.executable, "-c", code, str(path)], stdout=subprocess.PIPE)
        process.stdout.readline()
        time.sleep(pause)
        process.kill()
        process.communicate()
        rows = read_history(path)
        assert len(rows) >= 20
        assert rows["step"].tolist() == list(range(1, len(rows) + 1))
        assert rows["CL"].tolist() == [k / 7 for k in range(1, len(rows) + 1)]
        HistoryWriter(path, COLUMNS, resume_after=12).flush()
        assert read_history(path)["step"].tolist() == list(range(1, 13))


def test_cutting_keeps_the_head_and_the_rows_up_to_the_step(tmp_path):
    path = written(tmp_path / "h.csv")
    with open(path, "a") as file:
        file.write("6,2.0")
    cut_after(path, 3)
    assert read_history(path)["step"].tolist() == [1, 2, 3]
    again = HistoryWriter(path, COLUMNS, resume_after=2)
    again.append({"step": 3, "time": 1.0, "CL": np.nan})
    again.flush()
    rows = read_history(path)
    assert rows["step"].tolist() == [1, 2, 3] and math.isnan(rows["CL"][2])


@pytest.mark.parametrize("content", [b"", b"a,b\n1,2\n", b"\xff\xfe\x00\n", b"# only comments\n"])
def test_what_is_no_history_is_a_sentence(tmp_path, content):
    path = tmp_path / "h.csv"
    path.write_bytes(content)
    with pytest.raises(StorageError):
        read_history(path)
