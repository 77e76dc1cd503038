"""The case room: TOML text to a frozen `Case`, checked, in SI units and radians.

Imports `ibsolver.errors` and the standard library only; numpy and meshio are loaded by `outline_file` alone, and
only for a case with an outline. It reads files that lie beside the case and writes none.
"""

from __future__ import annotations

from ibsolver.case.model import Case
from ibsolver.case.read import load_case, read_case_text

__all__ = ["Case", "load_case", "read_case_text"]
