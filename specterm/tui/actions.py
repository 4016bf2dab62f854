"""What keys and commands do: one short method an action."""

from __future__ import annotations

from collections.abc import Awaitable, Callable
from dataclasses import replace
from typing import Any, ClassVar

from textual.binding import Binding
from textual.screen import ModalScreen

from specterm.errors import SpectermError, position, printable
from specterm.session.document import Document
from specterm.spectrum.result import Spectrum
from specterm.tui import help as help_text
from specterm.tui.dialogs import Chooser, Entry, Help
from specterm.tui.files import Files
from specterm.tui.keyboard import OrderedKeys
from specterm.tui.keys import ACTIONS, KEYS
from specterm.tui.look import Look
from specterm.tui.painter import Painter
from specterm.tui.rows import Shown, as_text
from specterm.tui.sheet_pane import SheetPane
from specterm.tui.work import Work


Answer = Callable[[Any], None] | Callable[[Any], Awaitable[None]]


class Keyed(OrderedKeys):
    """The part of the app that answers keys; the attributes are set by the app itself."""

    BINDINGS: ClassVar[list[Binding]] = [  # type: ignore[assignment]
        Binding(keys, action, f"{key.area}: {key.verb}", id=name, tooltip=key.tooltip, priority=True)
        for key in KEYS
        for keys, action, name in key.bound
    ]

    document: Document
    shown: Shown
    error: SpectermError | None
    work: Work
    files: Files
    painter: Painter

    @property
    def sheet(self) -> SheetPane:
        """The operator pane."""
        return self.screen_stack[0].query_one(SheetPane)

    def redraw(self) -> None:
        """Ask for what has changed to be drawn."""
        self.painter.ask()

    def say(self, words: str, style: str = "plain") -> None:
        """Put words on the message line; they go with the next key that changes what is shown."""
        self.shown = replace(self.shown, message=printable(words).replace("\n", " "), message_style=style)
        self.redraw()

    def compute(self) -> None:
        """Compute the text as it stands."""
        raise NotImplementedError("the app computes")

    def mark_stale(self) -> None:
        """Say of the levels shown that they are not those of the text, where that is so."""
        raise NotImplementedError("the app knows its text")

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
        """Weigh the next prepared state, or none."""
        states = self.shown.outcome.states if self.shown.outcome else ()
        self._look(self.shown.look.next_state(states))
        if not states:
            self.say("the sheet has no prepared state: add a line  state NAME = expression", "warn")

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """Keep the keys, which come before all others, out of dialogs, and plain letters out of texts."""
        free = len(self.screen_stack) == 1
        if action == "also":
            return free
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
        """Compute again."""
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
