"""One writer per run directory."""

from __future__ import annotations

import contextlib
import json
import os
import socket
import time
from pathlib import Path
from types import TracebackType
from typing import TextIO

from ibsolver.errors import StorageError
from ibsolver.runfile.atomic import storage_error
from ibsolver.runfile.layout import LOCK

try:
    import fcntl
except ImportError:  # a system without advisory locks: the lock file alone must do
    fcntl = None  # type: ignore[assignment]

STALE_AFTER = 600.0  # s without a heartbeat, for a writer on another host


class WriterLock:
    """Context that holds a run directory for this process.

    The lock file names host, process and the process's start, so that a dead writer on this host is recognised at
    once (even where its number was given to another process), and one on another host after ten minutes without a
    heartbeat. Looking at the file and taking it over happen under an advisory lock of the system, so that of several
    who find the same dead writer only one goes on.
    """

    def __init__(self, directory: Path | str):
        self.path = Path(directory) / LOCK

    def __enter__(self) -> WriterLock:
        for _ in range(100):
            try:
                with open(os.open(self.path, os.O_CREAT | os.O_RDWR, 0o644), "r+", errors="replace") as file:
                    _guard(file)
                    if _is_at(file, self.path):
                        self._take(file)
                        return self
            except OSError as error:
                raise storage_error(error, self.path) from error
        raise StorageError(f"{self.path}: other processes keep taking this run directory. Wait for them, then try again.")

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        with contextlib.suppress(OSError), open(self.path, errors="replace") as file:
            _guard(file)
            if _is_at(file, self.path) and _holder(file.read()) == _identity():
                self.path.unlink()

    def heartbeat(self) -> None:
        """Show that the writer lives."""
        with contextlib.suppress(OSError):
            os.utime(self.path)

    def _take(self, file: TextIO) -> None:
        """Write our name into the guarded lock file.

        Raises
        ------
        StorageError
            If a writer lives, naming it.
        """
        text, age = file.read(), time.time() - os.fstat(file.fileno()).st_mtime
        holder = _holder(text)
        if text and not _dead(holder, age):
            raise StorageError(
                f"{self.path.parent}: process {holder.get('pid')} on {holder.get('host')} is writing this run (sign of "
                f"life {age:.0f} s ago). Wait for it, stop it, or choose another folder; if it is surely gone, delete "
                f"{self.path.name}."
            )
        file.seek(0)
        file.truncate()
        json.dump(_identity(), file)


def writer_alive(directory: Path | str) -> bool:
    """Return whether a writer holds a run directory and may be alive."""
    path = Path(directory) / LOCK
    try:
        age = time.time() - path.stat().st_mtime
        return not _dead(_holder(path.read_text(errors="replace")), age)
    except FileNotFoundError:
        return False
    except OSError:
        return True


def _guard(file: TextIO) -> None:
    """Hold a file against everyone else who asks, until it is closed or this process ends."""
    if fcntl is not None:
        with contextlib.suppress(OSError):  # a file system without such locks
            fcntl.flock(file, fcntl.LOCK_EX)


def _is_at(file: TextIO, path: Path) -> bool:
    """Return whether an open file is still the one that a path names."""
    try:
        return os.path.samestat(os.fstat(file.fileno()), os.stat(path))
    except FileNotFoundError:
        return False


def _holder(text: str) -> dict[str, object]:
    """Return what a lock file says of its writer; nothing where it is damaged."""
    try:
        holder = json.loads(text)
    except (ValueError, RecursionError):
        return {}
    return holder if isinstance(holder, dict) else {}


def _identity() -> dict[str, object]:
    return {"host": socket.gethostname(), "pid": os.getpid(), "begun": _begun(os.getpid())}


def _begun(pid: int) -> str | None:
    """Return when a process began, in the kernel's own count, or None where that cannot be told."""
    try:
        return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[19]
    except (OSError, IndexError):
        return None


def _dead(holder: dict[str, object], age: float) -> bool:
    if holder.get("host") != socket.gethostname():
        return age > STALE_AFTER
    pid = holder.get("pid")
    if not isinstance(pid, int) or not 0 < pid < 1 << 31:
        return age > 5.0
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return True
    except PermissionError:
        return False
    begun = _begun(pid)
    return begun is not None and holder.get("begun") is not None and begun != holder["begun"]
