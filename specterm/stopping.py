"""Stopping a computation from outside: what asks is set once, and asked wherever much work is about to be done."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar

from specterm.errors import WorkStopped

OFTEN = 0.02
"""Seconds between two questions: asking may cost more than the work between them."""


class _Asking:
    """Who is asked, and when that is to be done again."""

    __slots__ = ("due", "should_stop")

    def __init__(self, should_stop: Callable[[], bool]) -> None:
        self.should_stop = should_stop
        self.due = 0.0


_ASKED: ContextVar[_Asking | None] = ContextVar("asked", default=None)


@contextmanager
def stopping(should_stop: Callable[[], bool] | None) -> Iterator[None]:
    """Let `check` ask `should_stop` inside; None leaves it as it is."""
    if should_stop is None:
        yield
        return
    token = _ASKED.set(_Asking(should_stop))
    try:
        yield
    finally:
        _ASKED.reset(token)


def check() -> None:
    """Raise WorkStopped where the work is to stop; asks at most every `OFTEN` seconds, and nobody where none is set."""
    asked = _ASKED.get()
    if asked is None:
        return
    now = time.perf_counter()
    if now >= asked.due:
        if asked.should_stop():
            raise WorkStopped("stopped")
        asked.due = now + OFTEN
