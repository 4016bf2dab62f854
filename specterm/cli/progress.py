"""Progress of long work, on standard error when that is a terminal."""

from __future__ import annotations

import sys
import time
from types import TracebackType

PATIENCE = 1.0
"""Seconds of work before anything is shown."""


class Progress:
    """One line that is rewritten at most twice a second and wiped at the end."""

    def __init__(self) -> None:
        self._start = time.monotonic()
        self._last = 0.0
        self._shown = False

    def __enter__(self) -> Progress:
        return self

    def tell(self, words: str) -> None:
        """Show how far the work is."""
        now = time.monotonic()
        if now - self._start < PATIENCE or now - self._last < 0.5 or not sys.stderr.isatty():
            return
        self._last, self._shown = now, True
        sys.stderr.write(f"\r{words[:78]:<78}")
        sys.stderr.flush()

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None) -> None:
        if self._shown:
            sys.stderr.write("\r" + " " * 78 + "\r")
            sys.stderr.flush()
