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
        if not self._quiet and sys.stderr is not None and sys.stderr.isatty():
            from rich.console import Console
            from rich.live import Live

            console = Console(stderr=True)
            if not console.is_dumb_terminal:
                self._live = Live(console=console, refresh_per_second=4, transient=True)
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
            self._live.update(_one_line(sentence(report)))
            return
        self._next = now + EVERY
        print(sentence(report), file=sys.stderr, flush=True)


def _one_line(text: str) -> Any:
    """Return a plain text that a narrow terminal cuts instead of wrapping."""
    from rich.text import Text

    return Text(text, no_wrap=True, overflow="ellipsis")


def sentence(report: Any) -> str:
    """Return a report as one line, which fits 80 columns unless a coefficient is absurd; c is the chord or diameter."""
    return (
        f"travel {report.travel:.2f} of {report.travel_end:g} c  C_L {report.lift:5.2f}  C_D {report.drag:5.2f}  "
        f"Courant {report.courant:.2f}  time left {duration(report.seconds_left)}"
    )


def duration(seconds: float) -> str:
    """Return a wall time in words short enough for a line."""
    if not seconds < 1e8:
        return "unknown"
    if seconds < 100:
        return f"{seconds:.0f} s"
    if seconds < 6000:
        return f"{seconds / 60:.0f} min"
    return f"{seconds / 3600:.1f} h"
