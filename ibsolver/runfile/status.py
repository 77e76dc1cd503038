"""`status.json`: how a run stands, rewritten atomically every few seconds; and `log.jsonl`, what happened."""

from __future__ import annotations

import datetime
import json
import os
import socket
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from ibsolver.runfile.atomic import finite, read_json, storage_error, write_json
from ibsolver.runfile.layout import LOG, STATUS
from ibsolver.runfile.lock import writer_alive

STATES = ("running", "finished", "interrupted", "diverged", "storage full", "failed", "gone")


def now_utc() -> str:
    """Return the present time, UTC, to the second."""
    return datetime.datetime.now(datetime.UTC).strftime("%Y-%m-%dT%H:%M:%SZ")


def write_status(directory: Path | str, state: str, numbers: Mapping[str, Any]) -> None:
    """Write the status of a run.

    Parameters
    ----------
    state : str
        One of `STATES` but "gone", which is what a reader finds.
    numbers : mapping
        step, time, travel, travel_end, seconds_left, checkpoint and whatever else helps.
    """
    head = {"state": state, "updated": now_utc(), "host": socket.gethostname(), "pid": os.getpid()}
    write_json(Path(directory) / STATUS, {**head, **numbers})


def read_status(directory: Path | str) -> dict[str, Any]:
    """Return the status of a run (see `ibsolver.runfile.atomic.read_json` for errors)."""
    return read_json(Path(directory) / STATUS)


def present_status(directory: Path | str) -> dict[str, Any]:
    """Return the status of a run as it is now: "gone" if it says "running" but its process is no more on this host."""
    status = read_status(directory)
    if status.get("state") == "running" and not writer_alive(directory):
        status["state"] = "gone"
        status["message"] = "The process that wrote this run is no more; it left no word (power cut, kill, full disk?)."
    return status


class RunLog:
    """Appends events to `log.jsonl`, one JSON object a line."""

    def __init__(self, directory: Path | str):
        self.path = Path(directory) / LOG

    def write(self, event: str, **facts: Any) -> None:
        """Add one event with its facts.

        Raises
        ------
        StorageError
            If the line cannot be written.
        """
        line = json.dumps(finite({"utc": now_utc(), "event": event, **facts})) + "\n"
        try:
            with open(self.path, "a", encoding="utf-8") as file:
                file.write(line)
        except OSError as error:
            raise storage_error(error, self.path, len(line)) from error


def read_log(directory: Path | str) -> list[dict[str, Any]]:
    """Return the events of a run; lines torn or damaged are left out."""
    events = []
    path = Path(directory) / LOG
    for line in path.read_text(encoding="utf-8", errors="replace").splitlines() if path.exists() else []:
        try:
            events.append(json.loads(line))
        except ValueError:
            continue
    return events
