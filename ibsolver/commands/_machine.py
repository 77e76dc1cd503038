"""What `doctor` looks at: each check returns a `Finding`; nothing here changes the machine."""

from __future__ import annotations

import os
import shutil
import statistics
import subprocess
import sys
import time
from dataclasses import dataclass
from pathlib import Path

from ibsolver.errors import StorageError

SAMPLE_BYTES = 32 << 20


@dataclass(frozen=True)
class Finding:
    """One thing looked at.

    Parameters
    ----------
    name : str
    found : str
        What is there, with units.
    good : bool
        Whether a night's run may rely on it.
    advice : str
        What to do about it; empty where nothing needs doing.
    """

    name: str
    found: str
    good: bool
    advice: str = ""


def threads() -> Finding:
    """Threading layer and cores."""
    from ibsolver.kernels import _jit

    _warm_up()
    layer, cores = _jit.threading_layer(), _jit.available_cores()
    advice = ""
    if layer == "workqueue":
        advice = "numba's own queue is up to three times slower: install a package with an OpenMP runtime (libgomp)."
    return Finding("threads", f"{cores} cores for this process, layer {layer}", layer != "workqueue", advice)


def _problem() -> tuple[object, object]:
    """Return a solver and a right-hand side large enough to show whether threads help."""
    import numpy as np

    from ibsolver.flow.poisson import PoissonSolver
    from ibsolver.grid.staggered import StaggeredGrid
    from ibsolver.grid.stretching import stretched_faces

    x = stretched_faces(-6.0, -0.5, 1.0, 8.0, 1 / 96, 1.04, 0.5)
    y = stretched_faces(-6.0, -0.5, 0.5, 6.0, 1 / 96, 1.04, 0.5)
    grid = StaggeredGrid(x, y, (-0.5, 1.0, -0.5, 0.5), 1 / 96)
    return PoissonSolver(grid), np.random.default_rng(0).standard_normal((grid.ny, grid.nx))


def _warm_up() -> None:
    import numpy as np

    solver, f = _problem()
    solver.solve(f, np.empty_like(f))


def spin() -> Finding:
    """One thread against two on the same Poisson solve: two must not be slower."""
    import numpy as np

    from ibsolver.kernels import _jit

    if _jit.available_cores() < 2:
        return Finding("two threads against one", "only one core", True)
    solver, f = _problem()
    phi = np.empty_like(f)
    seconds = {}
    with _jit.one_blas_thread():
        for count in (1, 2, 1, 2):
            _jit.set_threads(count)
            times = []
            for _ in range(25):
                begin = time.perf_counter()
                solver.solve(f, phi)
                times.append(time.perf_counter() - begin)
            seconds[count] = min(seconds.get(count, 9.9), statistics.median(times))
    _jit.set_threads(None)
    gain = seconds[1] / seconds[2]
    advice = ""
    if gain < 1.2:
        advice = "Threads fight for the cores: close other programs, unset OMP_WAIT_POLICY, or run with --threads 1."
    return Finding("two threads against one", f"{gain:.2f} times as fast", gain >= 1.2, advice)


def blas() -> Finding:
    """BLAS libraries and their threads outside and inside a march."""
    from ibsolver.kernels._jit import one_blas_thread
    from ibsolver.runfile.manifest import blas as libraries

    outside = libraries()
    with one_blas_thread():
        inside = [library["num_threads"] for library in libraries()]
    names = ", ".join(f"{lib['internal_api']} {lib['version']} ({lib['num_threads']} threads)" for lib in outside)
    good = all(count == 1 for count in inside)
    advice = "" if good else "BLAS does not obey: set OPENBLAS_NUM_THREADS=1 before starting."
    return Finding("BLAS", f"{names or 'none found'}; {max(inside, default=1)} inside a march", good, advice)


