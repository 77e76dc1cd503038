"""Frames and checkpoints: round trips, damage of every kind, links to elsewhere."""

from __future__ import annotations

import h5py
import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from ibsolver.errors import StorageError
from ibsolver.runfile.checkpoint import read_latest, write_checkpoint
from ibsolver.runfile.frame import read_frame, read_moment, write_frame

RNG = np.random.default_rng(0)
STATE = {"u": RNG.standard_normal((5, 6)), "force": RNG.standard_normal((3, 2))}
NUMBERS = {"state": {"time": 0.1 + 0.2, "step": 7}, "schedule": {"frames": 2}}


def arrays(nx=30, ny=20, n=7):
    return {
        "x_faces": np.linspace(0, 1, nx + 1),
        "y_faces": np.linspace(0, 1, ny + 1),
        "u": RNG.standard_normal((ny, nx + 1)),
        "v": RNG.standard_normal((ny + 1, nx)),
        "p": RNG.standard_normal((ny, nx)),
        "vorticity": RNG.standard_normal((ny + 1, nx + 1)),
        "points": RNG.standard_normal((n, 2)),
        "load": RNG.standard_normal((n, 2)),
        "body": np.arange(n),
    }


def make_frame(path, **changes):
    write_frame(
        path, {**arrays(), **changes}, {"plate": np.array([[0.0, 0.0], [1.0, 0.1]])}, {"time": 1.5, "travel": 1.25}
    )
    return path


def test_a_frame_comes_back_in_single_precision_with_units(tmp_path):
    path = tmp_path / "000000.h5"
    data = arrays()
    write_frame(path, data, {"plate": np.eye(2)}, {"time": 1.5, "travel": 1.25, "title": "t"})
    frame = read_frame(path)
    np.testing.assert_array_equal(frame.u, data["u"].astype(np.float32))
    assert frame.time == 1.5 and frame.travel == 1.25 and frame.attributes["title"] == "t"
    assert frame.body.tolist() == list(range(7)) and np.isnan(frame.time_s)
    np.testing.assert_array_equal(frame.shapes["plate"], np.eye(2, dtype=np.float32))
    with h5py.File(path) as file:
        assert file["vorticity"].attrs["unit"] == "U/c"
    with pytest.raises(ValueError, match="read-only"):
        frame.u[0, 0] = 1.0


def test_arrays_that_do_not_fit_together_are_refused(tmp_path):
    path = make_frame(tmp_path / "f.h5", u=np.zeros((20, 30)))
    with pytest.raises(StorageError, match=r"u has shape \(20, 30\); \(20, 31\) was expected"):
        read_frame(path)


MUTATIONS = settings(
    max_examples=150,
    derandomize=True,
    deadline=5000,
    suppress_health_check=[HealthCheck.function_scoped_fixture],
)


def mutate(path, where, bit, cut):
    """Cut a file short, or flip one bit of it."""
    data = bytearray(path.read_bytes())
    position = int(where * len(data))
    if cut:
        del data[position:]
    else:
        data[position] ^= 1 << bit
    path.write_bytes(bytes(data))


@MUTATIONS
@given(where=st.floats(0, 0.999), bit=st.integers(0, 7), cut=st.booleans())
def test_truncated_or_flipped_frames_give_a_sentence_or_numbers(tmp_path, where, bit, cut):
    """Never another exception: a flip inside compressed data may pass, anything else is a `StorageError`."""
    path = make_frame(tmp_path / "f.h5")
    mutate(path, where, bit, cut)
    try:
        assert read_frame(path).u.shape == (20, 31)
    except StorageError as error:
        assert "f.h5" in str(error)


@MUTATIONS
@given(where=st.floats(0, 0.999), bit=st.integers(0, 7), cut=st.booleans())
def test_truncated_or_flipped_checkpoints_are_never_taken_for_whole(tmp_path, where, bit, cut):
    """Either the numbers are the right ones to the bit, or it is a sentence: a checkpoint carries its own checksum."""
    write_checkpoint(tmp_path, 1, STATE, NUMBERS, "abc")
    mutate(tmp_path / "checkpoint-b.h5", where, bit, cut)
    try:
        latest = read_latest(tmp_path)
    except StorageError as error:
        assert "checkpoint-b.h5" in str(error)
    else:
        assert latest.numbers == NUMBERS
        for name, array in STATE.items():
            assert (latest.arrays[name] == array).all()


@pytest.mark.parametrize(("old", "new"), [(b'"step": 7', b'"step": 5'), (b"0.30000000000000004", b"0.30000000000000064")])
def test_a_changed_number_in_a_checkpoint_is_damage(tmp_path, old, new):
    """The checksum covers step and time as well as the arrays."""
    path = tmp_path / write_checkpoint(tmp_path, 1, STATE, NUMBERS, "abc")[0]
    assert path.read_bytes().count(old) == 1
    path.write_bytes(path.read_bytes().replace(old, new))
    with pytest.raises(StorageError, match=r"checkpoint-b\.h5: damaged, its checksum"):
        read_latest(tmp_path)


