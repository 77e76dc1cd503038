"""A run directory, opened for reading."""

from __future__ import annotations

from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np

from ibsolver.case.encode import decode
from ibsolver.case.model import Case
from ibsolver.errors import CaseError, StorageError, UsageError
from ibsolver.runfile import layout
from ibsolver.runfile.atomic import read_json
from ibsolver.runfile.frame import Frame, read_frame, read_moment
from ibsolver.runfile.history import History, read_history


class RunView:
    """A run, read only; everything is read when first asked for.

    Parameters
    ----------
    directory : path
        Run directory.

    Examples
    --------
    ``open_run("runs/plate").history["CL"]`` is the lift coefficient of every step, shape (steps,);
    ``open_run("runs/plate").frame(-1).vorticity`` the last frame's vorticity at cell corners.
    """

    def __init__(self, directory: Path | str):
        self.directory = Path(directory)
        if not self.directory.is_dir():
            raise UsageError(f"{directory}: no such run directory.")

    @cached_property
    def history(self) -> History:
        """Columns of `history.csv`, one row a step."""
        return read_history(self.directory / layout.HISTORY)

    @cached_property
    def case(self) -> Case:
        """The case that was run."""
        path = self.directory / layout.RESOLVED
        try:
            return decode(read_json(path))
        except CaseError as error:
            raise StorageError(f"{path}: damaged. {error}") from None

    @property
    def has_body(self) -> bool:
        """Whether the run has a plate, cylinder or outline; a plain box has no loads."""
        return any(body is not None for body in (self.case.plate, self.case.cylinder, self.case.outline))

    @cached_property
    def manifest(self) -> dict[str, Any]:
        """With what the run was made."""
        return read_json(self.directory / layout.MANIFEST)

    @cached_property
    def frame_files(self) -> tuple[Path, ...]:
        """All frame files, oldest first."""
        return tuple(sorted(p for p in (self.directory / layout.FRAMES).glob("*.h5") if p.stem.isdigit()))

    @property
    def frames(self) -> int:
        """Number of frames."""
        return len(self.frame_files)

    def frame(self, index: int) -> Frame:
        """Return a frame; negative indices count from the end.

        Raises
        ------
        UsageError
            If there is no such frame.
        """
        if not -self.frames <= index < self.frames:
            raise UsageError(f"{self.directory}: frame {index} asked for; there are {self.frames}.")
        return read_frame(self.frame_files[index])

    @property
    def times(self) -> np.ndarray:
        """Time of every frame (c/U), shape (frames,)."""
        return self._moments[:, 0]

    @property
    def travels(self) -> np.ndarray:
        """Travel of every frame (chords), shape (frames,)."""
        return self._moments[:, 1]

    @cached_property
    def _moments(self) -> np.ndarray:
        """Time and travel of every frame, from the frames themselves: a resumed run may have another interval."""
        return np.array([read_moment(file) for file in self.frame_files]).reshape(-1, 2)

    def frames_at(self, travels: list[float]) -> list[Frame]:
        """Return the frames nearest to the given travels (chords), each frame once."""
        if not self.frames:
            raise StorageError(f"{self.directory}: no frames yet.")
        nearest = [int(np.argmin(np.abs(self.travels - travel))) for travel in travels]
        return [self.frame(index) for index in dict.fromkeys(nearest)]


def open_run(directory: Path | str) -> RunView:
    """Return a run directory opened for reading."""
    return RunView(directory)
