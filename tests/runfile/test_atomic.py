"""Whole files or none, and sentences for what goes wrong."""

from __future__ import annotations

import errno
import os

import pytest

from ibsolver.errors import StorageError
from ibsolver.runfile import atomic


def test_a_file_is_replaced_whole(tmp_path):
    path = tmp_path / "a.bin"
    atomic.write_bytes(path, b"old")
    atomic.write_bytes(path, b"new and longer")
    assert path.read_bytes() == b"new and longer"
    assert [p.name for p in tmp_path.iterdir()] == ["a.bin"]


@pytest.mark.parametrize("call", ["fsync", "replace"])
def test_a_full_disk_leaves_the_old_file_and_tells_the_bytes(tmp_path, monkeypatch, call):
    path = tmp_path / "a.bin"
    atomic.write_bytes(path, b"old")

    def full(*_):
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, call, full)
    with pytest.raises(StorageError, match=r"a\.bin: the disk is full.*needs 12,345 bytes.*resume"):
        atomic.write_bytes(path, b"x" * 12345)
    monkeypatch.undo()
    assert path.read_bytes() == b"old"
    assert [p.name for p in tmp_path.iterdir()] == ["a.bin"]


@pytest.mark.skipif(os.path.exists("/dev/full") is False, reason="needs /dev/full")
def test_a_device_that_is_full_gives_the_same_sentence():
    from ibsolver.runfile.history import HistoryWriter

    writer = HistoryWriter.__new__(HistoryWriter)
    writer.path, writer._names, writer._lines, writer._flushed = "/dev/full", ("step",), ["1\n"], 0.0
    with pytest.raises(StorageError, match="the disk is full"):
        writer.flush()


def test_a_folder_that_is_not_there_is_a_sentence(tmp_path):
    with pytest.raises(StorageError, match="No such file or directory"):
        atomic.write_bytes(tmp_path / "no" / "a.bin", b"x")


@pytest.mark.parametrize("text", ["", "[1]", "{", "nul\x00", "[" * 100000])
def test_damaged_json_is_a_sentence(tmp_path, text):
    path = tmp_path / "x.json"
    path.write_text(text)
    with pytest.raises(StorageError, match=r"x\.json: damaged"):
        atomic.read_json(path)


def test_numbers_that_are_not_finite_become_null(tmp_path):
    atomic.write_json(tmp_path / "x.json", {"a": float("nan"), "b": [float("inf"), 1.5]})
    assert atomic.read_json(tmp_path / "x.json") == {"a": None, "b": [None, 1.5]}
