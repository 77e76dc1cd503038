"""What is made of a run directory, from its files alone.

* `open_run(dir)`: history, frames and case of a run (`run_view`).
* `forces(dir)`: loads against time as in the laboratory, with means, peaks, spectrum (`force_report`, from `loads`,
  `filters`, `statistics`, `spectrum`).
* `picture(dir)`: vorticity stills (`stills`).
* `figures/` is the only folder that draws; a figure computes no physics.

Imports `ibsolver.runfile`, `ibsolver.case` and `ibsolver.errors`, never the solver.
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from postprocess.force_report import forces
    from postprocess.run_view import open_run
    from postprocess.stills import picture

_WHERE = {"open_run": "run_view", "forces": "force_report", "picture": "stills"}

__all__ = ["forces", "open_run", "picture"]


def __getattr__(name: str) -> Any:
    """Load a function's module when the function is first asked for."""
    if name in _WHERE:
        return getattr(importlib.import_module(f"postprocess.{_WHERE[name]}"), name)
    raise AttributeError(f"module 'postprocess' has no attribute {name!r}")
