"""Whole files or none: written under another name, synced, renamed, and the folder synced."""

from __future__ import annotations

import contextlib
import errno
import json
import math
import os
import shutil
from pathlib import Path
from typing import Any

from ibsolver.errors import StorageError


def write_bytes(path: Path | str, data: bytes) -> None:
    """Write a file so that it is either the old one or the new one, whatever happens.

    Raises
    ------
    StorageError
        If the disk is full or the folder cannot be written; the old file is untouched.
    """
    path = Path(path)
    temporary = path.with_name(f".{path.name}.{os.getpid()}.part")
    try:
        with open(temporary, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        os.replace(temporary, path)
        sync_folder(path.parent)
    except OSError as error:
        with contextlib.suppress(OSError):
            temporary.unlink()
        raise storage_error(error, path, len(data)) from error


def storage_error(error: OSError, path: Path | str, needed: int = 0) -> StorageError:
    """Return the sentence for a failed write or read."""
    if error.errno in (errno.ENOSPC, errno.EDQUOT):
        free = free_bytes(Path(path).parent)
        size = f" It needs {needed:,} bytes;" if needed else ""
        return StorageError(
            f"{path}: the disk is full.{size} {free:,} bytes are free. Files written before are whole. Make space, "
            "then go on with `ibsolver resume`."
        )
    if error.errno in (errno.EACCES, errno.EPERM, errno.EROFS):
        return StorageError(
            f"{path}: no permission to write here ({error.strerror}). Choose another folder with --out."
        )
    return StorageError(f"{path}: {error.strerror or error}.")


def free_bytes(folder: Path) -> int:
    """Return the free bytes of the disk that holds a folder (or its nearest existing parent)."""
    folder = folder.absolute()
    while not folder.exists() and folder != folder.parent:
        folder = folder.parent
    return shutil.disk_usage(folder).free


def free_memory() -> float | None:
    """Return the bytes of memory that can be had without swapping, None where the system does not tell."""
    try:
        for line in Path("/proc/meminfo").read_text().splitlines():
            if line.startswith("MemAvailable:"):
                return 1024.0 * int(line.split()[1])
    except (OSError, ValueError, IndexError):
        pass
    return None


def sync_folder(folder: Path) -> None:
    """Make a rename durable; a file system that cannot sync folders is left as it is."""
    try:
        descriptor = os.open(folder, os.O_RDONLY)
    except OSError:
        return
    try:
        os.fsync(descriptor)
    except OSError:
        pass
    finally:
        os.close(descriptor)


def write_json(path: Path | str, value: Any) -> None:
    """Write a value as indented JSON; numbers that are not finite become null."""
    write_bytes(path, (json.dumps(finite(value), indent=1, sort_keys=False) + "\n").encode())


def read_json(path: Path | str) -> dict[str, Any]:
    """Return the object in a JSON file.

    Raises
    ------
    StorageError
        If the file is missing, not JSON, or not an object.
    """
    path = Path(path)
    try:
        if path.stat().st_size > 64_000_000:
            raise StorageError(f"{path}: larger than 64 MB; not a file of ours.")
        value = json.loads(path.read_text(encoding="utf-8"))
    except FileNotFoundError:
        raise StorageError(f"{path}: no such file. Is this a run directory?") from None
    except OSError as error:
        raise storage_error(error, path) from error
    except (ValueError, RecursionError) as error:
        raise StorageError(f"{path}: damaged, not JSON ({type(error).__name__}).") from None
    if not isinstance(value, dict):
        raise StorageError(f"{path}: damaged, a JSON object was expected.")
    return value


def finite(value: Any) -> Any:
    """Return the value with every number that is not finite replaced by None."""
    if isinstance(value, dict):
        return {str(key): finite(item) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [finite(item) for item in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
