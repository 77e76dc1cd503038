"""One writer per run directory."""

from __future__ import annotations

import contextlib
import json
import os
import socket
import time
from pathlib import Path
from types import TracebackType

from ibsolver.errors import StorageError
from ibsolver.runfile.atomic import storage_error
from ibsolver.runfile.layout import LOCK

STALE_AFTER = 600.0  # s without a heartbeat, for a writer on another host


class WriterLock:
    """Context that holds a run directory for this process.

    The lock file names host, process and the process's start, so that a dead writer on this host is recognised at
    once (even where its number was given to another process), and one on another host after ten minutes without a
    heartbeat.
    """

    def __init__(self, directory: Path | str):
        self.path = Path(directory) / LOCK

    def __enter__(self) -> WriterLock:
        for _ in range(3):
            try:
                descriptor = os.open(self.path, os.O_CREAT | os.O_EXCL | os.O_WRONLY, 0o644)
            except FileExistsError:
                self._remove_if_stale()
                continue
            except OSError as error:
                raise storage_error(error, self.path) from error
            with os.fdopen(descriptor, "w") as file:
                json.dump(_identity(), file)
            return self
        raise StorageError(f"{self.path}: another process keeps taking this run directory.")

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        with contextlib.suppress(OSError):
            self.path.unlink()

    def heartbeat(self) -> None:
        """Show that the writer lives."""
        with contextlib.suppress(OSError):
            os.utime(self.path)

    def _remove_if_stale(self) -> None:
        """Remove a dead writer's lock.

        Raises
        ------
        StorageError
            If the writer lives, naming it.
        """
        try:
            age = time.time() - self.path.stat().st_mtime
            holder = json.loads(self.path.read_text())
        except FileNotFoundError:
            return
        except (OSError, ValueError):
            holder, age = {}, time.time() - self.path.stat().st_mtime if self.path.exists() else 0.0
        if _dead(holder, age):
            with contextlib.suppress(OSError):
                self.path.unlink()
            return
        raise StorageError(
            f"{self.path.parent}: process {holder.get('pid')} on {holder.get('host')} is writing this run (sign of life "
            f"{age:.0f} s ago). Wait for it, stop it, or choose another folder; if it is surely gone, delete {self.path.name}."
        )


def writer_alive(directory: Path | str) -> bool:
    """Return whether a writer holds a run directory and may be alive."""
    path = Path(directory) / LOCK
    try:
        age = time.time() - path.stat().st_mtime
        return not _dead(json.loads(path.read_text()), age)
    except FileNotFoundError:
        return False
    except (OSError, ValueError):
        return True


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
    if not isinstance(pid, int):
        return age > 5.0
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return True
    except PermissionError:
        return False
    begun = _begun(pid)
    return begun is not None and holder.get("begun") is not None and begun != holder["begun"]
