"""Two-dimensional flow past towed thin plates with flaps: from a case file to loads and pictures.

The map, in the order in which data flows:

1. `ibsolver.case`     case file (TOML) to a frozen `Case`; units, checks, fluids, scales
2. `ibsolver.run`      `assemble` builds the problem, `loop` marches it, `record` writes the run directory
3. `ibsolver.grid`     stretched staggered grid
4. `ibsolver.body`     plates, flaps, closed curves: points and how they move
5. `ibsolver.motion`   the law of the carriage
6. `ibsolver.flow`     one time step, like the method section of a paper
7. `ibsolver.kernels`  numba loops over arrays
8. `ibsolver.runfile`  the run directory: the only room that knows HDF5
9. `ibsolver.commands` one file a verb; `postprocess` reads run directories and draws

>>> import ibsolver
>>> ibsolver.__version__ == ibsolver._version.__version__
True
>>> callable(ibsolver.load_case) and callable(ibsolver.run)
True

A run takes three lines::

    case = ibsolver.load_case("cases/towed_plate.toml")
    result = ibsolver.run(case, out="runs/plate")
    result.travel, result.ns_per_cell_step
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

from ibsolver._version import __version__

if TYPE_CHECKING:
    from ibsolver.case import Case, load_case
    from ibsolver.run.loop import resume_case as resume
    from ibsolver.run.loop import run_case as run

_WHERE = {
    "load_case": ("ibsolver.case", "load_case"),
    "Case": ("ibsolver.case", "Case"),
    "resume": ("ibsolver.run.loop", "resume_case"),
}

__all__ = ["Case", "__version__", "load_case", "resume", "run"]


def __getattr__(name: str) -> Any:
    """Load what is asked for when it is first asked for; `run` is a package that can be called (see there)."""
    if name in _WHERE:
        module, attribute = _WHERE[name]
        return getattr(importlib.import_module(module), attribute)
    if name == "run":
        return importlib.import_module("ibsolver.run")
    raise AttributeError(f"module 'ibsolver' has no attribute {name!r}")
