"""Files that a case names: they lie in the case's own folder or below it, are plain files, and are not huge."""

from __future__ import annotations

import stat
from pathlib import Path, PurePosixPath, PureWindowsPath

from ibsolver.case.values import ValueFault


def file_beside(name: str, folder: Path | None, most_bytes: int) -> Path:
    """Return the path of a file that a case names.

    Parameters
    ----------
    name : str
        As written in the case.
    folder : Path or None
        Folder of the case; None where the case is a text without a place.
    most_bytes : int
        Greatest size.

    Raises
    ------
    ValueFault
        The path leaves the folder, or is not a plain file of an acceptable size.
    """
    if folder is None:
        raise ValueFault("names a file, but the case has no folder.", "Save the case as a file first.")
    try:
        path = _inside(name, folder)
        status = path.stat()
    except (FileNotFoundError, NotADirectoryError):
        raise ValueFault("is not there.", f"Put the file into {folder} or correct its name.") from None
    except (OSError, ValueError, RuntimeError) as error:
        raise ValueFault(f"cannot be read: {reason(error)}.", "Choose another name or mend its rights.") from None
    if not stat.S_ISREG(status.st_mode):
        raise ValueFault("is not a plain file.", "Name a file, not a folder or a device.")
    if status.st_size > most_bytes:
        size, most = status.st_size / 1e6, most_bytes / 1e6
        raise ValueFault(f"has {size:.0f} MB; at most {most:.0f} MB are read.", "Thin the file out first.")
    return path


def _inside(name: str, folder: Path) -> Path:
    """Return the resolved path; symbolic links are followed before the check."""
    absolute = PurePosixPath(name).is_absolute() or PureWindowsPath(name).drive or name.startswith("\\")
    outside = ValueFault("leaves the folder of the case.", "Copy the file beside the case and name it alone.")
    if absolute or ".." in PurePosixPath(name).parts or ".." in PureWindowsPath(name).parts:
        raise outside
    path = (folder / name).resolve()
    if not path.is_relative_to(folder.resolve()):
        raise outside
    return path


def read_text_file(path: Path) -> str:
    """Return the text of a file in UTF-8, with or without byte order mark.

    Raises
    ------
    ValueFault
        It cannot be read or is not UTF-8.
    """
    try:
        data = path.read_bytes()
    except OSError as error:
        raise ValueFault(f"cannot be read: {reason(error)}.", "Mend its rights or copy it again.") from None
    return decoded(data)


def decoded(data: bytes) -> str:
    """Return bytes as text; a `ValueFault` names the encoding where it is not UTF-8."""
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        raise ValueFault("is written in UTF-16.", "Save it as UTF-8 text.")
    if b"\x00" in data:
        raise ValueFault("holds NUL bytes: it is not a text file, or is written in UTF-16.", "Save it as UTF-8 text.")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise ValueFault(f"is not UTF-8 text (line {line}).", "Save it as UTF-8 text.") from None


def reason(error: BaseException) -> str:
    """Return why the system refused, in a few words."""
    text = getattr(error, "strerror", None) or str(error) or type(error).__name__
    return text[:1].lower() + text[1:].rstrip(".")
