"""THE table of what a run directory holds: file names, datasets, shapes, units."""

from __future__ import annotations

from dataclasses import dataclass

SCHEMA = 1

CASE, RESOLVED, MANIFEST, STATUS, LOG = "case.toml", "resolved.json", "manifest.json", "status.json", "log.jsonl"
HISTORY, FRAMES, LOCK = "history.csv", "frames", "writer.lock"
CHECKPOINTS = ("checkpoint-a.h5", "checkpoint-b.h5")


@dataclass(frozen=True)
class Dataset:
    """One dataset of a frame.

    Parameters
    ----------
    name : str
    shape : tuple of str
        Sizes in terms of nx, ny, n; checked on reading.
    unit : str
    meaning : str
    """

    name: str
    shape: tuple[str, ...]
    unit: str
    meaning: str


FRAME_DATASETS = (
    Dataset("x_faces", ("nx+1",), "chords", "faces of the cells along the stream, from the pivot"),
    Dataset("y_faces", ("ny+1",), "chords", "faces of the cells across the stream"),
    Dataset("u", ("ny", "nx+1"), "U", "velocity along x relative to the carriage, on x faces"),
    Dataset("v", ("ny+1", "nx"), "U", "velocity along y, on y faces"),
    Dataset("p", ("ny", "nx"), "rho U^2", "pressure in cell centres, zero far upstream"),
    Dataset("vorticity", ("ny+1", "nx+1"), "U/c", "dv/dx - du/dy at cell corners"),
    Dataset("points", ("n", "2"), "chords", "Lagrangian points of all bodies"),
    Dataset("load", ("n", "2"), "rho U^2", "force of the fluid on the body per length of body"),
    Dataset("body", ("n",), "1", "which body each point belongs to: 0 the main one, then the flaps"),
)
SHAPES_GROUP = "shapes"


def frame_name(number: int) -> str:
    """Return the file name of frame `number`."""
    return f"{number:06d}.h5"
