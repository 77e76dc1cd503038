"""`manifest.json`: with what a run was made."""

from __future__ import annotations

import importlib.metadata
import os
import platform
import socket
from pathlib import Path
from typing import Any

from ibsolver._version import __version__
from ibsolver.runfile.layout import SCHEMA

PACKAGES = ("numpy", "scipy", "numba", "llvmlite", "h5py", "matplotlib", "meshio", "threadpoolctl")


def collect(**facts: Any) -> dict[str, Any]:
    """Return what is known of this machine and installation, with further facts of the run."""
    return {
        "schema": SCHEMA,
        "ibsolver": __version__,
        "python": platform.python_version(),
        "packages": {name: _version(name) for name in PACKAGES},
        "platform": platform.platform(),
        "host": socket.gethostname(),
        "processor": processor(),
        "cores": os.cpu_count(),
        "blas": blas(),
        **facts,
    }


def _version(name: str) -> str | None:
    try:
        return importlib.metadata.version(name)
    except importlib.metadata.PackageNotFoundError:
        return None


def processor() -> str:
    """Return the processor's name."""
    try:
        for line in Path("/proc/cpuinfo").read_text().splitlines():
            if line.startswith("model name"):
                return line.partition(":")[2].strip()
    except OSError:
        pass
    return platform.processor() or platform.machine()


def blas() -> list[dict[str, Any]]:
    """Return the BLAS libraries now loaded, with their thread counts."""
    from threadpoolctl import threadpool_info

    wanted = ("internal_api", "version", "num_threads", "threading_layer", "architecture")
    return [{k: pool.get(k) for k in wanted} for pool in threadpool_info() if pool.get("user_api") == "blas"]
