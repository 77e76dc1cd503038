"""Signals that end a run cleanly: the step is finished, a checkpoint is written, then the run stops.

A first SIGINT, SIGTERM, SIGHUP or SIGUSR1 asks; a second SIGINT ends the process at once (files stay whole, for each is
written under another name first).
"""

from __future__ import annotations

import signal
import threading
from types import FrameType, TracebackType

NAMES = ("SIGINT", "SIGTERM", "SIGHUP", "SIGUSR1")


class StopRequest:
    """Context in which the signals only raise a flag.

    Attributes
    ----------
    received : str
        Name of the signal, empty while none came.
    """

    def __init__(self) -> None:
        self.received = ""
        self._previous: dict[int, object] = {}

    def __enter__(self) -> StopRequest:
        if threading.current_thread() is threading.main_thread():
            for name in NAMES:
                if hasattr(signal, name):
                    number = getattr(signal, name)
                    self._previous[number] = signal.signal(number, self._ask)
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        for number, handler in self._previous.items():
            signal.signal(number, handler)  # type: ignore[arg-type]

    def _ask(self, number: int, frame: FrameType | None) -> None:
        name = signal.Signals(number).name
        if self.received and name == "SIGINT":
            signal.signal(number, signal.SIG_DFL)
            signal.raise_signal(number)
        self.received = name

    def __bool__(self) -> bool:
        return bool(self.received)
