"""Assemble, march, record: the loop around the solver. Imports everything left of the run directory.

The package itself can be called, so that ``ibsolver.run(case, out=...)`` reads as it should although ``ibsolver.run`` is
also the name of this room; the call is `ibsolver.run.loop.run_case`.
"""

from __future__ import annotations

import sys
from types import ModuleType
from typing import Any


class _CallablePackage(ModuleType):
    def __call__(self, *arguments: Any, **options: Any) -> Any:
        """March a case (`ibsolver.run.loop.run_case`)."""
        from ibsolver.run.loop import run_case

        return run_case(*arguments, **options)


sys.modules[__name__].__class__ = _CallablePackage
