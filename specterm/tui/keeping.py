"""The session of an app, saved within a fraction of a second of every change, and taken up again."""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import asdict, replace
from typing import TYPE_CHECKING, Any, get_args, get_type_hints

from specterm.session.saved import Saved, kept_past
from specterm.session.store import Left, Store, left_behind, tidy
from specterm.tui.choices import Choices
from specterm.tui.dialogs import Question
from specterm.tui.look import COLUMNS, LARGEST_COUNT, VIEWS, Look
from specterm.tui.pages import NAMES
from specterm.views.canvas import GLYPHS

if TYPE_CHECKING:
    from specterm.tui.app import Specterm

_DELAY = 0.25
"""Seconds after a change at which it is saved."""
_MERGED = 1.0
"""Texts that follow each other faster than this are one step for undo after the session is taken up again."""

_PASSING = ("times", "sweep", "vary", "observed", "into", "cursor", "scroll", "aside")
"""Choices that are not saved."""


class Keeping:
    """Saves the session of one app off the event loop, one write at a time."""

    def __init__(self, app: Specterm) -> None:
        """Save for `app`."""
        self.app, self.store = app, Store()
        self.past: list[str] = []
        self._stamp = 0.0
        self._due = False
        self._failed = False
        self._writing = threading.Lock()
        self._last: Saved | None = None

    def noted(self, before: str, time: float) -> None:
        """Remember a text that was there before an edit."""
        if time - self._stamp > _MERGED or not self.past:
            self.past = [*kept_past(self.past), before]
        self._stamp = time

    def soon(self) -> None:
        """Save in a moment; further changes until then go along."""
        if not self._due:
            self._due = True
            self.app.set_timer(_DELAY, self._start)

    def _start(self) -> None:
        """Save in a thread, where anything has changed."""
        self._due = False
        saved = self.session()
        if saved == self._last:
            return
        self._last = saved
        threading.Thread(target=self._write, args=(saved, self._told), daemon=True).start()

    def _write(self, saved: Saved, then: Callable[[bool], None]) -> None:
        with self._writing:
            kept = self.store.keep(saved)
        if self.app.is_running:
            self.app.call_later(then, kept)

    def _told(self, kept: bool) -> None:
        """Say once that nothing can be kept."""
        if not kept and not self._failed:
            self.app.say("this session cannot be kept for a crash: the state folder cannot be written", "warn")
        self._failed = not kept

    def now(self) -> bool:
        """Save at once, before the session may end; return whether that worked."""
        with self._writing:
            return self.store.keep(self.session())

    def close(self) -> None:
        """End in order: pins, notebook and view lie ready for the next session; unsaved text was saved or is not wanted."""
        saved = self.session()
        if saved.document.changed:
            saved = replace(saved, document=replace(saved.document, text=saved.document.saved or ""), past=())
        with self._writing:
            self.store.keep(saved)
            self.store.leave()
        tidy()

    def session(self) -> Saved:
        """Return the session as it stands."""
        app = self.app
        pins = tuple(one.pin for one in app.pins)
        view = _plain(app.shown.look)
        return Saved(
            app.document, app.folder, tuple(self.past), pins, app.bench.notebook, view, app.options.near, app.options.tolerance
        )

    @property
    def failing(self) -> bool:
        """Whether the session cannot be written at the moment."""
        return self._failed

    @property
    def settled(self) -> bool:
        """Whether all that has changed is on the disk."""
        return not self._due and self._last == self.session() and not self._writing.locked()

    # Taking a session up again

    def offer(self) -> None:
        """Take up what was left in order at once; offer what broke off."""
        app = self.app
        for left in left_behind(app.document.path):
            if left.saved.document.changed and left.saved.document.text != app.document.text:
                self._ask(left)
                return
            if left.saved.pins or left.saved.notebook.entries:
                self._take(left, text=False)
                app.say("pins and notebook of the last session are back", "good")
                return
            left.remove()

    def _ask(self, left: Left) -> None:
        """Ask what to do with unsaved text of a session that broke off."""

        def answered(letter: str | None) -> None:
            if letter == "r":
                self._take(left, text=True)
            elif letter == "d":
                left.remove()

        words = f"Unsaved text of {self.app.document.name} was kept earlier."
        answers = {"r": "take that session up", "d": "drop it", "n": "not now"}
        self.app.ask(Question(words, answers), answered)

    def _take(self, left: Left, *, text: bool) -> None:
        """Take up a session: view, pins, notebook, and text with what undo can bring back."""
        app, saved = self.app, left.saved
        look = look_from(saved.view, app.shown.look)
        app.shown = replace(app.shown, look=look)
        app.bench = replace(app.bench, notebook=saved.notebook)
        app.options = replace(app.options, near=saved.near, tolerance=saved.tolerance)
        if text:
            if app.document.path is None:
                app.folder = saved.folder
                app.document = replace(app.document, title=saved.document.title)
            for earlier in saved.past:
                app.take_text(earlier)
            app.take_text(saved.document.text)
            app.take_typed()
            self.past = list(saved.past)
        app.restore_pins(saved.pins)
        app.compute()
        if self.now():
            left.remove()


def _plain(look: Look) -> dict[str, Any]:
    """Return a look as plain data, without what belongs to a question just asked."""
    data = asdict(look)
    for name in _PASSING:
        del data["choices"][name]
    return data


def look_from(data: dict[str, Any], usual: Look) -> Look:
    """Return the look that plain data describe; whatever does not fit stays as it is in `usual`."""
    known = {"mode": VIEWS, "glyphs": GLYPHS, "page": NAMES, "column": COLUMNS}
    found = _fitting(Look, data)
    found = {key: value for key, value in found.items() if key not in known or value in known[key]}
    found = {key: value for key, value in found.items() if type(value) is not int or 0 <= value <= LARGEST_COUNT}
    choices = data.get("choices")
    told = _fitting(Choices, choices) if isinstance(choices, dict) else {}
    return replace(usual, **found, choices=replace(usual.choices, **told))


def _fitting(kind: type[Look] | type[Choices], data: dict[str, Any]) -> dict[str, Any]:
    """Return the entries of plain data that a dataclass can take as they are."""
    hints = get_type_hints(kind)
    return {name: value for name, value in data.items() if name in hints and _fits(value, hints[name])}


def _fits(value: Any, hint: Any) -> bool:  # noqa: ANN401 - from a file of whatever content
    """Say whether a value is of a type, or of one of several; tuples are not taken."""
    return type(value) in (get_args(hint) or (hint,))
