"""The screen: panes, what keys do, what messages bring. No physics in here."""

from __future__ import annotations

import gc
import os
import traceback
from dataclasses import replace
from pathlib import Path
from typing import ClassVar

from textual import events
from textual.app import App, ComposeResult
from textual.binding import Binding
from textual.containers import Container
from textual.timer import Timer
from textual.widgets import TextArea

from specterm.errors import SpectermError, WorkStopped, position, printable
from specterm.session import rescue
from specterm.session.document import Document
from specterm.spectrum.result import Spectrum
from specterm.tui import help as help_text
from specterm.tui.cell_pane import CellPane
from specterm.tui.dialogs import Chooser, Entry, Help
from specterm.tui.files import Files
from specterm.tui.keys import KEYS, TYPING, bottom
from specterm.tui.look import Look, usual_glyphs
from specterm.tui.options import Options
from specterm.tui.rows import (
    WIDE,
    Shown,
    as_text,
    bottom_row,
    chosen_row,
    drawn_safely,
    figure_rows,
    heading_row,
    level_rows,
    message_row,
    trusted_row,
)
from specterm.tui.sheet_pane import SheetPane, SheetText
from specterm.tui.solving import BuiltIn, Engine, Request, Weighed
from specterm.tui.watch import watch_signals
from specterm.tui.work import Looked, Progressed, Solved, Work
from specterm.views.status import MomentsText

_PAUSE = 0.3


