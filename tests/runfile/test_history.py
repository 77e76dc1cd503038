"""History: exact numbers, torn lines, cutting for a resumed run."""

from __future__ import annotations

import math

import numpy as np
import pytest

from ibsolver.errors import StorageError
from ibsolver.runfile.history import HistoryWriter, cut_after, read_history

COLUMNS = {"step": "number [1]", "time": "time [c/U]", "CL": "lift [1]"}


def written(path, rows=5):
    writer = HistoryWriter(path, COLUMNS, {"case": "t"})
    for k in range(1, rows + 1):
        writer.append({"step": k, "time": k / 3, "CL": math.sin(k)})
    writer.flush(sync=True)
    return path


def test_numbers_come_back_to_the_bit(tmp_path):
    history = read_history(written(tmp_path / "h.csv"))
    assert history["time"].tolist() == [k / 3 for k in range(1, 6)]
    assert history["CL"].tolist() == [math.sin(k) for k in range(1, 6)]
    assert history.meanings["time"] == "time [c/U]"
    assert len(history) == 5 and "CD" not in history
    with pytest.raises(KeyError, match="there are step, time, CL"):
        history["CD"]


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


def test_cutting_keeps_the_head_and_the_rows_up_to_the_step(tmp_path):
    path = written(tmp_path / "h.csv")
    with open(path, "a") as file:
        file.write("6,2.0")
    cut_after(path, 3)
    assert read_history(path)["step"].tolist() == [1, 2, 3]
    again = HistoryWriter(path, COLUMNS, resume_after=2)
    again.append({"step": 3, "time": 1.0, "CL": np.nan})
    again.flush()
    history = read_history(path)
    assert history["step"].tolist() == [1, 2, 3] and math.isnan(history["CL"][2])


@pytest.mark.parametrize("content", [b"", b"a,b\n1,2\n", b"\xff\xfe\x00\n", b"# only comments\n"])
def test_what_is_no_history_is_a_sentence(tmp_path, content):
    path = tmp_path / "h.csv"
    path.write_bytes(content)
    with pytest.raises(StorageError):
        read_history(path)
