"""Checkpoints: two alternating files with the complete state, exactly as in memory, each with its own checksum."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from ibsolver.errors import StorageError
from ibsolver.runfile import hdf5
from ibsolver.runfile.atomic import write_bytes
from ibsolver.runfile.layout import CHECKPOINTS, SCHEMA


@dataclass(frozen=True, eq=False)
class Checkpoint:
    """A complete state.

    Parameters
    ----------
    arrays : dict of str to ndarray
    numbers : dict
        Scalars of the state and of the output schedule.
    file : str
        Name of the file it came from.
    skipped : tuple of str
        Sentences about newer files that were damaged.
    """

    arrays: dict[str, np.ndarray]
    numbers: dict[str, Any]
    file: str
    skipped: tuple[str, ...] = ()


def write_checkpoint(
    directory: Path | str, turn: int, arrays: Mapping[str, np.ndarray], numbers: Mapping[str, Any], physics_hash: str
) -> tuple[str, str]:
    """Write a checkpoint and return its file name and sha256.

    Parameters
    ----------
    turn : int
        Running number; even and odd ones go to the two files in turn.
    numbers : mapping
        Plain numbers and strings; floats pass through JSON exactly (repr precision).
    """
    name = CHECKPOINTS[turn % 2]
    attributes = {
        "schema": SCHEMA,
        "turn": turn,
        "physics_hash": physics_hash,
        "numbers": json.dumps(dict(numbers)),
    }
    attributes["sha256"] = _digest(arrays, attributes)
    data = hdf5.image(dict(arrays), attributes, {}, compress=False)
    write_bytes(Path(directory) / name, data)
    return name, hashlib.sha256(data).hexdigest()


def has_checkpoint(directory: Path | str) -> bool:
    """Return whether a run has written a checkpoint, whole or not."""
    return any((Path(directory) / name).exists() for name in CHECKPOINTS)


def read_latest(directory: Path | str, physics_hash: str | None = None) -> Checkpoint:
    """Return the newest whole checkpoint of a run; a damaged one falls back to the other.

    Raises
    ------
    StorageError
        If neither file is whole, with what is wrong with each.
    """
    found, wrong = [], []
    for name in CHECKPOINTS:
        path = Path(directory) / name
        if not path.exists():
            continue
        try:
            found.append(_read(path, physics_hash))
        except StorageError as error:
            wrong.append(str(error))
    if not found:
        reason = " ".join(wrong) or "There is none yet: the run ended before its first one."
        raise StorageError(
            f"{directory}: no usable checkpoint. {reason} Start it anew with `ibsolver run --overwrite`."
        )
    turn, checkpoint = max(found, key=lambda pair: pair[0])
    return Checkpoint(checkpoint.arrays, checkpoint.numbers, checkpoint.file, tuple(wrong))


def _read(path: Path, physics_hash: str | None) -> tuple[int, Checkpoint]:
    arrays, attributes = hdf5.contents(path)
    if attributes.get("schema") != SCHEMA:
        raise StorageError(f"{path}: written with schema {attributes.get('schema')!r}; this version reads {SCHEMA}.")
    if attributes.get("sha256") != _digest(arrays, attributes):
        raise StorageError(f"{path}: damaged, its checksum does not match its contents.")
    if physics_hash is not None and attributes.get("physics_hash") != physics_hash:
        raise StorageError(f"{path}: belongs to another case.")
    try:
        numbers = json.loads(str(attributes["numbers"]))
        return int(attributes["turn"]), Checkpoint(arrays, numbers, path.name)
    except (KeyError, ValueError):
        raise StorageError(f"{path}: damaged, its numbers cannot be read.") from None


def _digest(arrays: Mapping[str, np.ndarray], attributes: Mapping[str, Any]) -> str:
    """Return the sha256 over the numbers, and over names, shapes and bytes of all arrays."""
    digest = hashlib.sha256()
    for name in ("turn", "physics_hash", "numbers"):
        digest.update(f"{name}={attributes.get(name)}\n".encode("utf-8", "replace"))
    for name in sorted(arrays):
        array = np.ascontiguousarray(arrays[name])
        digest.update(f"{name}{array.dtype.str}{array.shape}".encode())
        digest.update(array.tobytes())
    return digest.hexdigest()