class Specterm(App[int]):
    """One sheet and its spectrum."""

    ENABLE_COMMAND_PALETTE = False
    AUTO_FOCUS = None
    TITLE = "specterm"
    CSS_PATH = None
    CSS = """
    Screen { layers: base; background: ansi_default; }
    #main { height: 1fr; width: 100%; }
    .wide #main { layout: grid; grid-size: 2 2; grid-columns: 2fr 3fr; grid-rows: 1fr 1fr; grid-gutter: 0 1; }
    .wide #figure { row-span: 2; }
    .narrow #main { layout: horizontal; }
    .narrow #levels { dock: left; width: 36; max-width: 50%; margin-right: 1; }
    .narrow #sheet { display: none; }
    .narrow.typing #sheet { display: block; }
    .narrow.typing #figure { display: none; }
    #figure, #levels { height: 1fr; width: 1fr; }
    """
    BINDINGS: ClassVar[list[Binding]] = [  # type: ignore[assignment]
        Binding(key.keys, key.action, f"{key.area}: {key.verb}", id=key.id, tooltip=key.tooltip) for key in KEYS
    ]

    def __init__(self, document: Document, options: Options, engine: Engine) -> None:
        """Show `document`, computed by `engine`."""
        super().__init__()
        self.document, self.options, self.engine = document, options, engine
        self.folder = options.folder or document.folder
        self.shown = Shown(Look(glyphs=options.glyphs or usual_glyphs(), count=options.count))
        self.work = Work(self, engine)
        self.files = Files(self)
        self.error: SpectermError | None = None
        self.found: dict[int | str, MomentsText | Weighed | None] = {}
        self._pause: Timer | None = None
        self.last_words = ""
        self._drawing = False
        self._drawn: dict[str, tuple[object, ...]] = {}

    def compose(self) -> ComposeResult:
        """Put the panes in their order; the style sheet places them."""
        with Container(id="main"):
            yield SheetPane(self.document.text)
            yield CellPane("figure")
            yield CellPane("levels")
        yield CellPane("message")
        yield CellPane("chosen")
        yield CellPane("trust")
        yield CellPane("bottom")

    @property
    def sheet(self) -> SheetPane:
        """The operator pane."""
        return self.screen_stack[0].query_one(SheetPane)

    @property
    def typing(self) -> bool:
        """Whether the keys go into the sheet."""
        return isinstance(self.screen_stack[0].focused, SheetText)

    def on_mount(self) -> None:
        """Arrange for the size, start the first computation, watch for the end of the connection."""
        self._arrange()
        watch_signals(self, self.options.guarded)
        self._solve()
        self.redraw()
        self.files.offer_rescued()

    def on_resize(self, _: events.Resize) -> None:
        """Arrange for the new size."""
        self._arrange()
        self.redraw()

    def _arrange(self) -> None:
        """Choose between sheet beside the figure and sheet over it."""
        base = self.screen_stack[0]
        base.set_class(self.size.width >= WIDE, "wide")
        base.set_class(self.size.width < WIDE, "narrow")
        base.set_class(self.typing, "typing")

    # What is drawn

    def redraw(self) -> None:
        """Ask for the panes to be drawn once for all keys and messages waiting; the place where drawing can be paced."""
        if not self._drawing:
            self._drawing = True
            self.call_after_refresh(self._draw)

    def _draw(self) -> None:
        """Draw every pane from what is shown now."""
        self._drawing = False
        if not self.is_running or not self.screen_stack:
            return
        base, shown = self.screen_stack[0], self._complete()
        with self.batch_update():
            for name, draw in (("figure", figure_rows), ("levels", level_rows)):
                pane = base.query_one(f"#{name}", CellPane)
                of = (shown.look, shown.outcome, shown.weighed, pane.size)
                if pane.size.width and pane.size.height and pane.display and self._drawn.get(name) != of:
                    self._drawn[name] = of
                    pane.show(drawn_safely(draw, shown, *pane.size))
            width = self.size.width
            lines = (("message", message_row), ("chosen", chosen_row), ("trust", trusted_row))
            for name, line in lines:
                base.query_one(f"#{name}", CellPane).show((line(shown, width),))
            keys = bottom(TYPING if self.typing else KEYS)
            base.query_one("#bottom", CellPane).show((bottom_row(keys, width),))
            heading = self.sheet.heading
            heading.show((heading_row(self.document, heading.size.width, typing=self.typing, glyphs=shown.look.glyphs),))

    def _complete(self) -> Shown:
        """Return what is shown with the weights and moments that have arrived; ask for those that have not."""
        look, outcome = self.shown.look, self.shown.outcome
        weighed = self.found.get(look.state) if look.state else None
        moments = self.found.get(look.chosen)
        if outcome is not None and outcome.spectrum is not None and outcome.spectrum.levels:
            if look.state and look.state not in self.found:
                self.work.look(outcome, look.state)
            if look.moments and look.chosen not in self.found:
                self.work.look(outcome, look.chosen)
        shown = replace(
            self.shown,
            weighed=weighed if isinstance(weighed, Weighed) else None,
            moments=moments if isinstance(moments, MomentsText) else None,
        )
        if self.error is not None and not shown.message and not self.sheet.display:
            return replace(shown, message=_sentence(self.error, self.document.text), message_style="warn")
        return shown

    def say(self, words: str, style: str = "plain") -> None:
        """Put words on the message line; they go with the next key that changes what is shown."""
        self.shown = replace(self.shown, message=printable(words).replace("\n", " "), message_style=style)
        self.redraw()

    def _look(self, look: Look) -> None:
        """Show something else of the same spectrum."""
        self.shown = replace(self.shown, look=look, message="")
        self.redraw()

    # What the text brings

    def on_text_area_changed(self, _: TextArea.Changed) -> None:
        """Compute the text typed when the typing pauses."""
        self.take_typed()

    def take_typed(self) -> None:
        """Take the text of the pane into the document; its messages may be on their way still."""
        text = self.sheet.text.text
        if text == self.document.text:
            return
        self.document = self.document.edited(text)
        if self._pause is not None:
            self._pause.stop()
        self._pause = self.set_timer(_PAUSE, self._solve)
        self.redraw()

    def _solve(self) -> None:
        """Compute the text as it stands."""
        if self._pause is not None:
            self._pause.stop()
            self._pause = None
        options = self.options
        request = Request(
            0, self.document.text, self.folder, self.shown.look.count, options.near, options.tolerance, options.overrides
        )
        self.work.solve(request, self.document)

    def on_solved(self, event: Solved) -> None:
        """Show the outcome of the newest request."""
        outcome = event.outcome
        if not self.work.finished(outcome.request.number):
            return
        if isinstance(outcome.error, WorkStopped):
            self.say("stopped; r computes again", "warn")
            return
        self.error = outcome.error
        if outcome.origin is None and outcome.error is not None:
            self.shown = replace(self.shown, stale=True)
        else:
            self.found = {}
            look = self.shown.look.fitted(outcome.spectrum, outcome.states)
            self.shown = replace(self.shown, outcome=outcome, stale=False, look=look)
        self.sheet.complain(outcome.error)
        self.say("" if outcome.error else "; ".join(outcome.notes))
        self.call_after_refresh(_settle_memory)

    def on_progressed(self, event: Progressed) -> None:
        """Say how far a long computation is."""
        if self.work.busy and event.number == self.work.number:
            self.say(f"{event.words}; x stops it", "dim")

    def on_looked(self, event: Looked) -> None:
        """Take moments or weights that have arrived for the spectrum shown."""
        outcome = self.shown.outcome
        if outcome is None or outcome.request.number != event.number:
            return
        self.found[event.key] = event.found
        if isinstance(event.found, Weighed) and event.found.error is not None and event.key == self.shown.look.state:
            self.say(event.found.error.message, "warn")
        self.redraw()

    def on_sheet_text_left(self, _: SheetText.Left) -> None:
        """Come back from typing."""
        self._arrange()
        self.redraw()

    # The document

    def adopt(self, document: Document) -> None:
        """Take over a document with the same text, saved under whatever name."""
        if document.path is not None and document.path != self.document.path:
            self.folder = document.folder
        self.document = document
        self.redraw()

    def replace_document(self, document: Document, folder: Path | None = None) -> None:
        """Show another document."""
        self.document = document
        self.folder = folder or document.folder
        self.sheet.text.load_text(document.text)
        self.shown = replace(self.shown, look=replace(self.shown.look, chosen=0, count=None), message="")
        self._solve()
        self.files.offer_rescued()

    def take_text(self, text: str) -> None:
        """Replace the text, as an edit that can be undone."""
        area = self.sheet.text
        area.replace(text, area.document.start, area.document.end)

    # What keys do

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
        self._solve()

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

    def action_edit(self) -> None:
        """Type in the sheet; an error is gone to."""
        self.screen_stack[0].add_class("typing")
        self.sheet.text.focus()
        if self.error is not None and self.error.span is not None:
            row, column = position(self.document.text, self.error.span.start)
            self.sheet.text.move_cursor((row - 1, column - 1))
        self.redraw()

    def on_descendant_focus(self) -> None:
        """Arrange anew when typing starts."""
        self._arrange()
        self.redraw()

    def action_copy(self) -> None:
        """Write all that the screen shows as text to a file, and send it to the terminal's clipboard."""
        self.files.copy(as_text(self._complete(), *self.screen_stack[0].query_one("#figure").size))

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
        self._solve()

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

    def _fatal_error(self) -> None:
        """Leave after a defect of the screen itself: the text is kept, the details go to the log, the user gets plain words."""
        if not self.options.guarded:
            super()._fatal_error()
            return
        os.write(2, traceback.format_exc().encode("utf-8", "replace"))
        kept = rescue.keep(self.document)
        self.last_words = f"specterm failed; details are in {rescue.folder() / 'log'}"
        if kept is not None:
            self.last_words += f"\nunsaved text is kept in {kept} and offered when the sheet is opened again"
        self._close_messages_no_wait()

    def action_help_quit(self) -> None:
        """Answer ctrl+c with the way out."""
        self.say("q quits")


def _sentence(error: SpectermError | None, text: str) -> str:
    """Return an error in one line, "" for none."""
    if error is None:
        return ""
    where = ""
    if error.span is not None:
        row, column = position(text, error.span.start)
        where = f"line {row}, column {column}: "
    return f"{where}{error.message}" + (f"; {error.mend}" if error.mend else "")


def _settle_memory() -> None:
    """Keep the collector away from what lives as long as the session; it is what makes single keys slow."""
    if gc.get_threshold()[0] != 50_000:
        gc.collect()
        gc.freeze()
        gc.set_threshold(50_000, 20, 100)


def make_app(text: str, path: Path | None = None, options: Options | None = None, engine: Engine | None = None) -> Specterm:
    """Return the app for a sheet; `path` is its file, or None; nothing is started."""
    return Specterm(Document(text, path, text), options or Options(), engine or BuiltIn())
