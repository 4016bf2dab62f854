"""The computations behind the screen: the newest request wins, results come back as messages.

Each runs in a daemon thread of its own, so that leaving never waits for one; what was overtaken or stopped is forgotten at
once and ends when it next asks whether to go on.
"""

from __future__ import annotations

import contextlib
import threading
import time
from collections.abc import Callable, Hashable
from dataclasses import replace
from typing import Any

from textual.app import App
from textual.message import Message

from specterm.session import rescue
from specterm.session.document import Document
from specterm.tui.pages.page import Answered, Inquiry, answered
from specterm.tui.solving import Engine, Outcome, Request, Weighed, compute, moments_of, weigh
from specterm.views.status import MomentsText

_PACE = 0.5


class Solved(Message):
    """A computation came to its end."""

    def __init__(self, outcome: Outcome) -> None:
        """Carry the outcome."""
        super().__init__()
        self.outcome = outcome


class Progressed(Message):
    """A long computation says how far it is."""

    def __init__(self, number: int, words: str) -> None:
        """Carry the number of the request and the words."""
        super().__init__()
        self.number, self.words = number, words


class Looked(Message):
    """Moments of a level, weights of a state, or the answer to an inquiry of the outcome of request `number` have arrived."""

    def __init__(self, number: int, key: Hashable, found: MomentsText | Weighed | Answered | None) -> None:
        """Carry the place of the level, the name of the state or the inquiry, and what was found."""
        super().__init__()
        self.number, self.key, self.found = number, key, found


class Work:
    """Starts computations of one app and forgets those that were overtaken."""

    def __init__(self, app: App[int], engine: Engine) -> None:
        """Start with no request."""
        self.app, self.engine = app, engine
        self.number = 0
        self.busy = False
        self._kept = False
        self._keeping = threading.Lock()
        self._running: set[threading.Thread] = set()
        self._asked: set[tuple[int, Hashable]] = set()
        self._inquiry: Inquiry | None = None

    @property
    def resting(self) -> bool:
        """Whether no thread runs any more."""
        return not self._running

    def solve(self, request: Request, document: Document) -> None:
        """Compute `request`, numbered anew; what ran before is asked to stop, and unsaved text is kept safe first."""
        self.number += 1
        self.busy = True
        numbered = replace(request, number=self.number)
        self._start(lambda: self._solve(numbered, document))
        self.app.set_timer(_PACE, lambda: self._remind(numbered.number))

    def stop(self) -> bool:
        """Forget the running computation, which ends by itself; return whether there was one."""
        asking, self._inquiry = self._inquiry is not None, None
        if not self.busy:
            return asking
        self.number += 1
        self.busy = False
        return True

    @property
    def asking(self) -> bool:
        """Whether an inquiry is being answered."""
        return self._inquiry is not None

    def finished(self, number: int) -> bool:
        """Take note of the end of a request; return whether it is the newest one."""
        if number != self.number:
            return False
        self.busy = False
        return True

    def inquire(self, outcome: Outcome, inquiry: Inquiry) -> None:
        """Find the answer to an inquiry, once; an older one still being answered is asked to stop."""
        if (outcome.request.number, inquiry) not in self._asked:
            self._inquiry = inquiry
            self.look(outcome, inquiry)

    def look(self, outcome: Outcome, key: Hashable) -> None:
        """Find the moments of the level at place `key`, the weights of the state called `key`, or an inquiry's answer, once."""
        wanted = (outcome.request.number, key)
        if wanted in self._asked:
            return
        self._asked = {asked for asked in self._asked if asked[0] == outcome.request.number} | {wanted}
        self._start(lambda: self._look(outcome, key))

    def _start(self, task: Callable[[], None]) -> None:
        """Run `task` in a thread that ends with the process."""

        def run() -> None:
            try:
                task()
            finally:
                self._running.discard(threading.current_thread())

        thread = threading.Thread(target=run, daemon=True)
        self._running.add(thread)
        thread.start()

    def _solve(self, request: Request, document: Document) -> None:
        """Do the work of a request; runs in a thread."""
        with self._keeping:
            self._keep(document)
        outcome = compute(self.engine, request, lambda: request.number != self.number, self._progress(request.number))
        self._tell(Solved(outcome))

    def _tell(self, message: Message) -> None:
        """Hand a message to the app, unless it has been left."""
        if self.app.is_running:
            with contextlib.suppress(RuntimeError):  # it may be left just now
                self.app.post_message(message)

    def _keep(self, document: Document) -> None:
        """Keep unsaved text safe, and drop what this session kept once there is none."""
        if document.changed:
            self._kept = rescue.keep(document) is not None or self._kept
        elif self._kept:
            rescue.drop(document.path)
            self._kept = False

    def _progress(self, number: int) -> Callable[[str], None]:
        """Return what reports progress, at most twice a second."""
        last = time.monotonic()

        def report(words: str) -> None:
            nonlocal last
            if time.monotonic() - last >= _PACE:
                last = time.monotonic()
                self._tell(Progressed(number, words))

        return report

    def _remind(self, number: int) -> None:
        """Say that a computation is running when it lasts."""
        if self.busy and number == self.number:
            self.app.post_message(Progressed(number, "computing"))

    def _look(self, outcome: Outcome, key: Any) -> None:  # noqa: ANN401 - one of three kinds
        """Do the work of one look; runs in a thread."""
        found: Any
        if isinstance(key, (int, str)):
            found = weigh(self.engine, outcome, key) if isinstance(key, str) else moments_of(self.engine, outcome, key)
        else:
            found = answered(key, outcome, lambda: self._inquiry is not key)
            if self._inquiry is key:
                self._inquiry = None
            if found is None:
                self._asked.discard((outcome.request.number, key))
        self._tell(Looked(outcome.request.number, key, found))