def _scalar(file):
    del file["points"]
    file["points"] = 1.0


def _flat_outline(file):
    del file["shapes/plate"]
    file["shapes/plate"] = np.zeros(4)


def _faces_back(file):
    file["x_faces"][3] = -9.0


def _no_number(file):
    file["y_faces"][3] = np.nan


def _time_is_nan(file):
    file.attrs["time"] = np.nan


def _in_itself(file):
    for k in range(14):
        file[f"again{k}"] = file["/"]


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (_scalar, "points has shape"),
        (_flat_outline, "the outline of plate is not a row of points"),
        (_faces_back, "x_faces does not increase"),
        (_no_number, "y_faces does not increase"),
        (_time_is_nan, "its time or travel is missing"),
        (_in_itself, "more groups than any file of ours"),
    ],
)
def test_frames_of_another_making_are_sentences(tmp_path, change, words):
    path = make_frame(tmp_path / "f.h5")
    with h5py.File(path, "a") as file:
        change(file)
    with pytest.raises(StorageError, match=words):
        read_frame(path)


def test_a_further_single_number_does_no_harm(tmp_path):
    path = make_frame(tmp_path / "f.h5")
    with h5py.File(path, "a") as file:
        file["remark"] = 1.0
    assert read_frame(path).travel == 1.25


def test_the_moment_of_a_frame_is_read_without_its_arrays(tmp_path):
    path = make_frame(tmp_path / "f.h5")
    assert read_moment(path) == (1.5, 1.25)
    path.write_bytes(path.read_bytes()[:3000])
    with pytest.raises(StorageError, match="damaged"):
        read_moment(path)
    with pytest.raises(StorageError, match="no such file"):
        read_moment(tmp_path / "g.h5")


def test_links_and_virtual_datasets_are_refused(tmp_path):
    make_frame(tmp_path / "other.h5")
    for kind in ("soft", "external", "virtual"):
        path = make_frame(tmp_path / f"{kind}.h5")
        with h5py.File(path, "a") as file:
            del file["u"]
            if kind == "soft":
                file["u"] = h5py.SoftLink("/v")
            elif kind == "external":
                file["u"] = h5py.ExternalLink("other.h5", "/u")
            else:
                layout = h5py.VirtualLayout((20, 31), dtype="f4")
                layout[...] = h5py.VirtualSource(str(tmp_path / "other.h5"), "u", shape=(20, 31))
                file.create_virtual_dataset("u", layout)
        with pytest.raises(StorageError, match="never write"):
            read_frame(path)


def test_an_absurd_size_is_refused_before_it_is_allocated(tmp_path):
    path = make_frame(tmp_path / "f.h5")
    with h5py.File(path, "a") as file:
        del file["u"]
        file.create_dataset("u", shape=(1 << 20, 1 << 20), dtype="f8", chunks=(64, 64))
    with pytest.raises(StorageError, match="absurd"):
        read_frame(path)


def test_another_schema_is_a_sentence(tmp_path):
    path = make_frame(tmp_path / "f.h5")
    with h5py.File(path, "a") as file:
        file.attrs["schema"] = 99
    with pytest.raises(StorageError, match="schema 99; this version reads 1"):
        read_frame(path)


def test_checkpoints_come_back_to_the_bit_and_alternate(tmp_path):
    for turn in (1, 2, 3):
        write_checkpoint(tmp_path, turn, {k: v * turn for k, v in STATE.items()}, {**NUMBERS, "turn": turn}, "abc")
    latest = read_latest(tmp_path, "abc")
    assert latest.numbers["turn"] == 3 and latest.numbers["state"]["time"] == 0.1 + 0.2
    assert (latest.arrays["u"] == STATE["u"] * 3).all() and latest.arrays["u"].dtype == np.float64
    assert sorted(p.name for p in tmp_path.iterdir()) == ["checkpoint-a.h5", "checkpoint-b.h5"]


def test_a_damaged_checkpoint_falls_back_to_the_other(tmp_path):
    for turn in (1, 2):
        write_checkpoint(tmp_path, turn, STATE, {**NUMBERS, "turn": turn}, "abc")
    newest = tmp_path / "checkpoint-a.h5"
    data = bytearray(newest.read_bytes())
    at = data.find(STATE["u"].tobytes()[:16])
    data[at] ^= 1
    newest.write_bytes(bytes(data))
    latest = read_latest(tmp_path, "abc")
    assert latest.numbers["turn"] == 1
    assert "checksum" in latest.skipped[0]


def test_no_checkpoint_and_a_foreign_one_are_sentences(tmp_path):
    with pytest.raises(StorageError, match="no usable checkpoint"):
        read_latest(tmp_path, "abc")
    write_checkpoint(tmp_path, 1, STATE, NUMBERS, "abc")
    with pytest.raises(StorageError, match="belongs to another case"):
        read_latest(tmp_path, "xyz")
