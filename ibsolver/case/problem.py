"""One thing in a case that does not fit together with the rest."""

from __future__ import annotations

from dataclasses import dataclass

Place = tuple[str | int, ...]


@dataclass(frozen=True)
class Problem:
    """What does not fit together, and the key it is told at."""

    place: Place
    problem: str
    suggestion: str = ""
