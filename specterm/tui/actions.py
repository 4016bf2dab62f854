"""What keys and commands do: one short method an action."""

from __future__ import annotations

from dataclasses import replace
from typing import ClassVar

from textual.app import App
from textual.binding import Binding

from specterm.errors import SpectermError, position, printable
from specterm.session.document import Document
from specterm.spectrum.result import Spectrum
from specterm.tui import help as help_text
from specterm.tui.dialogs import Chooser, Entry, Help
from specterm.tui.files import Files
from specterm.tui.keys import KEYS
from specterm.tui.look import Look
from specterm.tui.painter import Painter
from specterm.tui.rows import Shown, as_text
from specterm.tui.sheet_pane import SheetPane
from specterm.tui.work import Work


class Keyed(App[int]):
    """The part of the app that answers keys; the attributes are set by the app itself."""

    BINDINGS: ClassVar[list[Binding]] = [  # type: ignore[assignment]
        Binding(
            key.keys, key.action, f"{key.area}: {key.verb}", id=key.id, tooltip=key.tooltip, priority=key.action == "edit"
        )
        for key in KEYS
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
        """Keep the key that starts typing, which comes before all others, out of texts and dialogs."""
        if action == "edit" and (len(self.screen_stack) > 1 or self.screen.focused is not None):
            return False
        return super().check_action(action, parameters)

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
        if not self.work.stop():
            self.say("nothing is running")

    def action_again(self) -> None:
        """Compute again."""
        self.compute()

    def action_commands(self) -> None:
        """Find an action by name and do it."""
        entries = [Entry(key.action, f"{key.area}: {key.verb}", f"{key.shown}   {key.tooltip}") for key in KEYS]

        def chosen(action: str | None) -> None:
            if action is not None:
                self.call_later(self.run_action, action)

        self.push_screen(Chooser("Commands", entries), chosen)

    def action_help(self) -> None:
        """List the keys as they are bound now."""
        bound = help_text.live(active.binding for active in self.active_bindings.values())
        self.push_screen(Help(lambda width: help_text.lines(bound, width)))

    def action_leave(self) -> None:
        """End the session; asks when there is unsaved text."""
        self.files.leave()

    async def action_quit(self) -> None:
        """End the session in the same way."""
        self.files.leave()

    def action_help_quit(self) -> None:
        """Answer ctrl+c with the way out."""
        self.say("q quits")
