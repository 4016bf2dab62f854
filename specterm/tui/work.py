"""The computations behind the screen: the newest request wins, results come back as messages.

One computation is under way, one at most waits for it.

Each runs in a daemon thread of its own, so that leaving never waits for one; what was overtaken or stopped is forgotten at
once and ends when it next asks whether to go on.
"""

from __future__ import annotations

import contextlib
import threading
import time
from collections.abc import Callable, Hashable, Iterable
from dataclasses import replace
from typing import Any

from textual.app import App
from textual.message import Message

from specterm.errors import SpectermError, WorkStopped
from specterm.session.pins import Pin
from specterm.tui.child import ChildEngine
from specterm.tui.held import Share
from specterm.tui.pages.page import Answered, Inquiry, answered
from specterm.tui.solving import BuiltIn, Engine, Outcome, Request, Weighed, compute, moments_of, weigh
from specterm.views.status import MomentsText

_PACE = 0.5
_HERE = 1.0
"""Seconds after which a computation goes on, from its start, in a process of its own."""
_GRACE = 0.25
"""A computation younger than this is waited for, so that a key held down shows every state that there is time for."""


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


class PinSolved(Message):
    """The spectrum of a pin has been computed."""

    def __init__(self, pin: Pin, outcome: Outcome) -> None:
        """Carry both."""
        super().__init__()
        self.pin, self.outcome = pin, outcome


class Counted(Message):
    """It has been found how many levels hold a share of a state, or why that cannot be told."""

    def __init__(self, state: str, count: int, captured: float, error: SpectermError | None = None) -> None:
        """Carry them."""
        super().__init__()
        self.state, self.count, self.captured, self.error = state, count, captured, error


class Work:
    """Starts computations of one app and forgets those that were overtaken."""

    def __init__(self, app: App[int], engine: Engine) -> None:
        """Start with no request."""
        self.app, self.engine = app, engine
        self.portable = isinstance(engine, BuiltIn)
        self.number = 0
        self.busy = False
        self._solving, self._since = 0, 0.0
        self._next: Request | None = None
        self._running: set[threading.Thread] = set()
        self._asked: set[tuple[int, Hashable]] = set()
        self._wanted: set[Inquiry] = set()
        self._share: Share | None = None
        self._refused: set[Inquiry] = set()

    @property
    def resting(self) -> bool:
        """Whether no thread runs any more."""
        return not self._running

    def solve(self, request: Request) -> None:
        """Compute `request`, numbered anew; what ran before for long is asked to stop."""
        self.number += 1
        self.busy = True
        numbered = replace(request, number=self.number)
        self.app.set_timer(_PACE, lambda: self._remind(numbered.number))
        if self._solving and time.monotonic() - self._since < _GRACE:
            if self._next is None:
                self.app.set_timer(_GRACE, self._go_on)
            self._next = numbered
        else:
            self._begin(numbered)

    def _begin(self, request: Request) -> None:
        """Start a computation; older ones are asked to stop."""
        self._next, self._solving, self._since = None, request.number, time.monotonic()
        self._start(lambda: self._solve(request))

    def _go_on(self) -> None:
        """Start the computation that waits, if there is one."""
        if self._next is not None and self.busy:
            self._begin(self._next)

    def stop(self) -> bool:
        """Forget the running computation, which ends by itself; return whether there was one."""
        asking = self._share is not None or bool(self._wanted)
        self._share, self._refused, self._wanted = None, self._refused | self._wanted, set()
        if not self.busy:
            return asking
        self._next, self._solving = None, 0
        self.number += 1
        self.busy = False
        return True

    @property
    def asking(self) -> bool:
        """Whether an inquiry is being answered."""
        return bool(self._wanted)

    def finished(self, number: int) -> bool:
        """Take note of the end of a request; return whether it is wanted: the newest one, or one that another waited for."""
        if number != self._solving:
            return False
        self._solving = 0
        if number == self.number:
            self.busy = False
        self._go_on()
        return True

    def inquire(self, outcome: Outcome, inquiries: Iterable[Inquiry]) -> None:
        """Find the answers to inquiries, each once; others still being answered are asked to stop."""
        now = set(inquiries) - self._refused
        self._wanted &= now
        for inquiry in now:
            if (outcome.request.number, inquiry) not in self._asked:
                self._wanted.add(inquiry)
                self.look(outcome, inquiry)

    def retry(self) -> None:
        """Let inquiries that were stopped be asked again."""
        self._refused = set()

    def _partly(self, outcome: Outcome, inquiry: Inquiry) -> Callable[[Callable[[], Any]], None]:
        """Return what shows a part of an answer, at most twice a second."""
        last = time.monotonic()

        def tell(make: Callable[[], Any]) -> None:
            nonlocal last
            if time.monotonic() - last >= _PACE:
                self._tell(Looked(outcome.request.number, inquiry, Answered(inquiry, make(), whole=False)))
                last = time.monotonic()

        return tell

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

    def _solve(self, request: Request) -> None:
        """Do the work of a request; runs in a thread."""
        began = time.monotonic()

        def overtaken() -> bool:
            return request.number != self._solving

        def long() -> bool:
            return overtaken() or (self.portable and time.monotonic() - began > _HERE)

        progress = self._progress(request.number)
        outcome = compute(self.engine, request, long, progress)
        if isinstance(outcome.error, WorkStopped) and not overtaken():
            outcome = compute(ChildEngine(self.engine, request), request, overtaken, progress)
        self._tell(Solved(outcome))

    def _tell(self, message: Message) -> None:
        """Hand a message to the app, unless it has been left."""
        if self.app.is_running:
            with contextlib.suppress(RuntimeError):  # it may be left just now
                self.app.post_message(message)

    def share(self, outcome: Outcome, state: str, share: float) -> None:
        """Find how many levels hold a share of a state."""
        inquiry = self._share = Share(state, share)

        def run() -> None:
            found = answered(inquiry, outcome, lambda: self._share is not inquiry, lambda _: None)
            if found is not None and self._share is inquiry:
                self._share = None
                count, captured = found.result or (0, 0.0)
                self._tell(Counted(state, count, captured, found.error))

        self._start(run)

    def pin(self, pin: Pin) -> None:
        """Compute the spectrum of a pin that was taken up again."""
        request = Request(0, pin.text, pin.folder, pin.count, pin.near, pin.tolerance)
        self._start(lambda: self._tell(PinSolved(pin, compute(self.engine, request, lambda: False, lambda _: None))))

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
            found = answered(key, outcome, lambda: key not in self._wanted, self._partly(outcome, key))
            self._wanted.discard(key)
            if found is None:
                self._asked.discard((outcome.request.number, key))
        self._tell(Looked(outcome.request.number, key, found))
