"""A run directory made of formulas, so that every answer of the post-processing is known beforehand.

Loads are sinusoids of a known frequency; frames hold a Lamb-Oseen vortex beside the plate of the case.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from ibsolver.case import load_case, scales
from ibsolver.case.encode import encode
from ibsolver.runfile import layout
from ibsolver.runfile.atomic import write_bytes, write_json
from ibsolver.runfile.frame import write_frame
from ibsolver.runfile.history import HistoryWriter
from tests.runs import SMALL_CASE, write_case

STROUHAL = 0.2
MEAN, SWING = {"CL": 1.2, "CD": 0.5, "CM": -0.3}, {"CL": 0.3, "CD": 0.05, "CM": 0.1}
BALANCE = 0.015  # the momentum balance differs from the lift by at most so much
PLATE = np.array([[-0.24, 0.08], [0.71, -0.23]])
FLAP = np.array([[-0.12, 0.04], [0.14, 0.16]])


@dataclass(frozen=True)
class Vortex:
    """Lamb-Oseen vortex: vorticity of a Gaussian (Lamb 1932, Hydrodynamics, art. 334a)."""

    x: float = 0.55
    y: float = 0.21
    circulation: float = -2.0
    radius: float = 0.12

    def vorticity(self, x: np.ndarray, y: np.ndarray) -> np.ndarray:
        square = (x - self.x) ** 2 + (y - self.y) ** 2
        return self.circulation / (math.pi * self.radius**2) * np.exp(-square / self.radius**2)

    def velocity(self, x: np.ndarray, y: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        square = np.maximum((x - self.x) ** 2 + (y - self.y) ** 2, 1e-30)
        turn = self.circulation / (2 * math.pi * square) * -np.expm1(-square / self.radius**2)
        return -turn * (y - self.y), turn * (x - self.x)


def wave(name: str, time: np.ndarray | float) -> np.ndarray:
    """Return a load at a time: CL and CM swing at the Strouhal number, CD at twice that."""
    frequency = STROUHAL * (2 if name == "CD" else 1)
    return MEAN[name] + SWING[name] * np.sin(2 * math.pi * frequency * np.asarray(time))


def make_run(
    folder: Path,
    *,
    travel: float = 20.0,
    dt: float = 0.05,
    spike: float | None = None,
    travels: tuple[float, ...] = (0.0, 0.5, 1.0, 1.5, 2.0),
    vortex: Vortex | None = None,
    case_text: str = SMALL_CASE,
) -> Path:
    """Write a run directory and return it.

    Parameters
    ----------
    folder : Path
        Where the case file and the directory ``run`` are written.
    travel : float
        Chords, at a steady speed from the start.
    dt : float
        Mean step; single ones are between half and one and a half of it.
    spike : float, optional
        Value of the loads in the first two steps, as an impulsive start makes it.
    travels : tuple of float
        Travel of every frame; the vortex moves downstream by one chord in two.
    """
    case = load_case(str(write_case(folder, case_text.replace("travel = 0.6", f"travel = {travel:g}"))))
    run = folder / "run"
    (run / layout.FRAMES).mkdir(parents=True)
    write_bytes(run / layout.CASE, (folder / "small.toml").read_bytes())
    write_json(run / layout.RESOLVED, encode(case))
    _write_history(run / layout.HISTORY, travel, dt, scales.convective_time(case), spike)
    for number, here in enumerate(travels):
        _write_frame(run / layout.FRAMES / layout.frame_name(number), here, vortex or Vortex())
    return run


def _write_history(path: Path, travel: float, dt: float, seconds: float | None, spike: float | None) -> None:
    steps = np.random.default_rng(3).uniform(0.5 * dt, 1.5 * dt, int(travel / dt))
    steps *= travel / steps.sum()
    time = np.cumsum(steps)
    columns = {
        "step": np.arange(1, time.size + 1), "time_s": time * (math.nan if seconds is None else seconds), "time": time,
        "travel": time, "tow_speed": np.ones_like(time), "incidence_deg": np.full_like(time, 18.0),
        **{name: wave(name, time) for name in MEAN},
    }  # fmt: skip
    for name in ("CL", "CD"):
        columns[f"{name}_momentum"] = columns[name] + BALANCE * np.cos(5.0 * time)
    if spike is not None:
        for name in ("CL", "CD", "CM", "CL_momentum", "CD_momentum"):
            columns[name][:2] = spike
    columns["opening_deg_front"], columns["CH_front"] = np.full_like(time, 25.0), np.full_like(time, 0.1)
    writer = HistoryWriter(path, dict.fromkeys(columns, "made of a formula [1]"))
    for values in zip(*columns.values(), strict=True):
        writer.append(dict(zip(columns, map(float, values), strict=True)))
    writer.flush()


def _write_frame(path: Path, travel: float, vortex: Vortex) -> None:
    here = Vortex(vortex.x + 0.5 * travel, vortex.y, vortex.circulation, vortex.radius)
    x, y = np.linspace(-1.5, 3.0, 226), np.linspace(-1.2, 1.2, 121)
    middle_x, middle_y = 0.5 * (x[1:] + x[:-1]), 0.5 * (y[1:] + y[:-1])
    u = 1.0 + here.velocity(*np.meshgrid(x, middle_y))[0]
    v = here.velocity(*np.meshgrid(middle_x, y))[1]
    points = PLATE[0] + np.linspace(0, 1, 30)[:, None] * (PLATE[1] - PLATE[0])
    arrays = {
        "x_faces": x, "y_faces": y, "u": u, "v": v, "p": np.zeros((y.size - 1, x.size - 1)),
        "vorticity": here.vorticity(*np.meshgrid(x, y)),
        "points": points, "load": np.zeros((30, 2)), "body": np.zeros(30, dtype=np.int64),
    }  # fmt: skip
    attributes = {"time": travel, "travel": travel, "time_s": 4.0 * travel}
    write_frame(path, arrays, {"plate": PLATE, "front": FLAP}, attributes)
