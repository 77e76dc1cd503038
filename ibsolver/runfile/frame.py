"""Frames: one file each, single precision, compressed."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np

from ibsolver.errors import StorageError
from ibsolver.runfile import hdf5
from ibsolver.runfile.atomic import write_bytes
from ibsolver.runfile.layout import FRAME_DATASETS, SCHEMA, SHAPES_GROUP


@dataclass(frozen=True, eq=False)
class Frame:
    """The flow at one time; arrays as in `ibsolver.runfile.layout`, read-only."""

    x_faces: np.ndarray
    y_faces: np.ndarray
    u: np.ndarray
    v: np.ndarray
    p: np.ndarray
    vorticity: np.ndarray
    points: np.ndarray
    load: np.ndarray
    body: np.ndarray
    shapes: dict[str, np.ndarray] = field(default_factory=dict)
    attributes: dict[str, Any] = field(default_factory=dict)

    @property
    def time(self) -> float:
        """Time since the start of the tow (c/U)."""
        return float(self.attributes["time"])

    @property
    def travel(self) -> float:
        """Distance towed (chords)."""
        return float(self.attributes["travel"])

    @property
    def time_s(self) -> float:
        """Time since the start of the tow (s); nan in a dimensionless run."""
        return float(self.attributes.get("time_s", float("nan")))


def write_frame(
    path: Path | str, arrays: Mapping[str, np.ndarray], shapes: Mapping[str, np.ndarray], attributes: Mapping[str, Any]
) -> int:
    """Write a frame atomically and return its size in bytes.

    Parameters
    ----------
    arrays : mapping
        Every dataset of `ibsolver.runfile.layout.FRAME_DATASETS`.
    shapes : mapping
        Outline of each body by name, shape (k, 2), for drawing.
    attributes : mapping
        Time, travel, reference values, sign convention, case hash.
    """
    units = {dataset.name: dataset.unit for dataset in FRAME_DATASETS}
    datasets = {dataset.name: arrays[dataset.name] for dataset in FRAME_DATASETS}
    for name, outline in shapes.items():
        datasets[f"{SHAPES_GROUP}/{name}"] = outline
        units[f"{SHAPES_GROUP}/{name}"] = "chords"
    data = hdf5.image(datasets, {"schema": SCHEMA, **attributes}, units, compress=True)
    write_bytes(path, data)
    return len(data)


def read_frame(path: Path | str) -> Frame:
    """Return the frame in a file.

    Raises
    ------
    StorageError
        If the file is damaged, of another version, or its arrays do not fit together.
    """
    datasets, attributes = hdf5.contents(path)
    if attributes.get("schema") != SCHEMA:
        raise StorageError(
            f"{path}: written with frame schema {attributes.get('schema')!r}; this version reads {SCHEMA}."
        )
    _moment(attributes, path)
    prefix = SHAPES_GROUP + "/"
    shapes = {name[len(prefix) :]: array for name, array in datasets.items() if name.startswith(prefix)}
    _check_shapes(datasets, path)
    _check_geometry(datasets, shapes, path)
    for array in datasets.values():
        array.flags.writeable = False
    fields = {dataset.name: datasets[dataset.name] for dataset in FRAME_DATASETS}
    return Frame(**fields, shapes=shapes, attributes=attributes)


def read_moment(path: Path | str) -> tuple[float, float]:
    """Return (time, travel) of a frame without unpacking its arrays.

    Raises
    ------
    StorageError
        If the file is damaged, or its time or travel is missing.
    """
    return _moment(hdf5.attributes(path), path)


def _moment(attributes: Mapping[str, Any], path: Path | str) -> tuple[float, float]:
    values = [attributes.get(name) for name in ("time", "travel")]
    if not all(isinstance(value, (int, float)) and math.isfinite(value) for value in values):
        raise StorageError(f"{path}: damaged, its time or travel is missing.")
    return float(values[0]), float(values[1])


def _check_geometry(
    datasets: Mapping[str, np.ndarray], shapes: Mapping[str, np.ndarray], path: Path | str
) -> None:
    """Refuse grid lines that do not run on, and outlines that are no rows of points."""
    for name in ("x_faces", "y_faces"):
        if not (np.diff(datasets[name]) > 0).all():
            raise StorageError(f"{path}: damaged, {name} does not increase from one to the next.")
    for name, outline in shapes.items():
        if outline.ndim != 2 or outline.shape[1] != 2 or not np.isfinite(outline).all():
            raise StorageError(f"{path}: damaged, the outline of {name} is not a row of points.")


def _check_shapes(datasets: Mapping[str, np.ndarray], path: Path | str) -> None:
    """Compare every dataset's shape with the layout's."""
    missing = [dataset.name for dataset in FRAME_DATASETS if dataset.name not in datasets]
    if missing:
        raise StorageError(f"{path}: damaged, {', '.join(missing)} is missing.")
    sizes = {"nx": datasets["x_faces"].size - 1, "ny": datasets["y_faces"].size - 1, "n": len(np.atleast_1d(datasets["points"]))}
    for dataset in FRAME_DATASETS:
        wanted = tuple(_size(term, sizes) for term in dataset.shape)
        if datasets[dataset.name].shape != wanted:
            found = datasets[dataset.name].shape
            raise StorageError(f"{path}: damaged, {dataset.name} has shape {found}; {wanted} was expected.")


def _size(term: str, sizes: Mapping[str, int]) -> int:
    name, _, extra = term.partition("+")
    return (sizes[name] if name in sizes else int(name)) + int(extra or 0)
