"""Draws the panes from what is shown, each only when what it shows has changed."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING

from textual.geometry import Size
from textual.timer import Timer

from specterm.tui.cell_pane import CellPane
from specterm.tui.complaint import sentence
from specterm.tui.keys import KEYS, TYPING, bottom
from specterm.tui.look import Look
from specterm.tui.pace import QUESTION, Pace, behind_multiplexer
from specterm.tui.pages import page_of
from specterm.tui.pages.page import Answered, Bench, Inquiry
from specterm.tui.pinned import Moved
from specterm.tui.rows import (
    Shown,
    bottom_row,
    chosen_row,
    drawn_safely,
    figure_rows,
    heading_row,
    level_rows,
    message_row,
    moments_row,
    needs_rows,
    trusted_row,
)
from specterm.tui.solving import Outcome, Weighed
from specterm.tui.table_columns import column_inquiry, column_of, estimate_inquiry, estimate_of
from specterm.views.level_table import Extra
from specterm.views.status import MomentsText

if TYPE_CHECKING:
    from specterm.tui.app import Specterm

_LINES = (("message", message_row), ("chosen", chosen_row), ("moments", moments_row), ("trust", trusted_row))
_LARGE = (("figure", figure_rows), ("levels", level_rows))


_BENCH = Bench()
_LAST = 1.0
"""Seconds that the last answer of the terminal is waited for at the end."""


class Painter:
    """The one place where an app is drawn, at the pace that the line allows: the newest state wins."""

    def __init__(self, app: Specterm) -> None:
        """Draw `app`."""
        self.app = app
        self._waiting = False
        self._pace = Pace(careful=behind_multiplexer())
        self._later: Timer | None = None
        self._then: Callable[[], object] | None = None
        self._drawn: dict[str, tuple[object, ...]] = {}
        self._last: dict[str, Answered] = {}

    @property
    def waiting(self) -> bool:
        """Whether there is something still to be drawn."""
        return self._waiting

    def ask(self) -> None:
        """Ask for the panes to be drawn, once for all keys and messages that are waiting.

        The call is the app's own: one that waits for a screen to be refreshed is lost with a dialog that is being closed.
        """
        if not self._waiting:
            self._waiting = True
            self._in_time()

    def _in_time(self) -> None:
        """Draw as soon as the line allows, for a single key at once."""
        delay = self._pace.delay()
        if delay > 0:
            self._later = self.app.set_timer(delay, self._in_time)
        else:
            self._later = None
            self.app.call_later(self._draw)

    def displayed(self) -> None:
        """Ask the terminal to say when it has what has just been sent; the app calls this."""
        driver = self.app._driver
        if driver is not None and not driver.is_headless and self._pace.sent():
            driver.write(QUESTION)

    def answered(self) -> None:
        """Take the terminal's answer; what has changed since is drawn now."""
        self._pace.answered()
        if self._later is not None:
            self._later.stop()
            self._in_time()
        if self._then is not None and not self._pace.owed:
            self._at_last()

    def quiet(self, then: Callable[[], object]) -> None:
        """Call `then` once no answer is owed by the terminal, which whoever reads from it next would take for keys."""
        self._then = then
        if self._pace.owed:
            self.app.set_timer(_LAST, self._at_last)
        else:
            self._at_last()

    def _at_last(self) -> None:
        """Do what waited for the last answer, once."""
        then, self._then = self._then, None
        if then is not None:
            then()

    def _draw(self) -> None:
        """Draw every pane from what is shown now."""
        self._waiting = False
        if not self.app.is_running or not self.app.screen_stack:
            return
        shown = self.complete()
        changed = False
        with self.app.batch_update():
            for name, draw in _LARGE:
                pane = self._pane(name)
                of = (pane.size, _told_by(shown, name))
                if _visible(pane) and self._drawn.get(name) != of:
                    self._drawn[name] = of
                    changed |= pane.show(drawn_safely(draw, shown, *pane.size))
            width = self.app.size.width
            for name, line in _LINES:
                changed |= self._pane(name).show((line(shown, width),))
            typing = self.app.typing
            keys = bottom(TYPING) if typing else bottom(KEYS, _keys_of(shown.look))
            changed |= self._pane("bottom").show((bottom_row(keys, width),))
            changed |= self._pane("needs").show(needs_rows(*self.app.size))
            heading = self.app.sheet.heading
            row = heading_row(self.app.document, heading.size.width, typing=typing, glyphs=shown.look.glyphs)
            changed |= heading.show((row,))
            if self.app.sheet.display:
                changed |= self.app.sheet.complain(self.app.error)
            if changed:
                self._pace.drawn()

    def _answers(self, shown: Shown) -> Shown:
        """Return what is shown with the answers that have arrived; ask for those that have not, the last ones stand in."""
        app, page, outcome = self.app, page_of(shown.look), shown.outcome
        asked: list[Inquiry] = []
        if page is not None and outcome is not None:
            inquiry = page.inquiry(shown.look, outcome, app.bench)
            if inquiry is not None:
                shown = self._with_answer(shown, page.name, inquiry, asked)
            if page.also is not None and shown.answer is not None and shown.answer.error is None:
                second = page.also(shown.answer.result, shown.look, outcome)
                if second is not None:
                    shown = replace(shown, also=self._known(second, asked))
        if outcome is not None and shown.pinned is not None:
            moved = self._known(Moved(shown.pinned), asked)
            shown = replace(shown, moved=moved.result if moved is not None and moved.error is None else None)
        if outcome is not None:
            shown = replace(shown, extra=self._extra(shown, outcome, asked))
            app.work.inquire(outcome, asked)
        return replace(shown, asking=app.work.asking, tuned=app.tuned_words())

    def _with_answer(self, shown: Shown, name: str, inquiry: Inquiry, asked: list[Inquiry]) -> Shown:
        """Return what is shown with the answer of the page called `name`."""
        found = self._known(inquiry, asked)
        if found is not None:
            self._last[name] = found
        last = self._last.get(name)
        return replace(shown, answer=last, fresh=last is not None and last.whole and last.inquiry == inquiry)

    def _known(self, inquiry: Inquiry, asked: list[Inquiry]) -> Answered | None:
        """Return the answer to an inquiry; None, and one more to be asked, where there is none or only a part."""
        found = self.app.found.get(inquiry)
        known = found if isinstance(found, Answered) else None
        if known is None or not known.whole:
            asked.append(inquiry)
        return known

    def _extra(self, shown: Shown, outcome: Outcome, asked: list[Inquiry]) -> Extra | None:
        """Return the column of choice."""
        slow = estimate_inquiry(shown, outcome)
        if slow is not None:
            estimate = estimate_of(shown, outcome, self.app.document.text, self._known(slow, asked))
            if estimate is not None and self.app.work.busy:
                return estimate
        inquiry = column_inquiry(shown, outcome)
        if inquiry is None:
            return None
        return column_of(shown, outcome, self._known(inquiry, asked))

    def forget(self) -> None:
        """Forget the answers of an earlier sheet."""
        self._last.clear()

    def _pane(self, name: str) -> CellPane:
        """Return the pane called `name`."""
        return self.app.screen_stack[0].query_one(f"#{name}", CellPane)

    def figure_size(self) -> Size:
        """Return the size of the figure."""
        return self._pane("figure").size

    def complete(self) -> Shown:
        """Return what is shown with the weights and moments that have arrived; ask for those that have not."""
        app, shown = self.app, self.app.shown
        look, outcome = shown.look, shown.outcome
        if outcome is not None and outcome.spectrum is not None and outcome.spectrum.levels:
            if look.state and look.state not in app.found:
                app.work.look(outcome, look.state)
            if look.moments and look.chosen not in app.found:
                app.work.look(outcome, look.chosen)
        shown = self._answers(replace(shown, bench=app.bench))
        weighed = app.found.get(look.state) if look.state else None
        moments = app.found.get(look.chosen)
        shown = replace(
            shown,
            name="" if app.sheet.display else app.document.name + (" unsaved" if app.document.changed else ""),
            weighed=weighed if isinstance(weighed, Weighed) else None,
            moments=moments if isinstance(moments, MomentsText) else None,
        )
        if app.error is None or app.sheet.display:
            return shown
        if outcome is None or outcome.spectrum is None:
            return replace(shown, error=(app.error, app.document.text))
        words = shown.message or sentence(app.error, app.document.text)
        return replace(shown, message=words, message_style=shown.message_style if shown.message else "warn")


def _keys_of(look: Look) -> tuple[str | tuple[str, str], ...]:
    """Return the ids of the keys that the bottom line names first."""
    page = page_of(look)
    return page.keys if page is not None else ()


def _told_by(shown: Shown, name: str) -> Shown:
    """Return what is shown without what the large pane called `name` says nothing of."""
    told = replace(shown, moments=None, message="", message_style="", stale=False, tuned="")
    if name == "figure":
        told = replace(told, extra=None)
    if name != "figure" or page_of(shown.look) is None:
        told = replace(told, answer=None, also=None, fresh=False, asking=False, bench=_BENCH)
    return told


def _visible(pane: CellPane) -> bool:
    """Return whether a pane has room on the screen."""
    return bool(pane.display and pane.size.width and pane.size.height)
