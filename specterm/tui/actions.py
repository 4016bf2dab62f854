"""What keys and commands do: one short method an action."""

from __future__ import annotations

import os
from collections.abc import Awaitable, Callable
from dataclasses import replace
from math import isfinite, nan
from pathlib import Path
from typing import Any, ClassVar

from textual.binding import Binding
from textual.screen import ModalScreen

from specterm.errors import SpectermError, position, printable
from specterm.session.document import Document
from specterm.spectrum.result import Spectrum
from specterm.tui import help as help_text
from specterm.tui.dialogs import Chooser, Entry, Help
from specterm.tui.files import Files
from specterm.tui.keeping import Keeping
from specterm.tui.keyboard import OrderedKeys
from specterm.tui.keys import ACTIONS, KEYS
from specterm.tui.look import Look
from specterm.tui.options import Options
from specterm.tui.painter import Painter
from specterm.tui.rows import Shown, as_text, details
from specterm.tui.sheet_pane import SheetPane
from specterm.tui.work import Work
from specterm.views.level_table import value_text
from specterm.views.numbers import short

Answer = Callable[[Any], None] | Callable[[Any], Awaitable[None]]


class Keyed(OrderedKeys):
    """The part of the app that answers keys; the attributes are set by the app itself."""

    BINDINGS: ClassVar[list[Binding]] = [  # type: ignore[assignment]
        Binding(keys, action, f"{key.area}: {key.verb}", id=name, tooltip=key.tooltip, priority=True)
        for key in KEYS
        for keys, action, name in key.bound
    ]

    document: Document
    options: Options
    shown: Shown
    error: SpectermError | None
    work: Work
    files: Files
    painter: Painter
    keeping: Keeping
    folder: Path

    @property
    def sheet(self) -> SheetPane:
        """The operator pane."""
        return self.screen_stack[0].query_one(SheetPane)

    def redraw(self) -> None:
        """Ask for what has changed to be drawn, and saved."""
        self.painter.ask()
        self.keeping.soon()

    def say(self, words: str, style: str = "plain") -> None:
        """Put words on the message line; they go with the next key that changes what is shown."""
        self.shown = replace(self.shown, message=printable(words).replace("\n", " "), message_style=style)
        self.redraw()

    def compute(self) -> None:
        """Compute the text as it stands."""
        raise NotImplementedError("the app computes")

    def take_typed(self) -> None:
        """Take the text of the pane into the document."""
        raise NotImplementedError("the app knows its document")

    def take_text(self, text: str) -> None:
        """Replace the text, as an edit that can be undone."""
        raise NotImplementedError("the app knows its text")

    def mark_stale(self) -> None:
        """Say of the levels shown that they are not those of the text, where that is so."""
        raise NotImplementedError("the app knows its text")

    @property
    def typing(self) -> bool:
        """Whether the keys go into the sheet."""
        raise NotImplementedError("the app knows where the keys go")

    def place(self, *, typing: bool) -> None:
        """Show what the keys act on."""
        raise NotImplementedError("the app places its panes")

    def _look(self, look: Look) -> None:
        """Show something else of the same spectrum."""
        self.shown = replace(self.shown, look=look, message="")
        self.redraw()

    def action_step(self, steps: int) -> None:
        """Choose a level further up or down."""
        self._look(self.shown.look.stepped(steps, self._spectrum()))

    def action_end(self, direction: int) -> None:
        """Choose the highest or the lowest level."""
        self._look(self.shown.look.stepped(direction * 10**6, self._spectrum()))

    def _spectrum(self) -> Spectrum | None:
        """Return the spectrum shown."""
        return self.shown.outcome.spectrum if self.shown.outcome else None

    def action_count(self, direction: int) -> None:
        """Compute more or fewer levels."""
        self._look(self.shown.look.counted(direction, self._spectrum()))
        self.say(f"{self.shown.look.count} levels asked for")
        self.compute()

    def action_view(self) -> None:
        """Show the next view."""
        self._look(self.shown.look.next_view())

    def action_glyphs(self) -> None:
        """Use the next set of glyphs."""
        self._look(self.shown.look.next_glyphs())
        self.say(f"glyphs: {self.shown.look.glyphs}")

    def action_moments(self) -> None:
        """Show or hide expectations and spreads."""
        self._look(replace(self.shown.look, moments=not self.shown.look.moments))

    def action_weigh(self) -> None:
        """Weigh the next prepared state, the chosen level, or none."""
        states = self.shown.outcome.states if self.shown.outcome else ()
        self._look(self.shown.look.next_state(states, self._spectrum()))
        if not states:
            self.say("the sheet has no prepared state: add a line  state NAME = expression", "warn")

    def action_weigh_any(self) -> None:
        """Choose the state to weigh from a list of the prepared ones and the levels."""
        spectrum = self._spectrum()
        states = self.shown.outcome.states if self.shown.outcome else ()
        entries = [Entry(name, name, "a state of the sheet") for name in states]
        names = {f"level({level.index})": value_text(level) for level in (spectrum.levels if spectrum else ())}
        entries += [Entry(name, name, remark) for name, remark in names.items()]

        def chosen(name: str | None) -> None:
            if name is not None:
                self._look(replace(self.shown.look, state=name or None))

        self.ask(Chooser("Weights of", [*entries, Entry("", "none", "no weights")]), chosen)

    def action_near(self) -> None:
        """Ask for an energy and find the levels nearest to it."""
        now = self.options.near
        unit = self.shown.outcome.units.energy if self.shown.outcome else ""
        words = "Levels near the energy" + (f" ({unit})" if unit else "") + "; nothing: the lowest"

        def typed(near: float | None) -> None:
            self.options = replace(self.options, near=near)

        self._ask_number(words, "" if now is None else short(now, 12), typed, lambda number: number is None or isfinite(number))

    def action_tolerance(self) -> None:
        """Ask for another tolerance."""

        def typed(tolerance: float | None) -> None:
            self.options = replace(self.options, tolerance=tolerance or Options().tolerance)

        words = "Error wanted, as a share of the level; nothing: 1e-8"
        self._ask_number(words, short(self.options.tolerance), typed, lambda number: number is None or 0 < number < 1)

    def _ask_number(
        self, words: str, start: str, then: Callable[[float | None], None], fits: Callable[[float | None], bool]
    ) -> None:
        """Ask for a number, or nothing; `then` takes it and the levels are computed again."""

        def answered(answer: str | None) -> None:
            if answer is None:
                return
            try:
                number = float(answer) if answer else None
            except ValueError:
                number = nan
            if fits(number):
                then(number)
                self.compute()
            else:
                self.say(f"{answer!r} does not do here: nothing is changed", "warn")

        self.ask(Chooser(words, (), free=True, text=start), answered)

    def action_details(self) -> None:
        """Show the lines under the panes in full."""
        shown = self.painter.complete()
        self.ask(Help(lambda width: details(shown, self.document, width)))

    def action_suspend(self) -> None:
        """Go back to the shell; where there is none, nothing could bring the screen back, so it stays."""
        if os.getpgrp() == os.getsid(0):
            self.say("there is no shell to go back to", "warn")
            return
        self.keeping.now()
        self.painter.quiet(self.action_suspend_process)

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """Keep the keys, which come before all others, out of dialogs, and plain letters out of texts."""
        free = len(self.screen_stack) == 1
        if action == "also":
            return free and (parameters != ("suspend",) or self.screen.focused is None)
        if action in ACTIONS and not (free and self.screen.focused is None):
            return False
        return super().check_action(action, parameters)

    def action_also(self, action: str) -> None:
        """Do what a control key is for, while typing too."""
        getattr(self, f"action_{action}")()

    def ask(self, dialog: ModalScreen[Any], then: Answer | None = None) -> None:
        """Open a dialog; what is typed from now on is for it. `then` takes the answer."""
        self.push_screen(dialog, then)
        self.await_rest(dialog)

    def action_edit(self) -> None:
        """Type in the sheet, from the very next key on; an error is gone to."""
        self.place(typing=True)
        self.screen_stack[0].set_focus(self.sheet.text)
        if self.error is not None and self.error.span is not None:
            row, column = position(self.document.text, self.error.span.start)
            self.sheet.text.move_cursor((row - 1, column - 1))
        self.redraw()

    def action_copy(self) -> None:
        """Write all that the screen shows as text to a file, and send it to the terminal's clipboard."""
        self.files.copy(as_text(self.painter.complete(), *self.painter.figure_size()))

    def action_undo(self) -> None:
        """Take back the last edit."""
        self.sheet.text.undo()

    def action_save(self) -> None:
        """Write the sheet to its file."""
        self.files.save()

    def action_save_as(self) -> None:
        """Write the sheet to another file."""
        self.files.save_as()

    def action_open(self) -> None:
        """Open another sheet."""
        self.files.open()

    def action_preset(self) -> None:
        """Start from a preset."""
        self.files.preset()

    def action_stop(self) -> None:
        """Stop the computation that is running."""
        stopped = self.work.stop()
        self.mark_stale()
        self.say("stopped; r computes again" if stopped else "nothing is running", "warn" if stopped else "plain")

    def action_again(self) -> None:
        """Compute again; what was stopped goes on."""
        self.work.retry()
        self.compute()

    def action_commands(self) -> None:
        """Find an action by name and do it."""
        entries = [Entry(key.action, f"{key.area}: {key.verb}", f"{key.shown}   {key.tooltip}") for key in KEYS]

        async def chosen(action: str | None) -> None:
            if action is not None:
                await self.run_action(action)

        self.ask(Chooser("Commands", entries), chosen)

    def action_help(self) -> None:
        """List the keys as they are bound now."""
        bound = help_text.live(active.binding for active in self.active_bindings.values())
        self.ask(Help(lambda width: help_text.lines(bound, width)))

    def action_leave(self) -> None:
        """End the session; asks when there is unsaved text."""
        self.files.leave()

    async def action_quit(self) -> None:
        """End the session in the same way; a dialog is answered first."""
        if len(self.screen_stack) == 1:
            self.files.leave()

    def action_help_quit(self) -> None:
        """Answer ctrl+c with the way out."""
        self.say("q quits")
