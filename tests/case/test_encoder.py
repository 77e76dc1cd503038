"""The carriage's encoder file, and the faults such files have."""

from __future__ import annotations

import os

import pytest
from hypothesis import given
from hypothesis import strategies as st

from ibsolver.case.encoder import MOST_POINTS, Record, mean_between, normalised, read_encoder, thinned
from ibsolver.case.values import ValueFault

from .helpers import BARE, PLATE, faults, one_fault, read

ROWS = "0, 0\n1, 0.01\n2, 0.02\n3, 0.02\n12, 0.02\n"
TOWED = PLATE.replace('speed = "20 mm/s"', 'profile = "carriage.csv"')


def write(folder, content, name="carriage.csv"):
    (folder / name).write_bytes(content if isinstance(content, bytes) else content.encode())
    return folder


def test_plain_rows(tmp_path):
    record = read_encoder("carriage.csv", write(tmp_path, ROWS))
    assert record.times == (0, 1, 2, 3, 12) and record.speeds == (0, 0.01, 0.02, 0.02, 0.02)
    assert record.final_speed == pytest.approx(0.02, rel=1e-14)


@pytest.mark.parametrize(
    "content",
    [
        "time_s, speed_m_s\n" + ROWS,
        b"\xef\xbb\xbf# run 7\r\ntime_s,speed_m_s\r\n" + ROWS.replace("\n", "\r\n").encode(),
        '"time_s","speed_m_s"\n' + "".join('"' + '","'.join(row.split(", ")) + '"\n' for row in ROWS.split("\n")[:-1]),
        "speed_mm_s, note, time_ms\n0, 1, 0\n10, 1, 1000\n20, 1, 2000\n20, 1, 3000\n20, 1, 12000\n",
        "# c\n\n" + ROWS.replace("1, 0.01", "1, 0.01 # jerk here") + "\n\n",
        "5, 0\n6, 0.01\n7, 0.02\n8, 0.02\n17, 0.02\n",
    ],
)
def test_accepted_spellings(tmp_path, content):
    record = read_encoder("carriage.csv", write(tmp_path, content))
    assert record.times == pytest.approx((0, 1, 2, 3, 12), abs=1e-12)
    assert record.speeds == pytest.approx((0, 0.01, 0.02, 0.02, 0.02))


@pytest.mark.parametrize(
    ("content", "line", "problem"),
    [
        ("0; 0\n1; 0.01\n", 1, "has semicolons between its fields."),
        ("0,0,0,0\n1,5,0,01\n2,5,0,02\n", 1, "has decimal commas."),
        ('"0,0","0,0"\n"1,5","0,01"\n', 1, "has decimal commas."),
        ("time_s,speed_m_s\n0,0,0,1\n", 2, "has decimal commas."),
        ("0, 0\n1, 1\n2, 2\n2, 3\n", 4, "repeats the time of the row before."),
        ("0, 0\n1, 1\n2, 2\n1.5, 3\n", 4, "is earlier than the row before."),
        ("0, 0\n# note\n1, nan\n", 3, "is not a finite number."),
        ("0, 0\n1, inf\n", 2, "is not a finite number."),
        ("0, 0\n1, 1e400\n", 2, "is too large to be a number."),
        ("0, 0\n1, fast\n", 2, "is not a number."),
        ("0, 0\n1, \n", 2, "is not a number."),
        ("0, 0\n1\n", 2, "has 1 fields where 2 are due."),
        ("0, 0, 0\n1, 1, 1\n2, 2, 2\n3, 3, 3\n", 1, "needs two columns, or a header time_s, speed_m_s."),
        ('0, "0\n1, 1\n', 1, "has quotes that do not match."),
        ("t, v\n0, 0\n1, 1\n2, 2\n3, 3\n", 1, "has a header without one time and one speed column."),
        ("0, 0\n1, 1\n2, 2\n", 0, "has 3 rows; at least 4 are needed."),
        ("", 0, "holds no rows of numbers."),
        ("# only a comment\n", 0, "holds no rows of numbers."),
        (b"0, 0\n1, \xff\n", 0, "is not UTF-8 text (line 2)."),
        (b"\xff\xfe0\x00", 0, "is written in UTF-16."),
    ],
)  # fmt: skip
def test_refused_with_the_line(tmp_path, content, line, problem):
    with pytest.raises(ValueFault) as caught:
        read_encoder("carriage.csv", write(tmp_path, content))
    error = caught.value
    assert (error.file, error.line, error.problem) == ("carriage.csv", line, problem)
    assert error.suggestion


def test_a_file_of_more_than_64_mb_is_refused_before_it_is_read(tmp_path):
    with open(tmp_path / "carriage.csv", "wb") as file:
        file.truncate(64_000_001)
    with pytest.raises(ValueFault, match="has 64 MB; at most 64 MB are read"):
        read_encoder("carriage.csv", tmp_path)


