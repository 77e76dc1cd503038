"""Making a run directory, and reading back the case in it."""

from __future__ import annotations

import hashlib
import os
import shutil
from pathlib import Path
from typing import Any

from ibsolver.case.encode import case_hash, decode, encode
from ibsolver.case.model import Case
from ibsolver.case.read import load_case
from ibsolver.errors import CaseError, StorageError
from ibsolver.runfile import layout
from ibsolver.runfile.atomic import storage_error, write_bytes, write_json
from ibsolver.runfile.lock import WriterLock

_OURS = (
    layout.CASE,
    layout.RESOLVED,
    layout.MANIFEST,
    layout.STATUS,
    layout.LOG,
    layout.HISTORY,
    layout.LOCK,
    *layout.CHECKPOINTS,
)


def create_directory(case: Case, directory: Path, case_text: str, overwrite: bool) -> None:
    """Make a run directory with the case in it, under another name first: if it exists, it can be resumed.

    Raises
    ------
    StorageError
        If it exists with anything in it and `overwrite` is not set, or cannot be written.
    """
    if directory.exists() and (not directory.is_dir() or any(directory.iterdir())):
        if not overwrite:
            raise StorageError(
                f"{directory}: exists already and is not overwritten. Choose another --out, go on with `ibsolver resume "
                f"{directory}`, or say --overwrite."
            )
        _remove_old_run(directory)
        _fill(case, directory, case_text)
        return
    new = directory.with_name(f".{directory.name}.{os.getpid()}.part")
    try:
        new.mkdir(parents=True)
        _fill(case, new, case_text)
        os.replace(new, directory)
    except OSError as error:
        raise storage_error(error, directory) from error
    finally:
        shutil.rmtree(new, ignore_errors=True)


def _fill(case: Case, directory: Path, case_text: str) -> None:
    (directory / layout.FRAMES).mkdir(exist_ok=True)
    _copy_inputs(case, directory)
    write_case(directory, case, case_text)


def write_case(directory: Path, case: Case, case_text: str) -> None:
    """Write the case as the user wrote it and as it was understood."""
    write_bytes(directory / layout.CASE, case_text.encode())
    facts = {"case_hash": case_hash(case), "case_text_sha256": _sha256(case_text.encode())}
    write_json(directory / layout.RESOLVED, {**encode(case), **facts})


def _copy_inputs(case: Case, directory: Path) -> None:
    """Copy the tables and outlines that a case names beside it, so that its copy can be edited and read again."""
    folder = Path(case.file).parent
    motions = [case.incidence_motion, case.heave_motion, *(flap.motion for flap in case.flaps)]
    names = [case.tow.profile_file, case.outline.file if case.outline else None]
    names += [motion.file for motion in motions if motion is not None]
    for name in {name for name in names if name}:
        source, target = folder / name, directory / name
        if source.is_file() and name not in _OURS and not target.exists():
            target.parent.mkdir(parents=True, exist_ok=True)
            shutil.copyfile(source, target)


def decoded(resolved: dict[str, Any], directory: Path) -> Case:
    """Return the case of a run directory as it was understood.

    Raises
    ------
    StorageError
        If `resolved.json` is damaged.
    """
    try:
        return decode(resolved)
    except CaseError as error:
        raise StorageError(f"{directory / layout.RESOLVED}: damaged. {error}") from None


def edited_case(directory: Path, resolved: dict[str, Any]) -> Case | None:
    """Return the case in `case.toml` if someone has edited that file since the run began, else None."""
    path = directory / layout.CASE
    if not path.is_file() or _sha256(path.read_bytes()) == resolved.get("case_text_sha256"):
        return None
    return load_case(str(path))


def _sha256(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()


def _remove_old_run(directory: Path) -> None:
    """Remove an earlier run's own files, and nothing else that may lie there."""
    if not directory.is_dir():
        raise StorageError(f"{directory}: is a file, not a run directory.")
    if not any((directory / name).exists() for name in (layout.RESOLVED, layout.STATUS, layout.MANIFEST)):
        raise StorageError(f"{directory}: holds no earlier run, so nothing in it is replaced. Choose another folder.")
    with WriterLock(directory):
        for name in _OURS:
            if name != layout.LOCK:
                (directory / name).unlink(missing_ok=True)
        shutil.rmtree(directory / layout.FRAMES, ignore_errors=True)
