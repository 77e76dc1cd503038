"""The progress line of a run: redrawn on a terminal, a plain line now and then elsewhere."""

from __future__ import annotations

import sys
import time
from types import TracebackType
from typing import Any

EVERY = 30.0  # s between plain lines


class ProgressLine:
    """Context that shows `ibsolver.run.progress.Progress` reports on standard error."""

    def __init__(self, quiet: bool):
        self._quiet = quiet
        self._live: Any = None
        self._next = 0.0

    def __enter__(self) -> ProgressLine:
        if not self._quiet and sys.stderr.isatty():
            from rich.console import Console
            from rich.live import Live

            self._live = Live(console=Console(stderr=True), refresh_per_second=4, transient=True)
            self._live.__enter__()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self._live is not None:
            self._live.__exit__(kind, error, trace)

    def __call__(self, report: Any) -> None:
        """Show one report, if it is time."""
        now = time.monotonic()
        if self._quiet or now < self._next:
            return
        if self._live is not None:
            self._next = now + 0.2
            self._live.update(sentence(report))
            return
        self._next = now + EVERY
        print(sentence(report), file=sys.stderr, flush=True)


def sentence(report: Any) -> str:
    """Return a report as one line."""
    share = 100.0 * min(report.travel / report.travel_end, 1.0)
    return (
        f"travel {report.travel:7.3f} of {report.travel_end:g} chords ({share:3.0f} %)   C_L {report.lift:7.3f}   "
        f"C_D {report.drag:7.3f}   Courant {report.courant:.2f}   time left {duration(report.seconds_left)}"
    )


def duration(seconds: float) -> str:
    """Return a wall time in words short enough for a line."""
    if not seconds < 1e8:
        return "unknown yet"
    if seconds < 100:
        return f"{seconds:.0f} s"
    if seconds < 6000:
        return f"{seconds / 60:.0f} min"
    return f"{seconds / 3600:.1f} h"
