"""When the next frame may go to the terminal: one on its way at a time, and few where the line is slow or unknown.

After each frame the terminal is asked where its cursor is; the answer says that all before it has arrived. What changes in
the meantime is drawn once, as it is then. A terminal that has not answered yet, or no more, is not waited for. Multiplexers
answer themselves, whatever the line behind them, so there, and on slow lines, frames are counted: a few at once, then so many
a second. Between frames nothing runs.
"""

from __future__ import annotations

import os
import time
from collections import deque
from collections.abc import Callable, Mapping

QUESTION = "\x1b[6n"
LONGEST = 3.0
"""Seconds after which an answer is not waited for any more."""
DEAF = 1.0
"""Seconds after which a terminal that has never answered is taken for one that never will."""
SLOW = 0.05
"""A line on which answers take longer is slow."""
AT_ONCE = 3.0
"""Frames that may follow each other at once: a key brings one, and one for each of what it sets off."""
PER_SECOND = 10.0


class Pace:
    """The state of the line; times are seconds of any clock that never goes back."""

    def __init__(self, *, careful: bool = False, clock: Callable[[], float] = time.monotonic) -> None:
        """Start with a terminal that has not answered; `careful` counts frames however fast the answers are."""
        self.careful = careful
        self._clock = clock
        self._asked: deque[float] = deque()
        self._first: float | None = None
        self._answers = False
        self._slow = False
        self._drawn = False
        self._left, self._counted = AT_ONCE, clock()

    @property
    def owed(self) -> bool:
        """Whether an answer is likely to come yet, which must not be left to whatever reads from the terminal next."""
        self._give_up()
        young = self._first is not None and self._clock() - self._first < DEAF
        return bool(self._asked) and (self._answers or young)

    def delay(self) -> float:
        """Return the seconds until the next frame may be drawn, 0 for now; an answer may make it sooner."""
        self._give_up()
        now = self._clock()
        waiting = self._asked[0] + LONGEST - now if self._answers and self._asked else 0.0
        if not (self.careful or self._slow):
            return waiting
        self._left, self._counted = min(AT_ONCE, self._left + PER_SECOND * (now - self._counted)), now
        return max(waiting, 0.0 if self._left >= 1 - 1e-9 else (1 - self._left) / PER_SECOND)

    def drawn(self) -> None:
        """Take note that a frame is ready for the terminal."""
        self._drawn = True
        self._left = max(0.0, self._left - 1)

    def sent(self) -> bool:
        """Take note that what was ready has been sent; return whether the terminal is to be asked now."""
        asks, self._drawn = self._drawn, False
        if asks:
            self._asked.append(self._clock())
            self._first = self._asked[0] if self._first is None else self._first
        return asks

    def answered(self) -> None:
        """Take note of an answer; one that comes after it was given up says that the line is alive all the same."""
        self._answers = True
        if self._asked:
            self._slow = self._clock() - self._asked.popleft() > SLOW

    def _give_up(self) -> None:
        """Forget questions that have waited too long; from then on the terminal is not waited for until it answers again."""
        while self._asked and self._clock() - self._asked[0] >= LONGEST:
            self._asked.popleft()
            self._answers = False


def behind_multiplexer(environ: Mapping[str, str] | None = None) -> bool:
    """Return whether the terminal is a multiplexer's, whose answers say nothing about the line."""
    known = os.environ if environ is None else environ
    return "TMUX" in known or "STY" in known or known.get("TERM", "").startswith(("screen", "tmux"))
