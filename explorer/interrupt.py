"""Ctrl-C as a wish: the first asks long work to stop at the next good place, the second insists."""

from __future__ import annotations

import signal
import threading
from types import FrameType, TracebackType
from typing import Any, Self


class Interrupt:
    """While it is open, calling it says whether Ctrl-C (or a request to end) has come."""

    _SIGNALS = (signal.SIGINT, signal.SIGTERM)

    def __init__(self) -> None:
        self._asked = False
        self._before: dict[signal.Signals, Any] = {}

    def __call__(self) -> bool:
        return self._asked

    def __enter__(self) -> Self:
        if threading.current_thread() is threading.main_thread():
            self._before = {s: signal.signal(s, self._ask) for s in self._SIGNALS}
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        fault: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        for number, handler in self._before.items():
            signal.signal(number, handler)

    def _ask(self, number: int, frame: FrameType | None) -> None:
        if self._asked:
            raise KeyboardInterrupt
        self._asked = True