def cache() -> Finding:
    """Folder of compiled kernels."""
    from ibsolver.kernels._jit import cache_folder

    folder = cache_folder()
    size = sum(path.stat().st_size for path in folder.rglob("*") if path.is_file()) if folder.is_dir() else 0
    good = folder.is_dir() and os.access(folder, os.W_OK)
    advice = "" if good else "Every start compiles anew: set IBSOLVER_CACHE to a folder that can be written."
    return Finding("compiled kernels", f"{folder}, {size / 1e6:.1f} MB", good, advice)


def disk(folder: Path) -> Finding:
    """Write speed with fsync, and the time of a small durable write, in a folder."""
    from ibsolver.runfile.atomic import free_bytes, write_bytes

    probe = folder / f".ibsolver-probe-{os.getpid()}"
    try:
        begin = time.perf_counter()
        write_bytes(probe, os.urandom(1 << 20) * (SAMPLE_BYTES >> 20))
        rate = SAMPLE_BYTES / (time.perf_counter() - begin)
        small = []
        for _ in range(5):
            begin = time.perf_counter()
            write_bytes(probe, b"x" * 100)
            small.append(time.perf_counter() - begin)
    except StorageError as error:
        return Finding("disk", str(error), False, "Write the runs elsewhere with --out.")
    finally:
        probe.unlink(missing_ok=True)
    free, wait = free_bytes(folder), statistics.median(small)
    good = rate > 10e6 and free > 2e9 and wait < 1.0
    advice = ""
    if not good:
        advice = "Slow or nearly full: make space, or write to a local disk with --out and fewer frames."
    found = f"{rate / 1e6:.0f} MB/s with fsync, {1e3 * wait:.1f} ms a small file, {free / 1e9:.1f} GB free in {folder}"
    return Finding("disk", found, good, advice)


def movie_encoder() -> Finding:
    """An encoder for movies."""
    try:
        import imageio_ffmpeg

        return Finding("movie encoder", f"imageio-ffmpeg {imageio_ffmpeg.__version__}", True)
    except ImportError:
        pass
    if shutil.which("ffmpeg"):
        return Finding("movie encoder", "ffmpeg on the path", True)
    return Finding("movie encoder", "none", False, "Movies need one: pip install imageio-ffmpeg. Runs do not.")


def sleep() -> Finding:
    """Whether this machine may fall asleep in the night, where that can be read."""
    if sys.platform == "darwin":
        return _sleep_from_command(["pmset", "-g", "custom"], "sleep")
    if sys.platform == "win32":
        return _sleep_from_command(["powercfg", "/query", "SCHEME_CURRENT", "SUB_SLEEP", "STANDBYIDLE"], "Index")
    settings = {}
    for path in (Path("/etc/systemd/logind.conf"), *sorted(Path("/etc/systemd/logind.conf.d").glob("*.conf"))):
        try:
            lines = path.read_text().splitlines()
        except OSError:
            continue
        settings |= dict(line.split("=", 1) for line in lines if "=" in line and not line.startswith("#"))
    by_hand = "Switch sleeping off for the night in the desktop's power settings, and leave the lid open."
    idle = settings.get("IdleAction")
    if idle and idle != "ignore":
        return Finding("sleep", f"the system goes to {idle} when idle", False, by_hand)
    return Finding("sleep", f"{'no idle action set' if settings else 'not readable here'}{_battery()}", True, by_hand)


def _battery() -> str:
    for path in Path("/sys/class/power_supply").glob("A*/online"):
        try:
            return "" if path.read_text().strip() == "1" else "; running on battery"
        except OSError:
            continue
    return ""


def _sleep_from_command(command: list[str], word: str) -> Finding:
    advice = "Keep it awake for the night, and on mains."
    try:
        text = subprocess.run(command, capture_output=True, text=True, timeout=10).stdout
    except (OSError, subprocess.TimeoutExpired):
        return Finding("sleep", "not readable here", True, advice)
    lines = " / ".join(" ".join(line.split()) for line in text.splitlines() if word in line)[:120]
    return Finding("sleep", lines or "not readable here", not lines, advice)


def examine(folder: Path) -> list[Finding]:
    """Return all findings."""
    return [threads(), spin(), blas(), cache(), disk(folder), movie_encoder(), sleep()]
