"""Every compile flag and every threading decision, in one file.

Why: numba's OpenMP layer spins between parallel regions; a BLAS with threads of its own then fights it for
the cores, and an order of magnitude is lost. So the wait policy and the layer are chosen *before* numba
starts, and each process that marches limits BLAS to one thread (`one_blas_thread`).

numba's own file cache is blind to edits in other files and to flags, so the cache folder is keyed by a hash
of the kernel sources, the versions and the processor.
"""

from __future__ import annotations

import contextlib
import hashlib
import os
import platform
import sys
import tempfile
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

# A short spin keeps the threads warm between the kernels of one step (microseconds apart) and gives the core
# away soon after; an unbounded spin starves the BLAS and other processes.
_ENVIRONMENT = {
    "OMP_WAIT_POLICY": "passive",
    "GOMP_SPINCOUNT": "10000",
    "KMP_BLOCKTIME": "0",
    "NUMBA_THREADING_LAYER_PRIORITY": "omp tbb workqueue",
}


def _source_key() -> str:
    """Return a short hash of the kernel sources, numba, numpy and the processor."""
    import importlib.metadata as metadata

    digest = hashlib.sha256()
    for path in sorted(Path(__file__).parent.glob("*.py")):
        digest.update(path.read_bytes())
    for name in ("numba", "llvmlite", "numpy"):
        digest.update(metadata.version(name).encode())
    digest.update(f"{sys.version}{platform.machine()}{_processor()}".encode())
    return digest.hexdigest()[:16]


def _processor() -> str:
    """Return the processor's name, or an empty string where it cannot be read."""
    try:
        for line in Path("/proc/cpuinfo").read_text().splitlines():
            if line.startswith("model name"):
                return line
    except OSError:
        pass
    return platform.processor()


def cache_folder() -> Path:
    """Return the folder of compiled kernels (``IBSOLVER_CACHE`` overrides where it lies)."""
    base = os.environ.get("IBSOLVER_CACHE")
    if base is None:
        home = os.environ.get("XDG_CACHE_HOME") or os.path.join(os.path.expanduser("~"), ".cache")
        base = os.path.join(home, "ibsolver")
    return Path(base) / _source_key()


def _prepare() -> None:
    """Set the environment numba reads once, when it is first imported."""
    for name, value in _ENVIRONMENT.items():
        os.environ.setdefault(name, value)
    folder = cache_folder()
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError:
        folder = Path(tempfile.gettempdir()) / f"ibsolver-{os.getuid() if hasattr(os, 'getuid') else 0}" / folder.name
    os.environ.setdefault("NUMBA_CACHE_DIR", str(folder))


_prepare()

import numba  # noqa: E402  (after the environment is set)
from numba import prange  # noqa: E402

# No fast-math at all. Reassociation or contraction would leave the compiler a choice, and it chooses differently when it
# compiles in this process and when it loads the same kernel from the cache: the bits of a run would then depend on
# whether it was the first (seen with "reassoc" and "contract" in `momentum.predict`). Element-wise loops vectorise all the
# same; and tests for numbers that are not finite stay.
FAST = False

kernel: Callable[..., Any] = numba.njit(cache=True, fastmath=FAST, error_model="numpy", nogil=True)
parallel_kernel: Callable[..., Any] = numba.njit(
    cache=True, fastmath=FAST, error_model="numpy", nogil=True, parallel=True
)
inline = numba.njit(fastmath=FAST, error_model="numpy", inline="always")


def set_threads(threads: int | None) -> int:
    """Use `threads` threads in the kernels (None: every core this process may use) and return the number.

    Raises
    ------
    ValueError
        If more threads are asked for than numba was started with.
    """
    if threads is None:
        threads = min(available_cores(), numba.config.NUMBA_NUM_THREADS)
    if not 1 <= threads <= numba.config.NUMBA_NUM_THREADS:
        raise ValueError(f"{threads} threads asked for; this machine allows 1 to {numba.config.NUMBA_NUM_THREADS}.")
    numba.set_num_threads(threads)
    return threads


SMALL_GRID = 25_000  # cells: below, handing work to a second thread costs what it saves, and much more on a busy machine


def sensible_threads(cells: int) -> int:
    """Return how many threads a grid of so many cells deserves on this machine."""
    return 1 if cells < SMALL_GRID else min(available_cores(), numba.config.NUMBA_NUM_THREADS)


def available_cores() -> int:
    """Return the number of cores this process may run on."""
    try:
        return len(os.sched_getaffinity(0))
    except AttributeError:
        return os.cpu_count() or 1


def threading_layer() -> str:
    """Return the name of numba's threading layer, or "not started" before the first parallel kernel."""
    try:
        return str(numba.threading_layer())
    except ValueError:
        return "not started"


@contextlib.contextmanager
def one_blas_thread() -> Iterator[None]:
    """Limit BLAS to one thread inside the block: the kernels call it from threads of their own."""
    from threadpoolctl import threadpool_limits

    with threadpool_limits(limits=1, user_api="blas"):
        yield


__all__ = [
    "available_cores",
    "cache_folder",
    "inline",
    "kernel",
    "one_blas_thread",
    "parallel_kernel",
    "prange",
    "sensible_threads",
    "set_threads",
    "threading_layer",
]
