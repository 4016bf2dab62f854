"""The computations behind the screen: in threads, the newest request wins, results come back as messages."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import replace
from typing import Any

from textual.app import App
from textual.message import Message
from textual.worker import get_current_worker

from specterm.session import rescue
from specterm.session.document import Document
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
    """Moments of a level, or weights of a state, of the outcome of request `number` have arrived."""

    def __init__(self, number: int, key: int | str, found: MomentsText | Weighed | None) -> None:
        """Carry the place of the level or the name of the state, and what was found."""
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
        self._asked: set[tuple[int, int | str]] = set()

    def solve(self, request: Request, document: Document) -> None:
        """Compute `request`, numbered anew; what ran before is asked to stop, and unsaved text is kept safe first."""
        self.number += 1
        self.busy = True
        numbered = replace(request, number=self.number)
        self.app.run_worker(lambda: self._solve(numbered, document), thread=True, exclusive=True, group="solve")
        self.app.set_timer(_PACE, lambda: self._remind(numbered.number))

    def stop(self) -> bool:
        """Ask the running computation to stop; return whether there was one."""
        if not self.busy:
            return False
        self.app.workers.cancel_group(self.app, "solve")
        return True

    def finished(self, number: int) -> bool:
        """Take note of the end of a request; return whether it is the newest one."""
        if number != self.number:
            return False
        self.busy = False
        return True

    def look(self, outcome: Outcome, key: int | str) -> None:
        """Find the moments of the level at place `key`, or the weights of the state called `key`, once."""
        wanted = (outcome.request.number, key)
        if wanted in self._asked:
            return
        self._asked = {asked for asked in self._asked if asked[0] == outcome.request.number} | {wanted}
        self.app.run_worker(lambda: self._look(outcome, key), thread=True, group="look")

    def _solve(self, request: Request, document: Document) -> None:
        """Do the work of a request; runs in a thread."""
        worker = get_current_worker()
        self._keep(document)

        def should_stop() -> bool:
            return worker.is_cancelled or request.number != self.number

        outcome = compute(self.engine, request, should_stop, self._progress(request.number))
        self.app.post_message(Solved(outcome))

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
                self.app.post_message(Progressed(number, words))

        return report

    def _remind(self, number: int) -> None:
        """Say that a computation is running when it lasts."""
        if self.busy and number == self.number:
            self.app.post_message(Progressed(number, "computing"))

    def _look(self, outcome: Outcome, key: int | str) -> None:
        """Do the work of one look; runs in a thread."""
        found: Any = weigh(self.engine, outcome, key) if isinstance(key, str) else moments_of(self.engine, outcome, key)
        self.app.post_message(Looked(outcome.request.number, key, found))
