"""The run directory while a run is written: schedule of frames, checkpoints and status. Decides, then does."""

from __future__ import annotations

import math
import time
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from ibsolver.case.encode import case_hash, physics_hash
from ibsolver.case.model import Case
from ibsolver.errors import StorageError
from ibsolver.flow.advance import Problem
from ibsolver.flow.loads import Acceleration
from ibsolver.flow.state import FlowState
from ibsolver.run.sampling import SIGNS, HistorySampler, frame_arrays, frame_attributes
from ibsolver.runfile import layout, manifest
from ibsolver.runfile.atomic import free_bytes, write_json
from ibsolver.runfile.checkpoint import Checkpoint, write_checkpoint
from ibsolver.runfile.frame import write_frame
from ibsolver.runfile.history import HistoryWriter
from ibsolver.runfile.lock import WriterLock
from ibsolver.runfile.status import RunLog, now_utc, write_status

STATUS_EVERY = 3.0  # s
RESERVE_BYTES = 50_000_000  # free space that a run leaves to everyone else


@dataclass
class Schedule:
    """What has been written; goes into checkpoints, so that a resumed run writes the same files.

    Attributes
    ----------
    frames : int
        Frames written, which is also the number of the next one.
    next_travel : float
        Travel at which the next frame is due (chords).
    turn : int
        Checkpoints written.
    frame_step : int
        Step of the last frame, -1 before the first.
    """

    frames: int = 0
    next_travel: float = 0.0
    turn: int = 0
    frame_step: int = -1


class Recorder:
    """Writes one run directory.

    Parameters
    ----------
    case, problem
        What is run.
    directory : Path
        An existing run directory, held by a `WriterLock`.
    checkpoint : Checkpoint or None
        Where a resumed run goes on.
    """

    def __init__(
        self,
        case: Case,
        problem: Problem,
        directory: Path,
        lock: WriterLock,
        checkpoint: Checkpoint | None = None,
    ):
        self.case, self.problem, self.directory, self.lock = case, problem, directory, lock
        self.schedule = Schedule()
        self.log = RunLog(directory)
        self.sampler = HistorySampler(case, problem)
        self._hash, self._physics = case_hash(case), physics_hash(case)
        self._status_due = self._checkpoint_due = time.monotonic()
        self._checkpoints: dict[str, str] = {}
        self._started = now_utc()
        self._felt = Acceleration(0.0)
        if checkpoint is None:
            self._drop_frames_from(0)
        else:
            numbers = checkpoint.numbers["schedule"]
            self.schedule = Schedule(**numbers)
            self._drop_frames_from(self.schedule.frames)
        comments = {"case": case.title, "case hash": self._hash, "signs": SIGNS}
        resume_after = None if checkpoint is None else int(checkpoint.numbers["state"]["step"])
        self.history = HistoryWriter(directory / layout.HISTORY, self.sampler.columns, comments, resume_after)
        self._checkpoint_due += case.output.checkpoint_every

    def _drop_frames_from(self, number: int) -> None:
        """Remove frames written after the checkpoint; the resumed run writes them again, to the same bits."""
        for path in sorted((self.directory / layout.FRAMES).glob("*.h5")):
            if path.stem.isdigit() and int(path.stem) >= number:
                path.unlink()

    def start_frame(self, state: FlowState) -> None:
        """Write frame 0, the flow before the first step."""
        self._frame(state)

    def step(self, state: FlowState, row: Mapping[str, float], felt: Acceleration) -> None:
        """Record one step: its history row, and a frame if one is due."""
        self._felt = felt
        self.history.append(row)
        if state.travel >= self.schedule.next_travel - 1e-12:
            self._frame(state)

    def _frame(self, state: FlowState) -> None:
        arrays = frame_arrays(state, self.problem, self._felt)
        path = self.directory / layout.FRAMES / layout.frame_name(self.schedule.frames)
        attributes = frame_attributes(self.case, state, self._hash)
        self._keep_reserve(path)
        write_frame(path, arrays, self.problem.shapes, attributes)
        self.schedule.frame_step = state.step
        self.schedule.frames += 1
        every = self.case.output.frame_every
        self.schedule.next_travel = every * (math.floor(state.travel / every + 1e-9) + 1)

    def last_frame(self, state: FlowState) -> None:
        """Write the end of the travel as a frame, if the schedule has not just done so."""
        if self.schedule.frame_step != state.step:
            self._frame(state)

    def _keep_reserve(self, path: Path) -> None:
        """Stop before the disk is quite full.

        Raises
        ------
        StorageError
            If less than the reserve is free.
        """
        free = free_bytes(path.parent)
        if free < RESERVE_BYTES:
            raise StorageError(
                f"{path}: only {free:,} bytes are free; the run keeps {RESERVE_BYTES:,} in reserve and stops here. Files "
                "written before are whole. Make space, then go on with `ibsolver resume`."
            )

    def checkpoint_due(self) -> bool:
        """Return whether the wall-clock interval between checkpoints is over."""
        return time.monotonic() >= self._checkpoint_due

    def checkpoint(self, state: FlowState) -> None:
        """Write a checkpoint after making the history durable up to it."""
        self.history.flush(sync=True)
        self.schedule.turn += 1
        numbers = {"state": state.numbers(), "schedule": vars(self.schedule)}
        name, digest = write_checkpoint(self.directory, self.schedule.turn, state.arrays(), numbers, self._physics)
        self._checkpoints[name] = digest
        self._checkpoint_due = time.monotonic() + self.case.output.checkpoint_every

    def status_due(self) -> bool:
        """Return whether `status.json` is due, and if so wait again."""
        if time.monotonic() < self._status_due:
            return False
        self._status_due = time.monotonic() + STATUS_EVERY
        return True

    def status(self, name: str, state: FlowState, numbers: Mapping[str, Any]) -> None:
        """Write `status.json` and show that the writer lives."""
        self.lock.heartbeat()
        facts = {
            "title": self.case.title,
            "step": state.step,
            "time": state.time,
            "travel": state.travel,
            "travel_end": self.case.run.travel,
            "frames": self.schedule.frames,
            "checkpoints": self._checkpoints,
        }
        write_status(self.directory, name, {**facts, **numbers})

    def manifest(self, **facts: Any) -> None:
        """Write `manifest.json`."""
        write_json(
            self.directory / layout.MANIFEST,
            manifest.collect(case_hash=self._hash, started=self._started, stopped=now_utc(), **facts),
        )