@pytest.mark.parametrize("name", ["/etc/hostname", "../carriage.csv", "a/../../carriage.csv", "C:\\x.csv", "..\\x.csv"])
def test_a_path_out_of_the_folder_is_refused(tmp_path, name):
    inner = tmp_path / "inner"
    inner.mkdir()
    write(tmp_path, ROWS)
    with pytest.raises(ValueFault, match="leaves the folder of the case"):
        read_encoder(name, inner)


def test_a_link_out_of_the_folder_is_refused_and_one_within_it_followed(tmp_path):
    inner = tmp_path / "inner"
    inner.mkdir()
    write(tmp_path, ROWS)
    os.symlink(tmp_path / "carriage.csv", inner / "out.csv")
    with pytest.raises(ValueFault, match="leaves the folder of the case"):
        read_encoder("out.csv", inner)
    write(inner, ROWS)
    os.symlink("carriage.csv", inner / "in.csv")
    assert len(read_encoder("in.csv", inner).times) == 5


def test_what_is_no_plain_file_is_refused(tmp_path):
    (tmp_path / "folder.csv").mkdir()
    os.mkfifo(tmp_path / "pipe.csv")
    os.symlink("loop.csv", tmp_path / "loop.csv")
    for name, problem in (("folder.csv", "is not a plain file"), ("pipe.csv", "is not a plain file"),
                          ("none.csv", "is not there"), ("loop.csv", "cannot be read"), ("a\0b", "cannot be read"),
                          ("x" * 3000, "cannot be read")):  # fmt: skip
        with pytest.raises(ValueFault, match=problem):
            read_encoder(name, tmp_path)


def test_a_profile_in_a_case(tmp_path):
    case = read(TOWED, write(tmp_path, ROWS))
    assert case.tow.profile_file == "carriage.csv"
    assert case.tow.speed == pytest.approx(0.02, rel=1e-14)  # mean of the last tenth
    # t U / c = t * 0.02 / 0.05
    times, speeds = zip(*case.tow.profile, strict=True)
    assert times == pytest.approx((0, 0.4, 0.8, 1.2, 4.8), rel=1e-14)
    assert speeds == pytest.approx((0, 0.5, 1, 1, 1), rel=1e-14)


def test_a_stated_speed_is_the_reference_of_a_profile(tmp_path):
    case = read(TOWED + 'speed = "40 mm/s"\n', write(tmp_path, ROWS))
    assert case.tow.speed == 0.04 and case.tow.reynolds == pytest.approx(2000)
    assert case.tow.profile[-1] == pytest.approx((9.6, 0.5))


def test_faults_of_a_profile_in_a_case(tmp_path):
    write(tmp_path, "0, 0\n1, 1\n0.5, 1\n3, 1\n")
    assert str(one_fault(TOWED, tmp_path)) == (
        "carriage.csv:3: row = 0.5, 1: is earlier than the row before. Sort the rows by time."
    )
    write(tmp_path, "0, 0\n1, 1\n2, 1\n3, 0\n30, 0\n")
    assert "no forward speed in its last tenth" in one_fault(TOWED, tmp_path).problem
    write(tmp_path, ROWS)
    assert one_fault(TOWED + 'start = "linear"\n', tmp_path).problem == (
        "is given beside profile; the encoder's own start is used."
    )
    bare = BARE + 'profile = "carriage.csv"\n'
    assert "needs [fluid] and a chord" in one_fault(bare, tmp_path).problem
    assert [fault.key for fault in faults(TOWED)] == ["tow.profile"]


def test_a_profile_that_is_too_fast_is_refused(tmp_path):
    write(tmp_path, ROWS.replace("0.0", "5.0"))
    assert one_fault(TOWED, tmp_path).problem.startswith("gives a Reynolds number of 2.5")


def test_thinning_keeps_ends_range_and_travel():
    times = tuple(0.001 * i for i in range(20_001))
    speeds = tuple(min(1.0, t) + (0.05 if i % 2 else -0.05) for i, t in enumerate(times))
    record = Record(times, speeds)
    points = normalised(record, 1.0, 1.0)
    assert len(points) == MOST_POINTS
    assert points[0] == (0.0, speeds[0]) and points[-1] == (20.0, speeds[-1])
    inner = [u for t, u in points if 2 < t < 19]
    assert max(abs(u - 1) for u in inner) < 0.01  # the noise is averaged away
    travel = sum(0.5 * (u0 + u1) * (t1 - t0) for (t0, u0), (t1, u1) in zip(points, points[1:], strict=False))
    assert travel == pytest.approx(19.5, rel=1e-3)


@given(st.lists(st.floats(-1, 1), min_size=4, max_size=60), st.integers(4, 20))
def test_thinning_invents_no_extremes(values, most):
    times = tuple(float(i) for i in range(len(values)))
    kept, means = thinned(times, tuple(values), most)
    assert kept[0] == 0 and kept[-1] == times[-1] and all(a < b for a, b in zip(kept, kept[1:], strict=False))
    assert min(values) - 1e-9 <= min(means) and max(means) <= max(values) + 1e-9


def test_mean_between_is_exact_for_a_straight_line():
    assert mean_between((0.0, 1.0, 4.0), (0.0, 2.0, 8.0), 0.5, 3.5) == pytest.approx(4.0, rel=1e-14)
