"""HDF5 images in memory: written to bytes, read from bytes after a look at what they ask for.

No HDF5 file is ever open on disk: the image is built in memory and written in one go, and on reading the whole file is
taken into memory first, so a damaged file gives an error and not a crash halfway through.
"""

from __future__ import annotations

import contextlib
import io
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

import h5py
import numpy as np

from ibsolver.errors import StorageError
from ibsolver.runfile.atomic import storage_error

LARGEST_FILE = 8 << 30
INFLATION = 1100  # deflate packs at most about 1030 to 1 (RFC 1951); what claims more is damaged
SMALL = 64 << 20  # always allowed


def image(
    datasets: Mapping[str, np.ndarray], attributes: Mapping[str, Any], units: Mapping[str, str], compress: bool
) -> bytes:
    """Return an HDF5 file as bytes.

    Parameters
    ----------
    datasets : mapping of str to ndarray
        A name may hold a group, such as ``shapes/plate``.
    attributes : mapping
        Of the root: numbers and strings.
    units : mapping of str to str
        Attribute ``unit`` of each dataset.
    compress : bool
        Whether floats are stored in single precision, shuffled and compressed; otherwise exactly as they are.
    """
    buffer = io.BytesIO()
    with h5py.File(buffer, "w") as file:
        for name, value in datasets.items():
            array = np.asarray(value)
            options: dict[str, Any] = {}
            if compress and array.dtype.kind == "f":
                array = array.astype(np.float32)
            if compress and array.size > 1000:
                options = {"compression": "gzip", "compression_opts": 2, "shuffle": True, "chunks": array.shape}
            dataset = file.create_dataset(name, data=array, track_times=False, **options)
            dataset.attrs["unit"] = units.get(name, "")
        for name, value in attributes.items():
            file.attrs[name] = value
    return buffer.getvalue()


def contents(path: Path | str) -> tuple[dict[str, np.ndarray], dict[str, Any]]:
    """Return all datasets and root attributes of an HDF5 file.

    Raises
    ------
    StorageError
        If the file is missing, truncated, damaged, larger than anything we write, or points outside itself.
    """
    with _opened(path) as (file, size):
        datasets: dict[str, np.ndarray] = {}
        _collect(file, "", datasets, Path(path), [max(SMALL, INFLATION * size)])
        return datasets, _attributes(file)


def attributes(path: Path | str) -> dict[str, Any]:
    """Return the root attributes of an HDF5 file without unpacking its datasets; errors as in `contents`."""
    with _opened(path) as (file, _):
        return _attributes(file)


@contextlib.contextmanager
def _opened(path: Path | str) -> Iterator[tuple[h5py.File, int]]:
    """Take a file into memory and open it there; gives it with its size in bytes."""
    data = _read(Path(path))
    try:
        with h5py.File(io.BytesIO(data), "r") as file:
            yield file, len(data)
    except StorageError:
        raise
    except Exception as error:  # h5py raises many kinds for a damaged file; all mean the same to the user
        raise StorageError(f"{path}: damaged or not an HDF5 file of ours ({type(error).__name__}).") from None


def _read(path: Path) -> bytes:
    try:
        if path.stat().st_size > LARGEST_FILE:
            raise StorageError(f"{path}: larger than any file of ours.")
        return path.read_bytes()
    except FileNotFoundError:
        raise StorageError(f"{path}: no such file.") from None
    except OSError as error:
        raise storage_error(error, path) from error


def _attributes(file: h5py.File) -> dict[str, Any]:
    return {str(name): _plain(value) for name, value in file.attrs.items()}


def _collect(group: h5py.Group, prefix: str, datasets: dict[str, np.ndarray], path: Path, allowance: list[int]) -> None:
    """Read every dataset of a group into memory, bounding their sum before it is allocated."""
    if prefix.count("/") > 4 or len(datasets) > 1000:
        raise StorageError(f"{path}: more groups than any file of ours.")
    for name in group:
        if not isinstance(group.get(name, getlink=True), h5py.HardLink):
            raise StorageError(f"{path}: {prefix}{name} is a link to elsewhere, which we never write.")
        item = group[name]
        if isinstance(item, h5py.Group):
            _collect(item, f"{prefix}{name}/", datasets, path, allowance)
            continue
        if item.is_virtual or item.external:
            raise StorageError(f"{path}: {prefix}{name} takes its data from another file, which we never write.")
        allowance[0] -= item.size * item.dtype.itemsize
        if item.dtype.kind not in "fiu" or allowance[0] < 0:
            raise StorageError(f"{path}: {prefix}{name} has shape {item.shape} and type {item.dtype}, which is absurd.")
        datasets[prefix + name] = np.asarray(item[()])


def _plain(value: Any) -> Any:
    """Return an attribute as a plain Python value."""
    if isinstance(value, bytes):
        return value.decode("utf-8", "replace")
    return value.item() if isinstance(value, np.generic) else value
