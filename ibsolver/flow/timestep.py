"""How long the next step may be, and whether diffusion is explicit."""

from __future__ import annotations

import math
from dataclasses import dataclass

DIFFUSION_LIMIT = 0.1  # of h^2 Re; Adams-Bashforth diffusion in 2-D is stable to 1/8, less beside convection
GROWTH = 1.1  # from step to step
EDGE_SPEED = 2.5  # tow speeds, typical greatest speed on the grid, for choosing explicit or implicit beforehand
RUNAWAY = 3.0  # real Courant number beyond which a run counts as diverged


@dataclass(frozen=True)
class StepRule:
    """Step control of one run.

    Parameters
    ----------
    courant : float
        Wanted Courant number, max(|u|/dx + |v|/dy) dt.
    spacing : float
        Smallest cell (chords).
    reynolds : float
    explicit : bool
        Whether diffusion is part of the Adams-Bashforth tendency.
    fixed : float or None
        A fixed step, for verification.
    cap : float
        Longest step for other reasons, such as a spring's period.
    """

    courant: float
    spacing: float
    reynolds: float
    explicit: bool
    fixed: float | None = None
    cap: float = math.inf

    def longest(self) -> float:
        """Return the longest step that this rule ever takes."""
        if self.fixed is not None:
            return self.fixed
        limit = min(self.courant * self.spacing, self.cap)
        if self.explicit:
            limit = min(limit, DIFFUSION_LIMIT * self.spacing**2 * self.reynolds)
        return limit

    def next_step(self, rate: float, previous: float) -> float:
        """Return the next step.

        Parameters
        ----------
        rate : float
            Largest |u|/dx + |v|/dy now.
        previous : float
            Last step, 0 before the first.
        """
        if self.fixed is not None:
            return self.fixed
        step = min(self.longest(), self.courant / rate if rate > 0 else self.longest())
        return min(step, GROWTH * previous) if previous > 0 else step


def choose_explicit(spacing: float, reynolds: float, courant: float, periodic: bool) -> bool:
    """Return whether explicit diffusion leaves the step to convection (periodic lines are always explicit)."""
    return periodic or DIFFUSION_LIMIT * spacing**2 * reynolds >= courant * spacing / EDGE_SPEED
