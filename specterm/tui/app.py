"""The screen: panes, what keys do, what messages bring. No physics in here."""

from __future__ import annotations

import gc
import os
import traceback
from collections.abc import Hashable
from dataclasses import replace
from pathlib import Path
from time import monotonic

from rich.console import RenderableType
from textual import events
from textual.app import ComposeResult
from textual.containers import Container
from textual.timer import Timer
from textual.widgets import TextArea

from specterm.session import presets
from specterm.session.document import Document
from specterm.session.place import folder as state_folder
from specterm.tui.cell_pane import CellPane
from specterm.tui.choices import Choices
from specterm.tui.files import Files
from specterm.tui.keeping import Keeping
from specterm.tui.layout import BESIDE, CSS, LOW, SMALLEST, WIDE
from specterm.tui.look import Look, usual_glyphs
from specterm.tui.options import Options
from specterm.tui.pages import NAMES
from specterm.tui.pages.page import Answered, Bench
from specterm.tui.painter import Painter
from specterm.tui.pinned import Pinned
from specterm.tui.rows import Shown
from specterm.tui.sheet_pane import SheetPane, SheetText
from specterm.tui.solving import BuiltIn, Engine, Outcome, Request, Weighed
from specterm.tui.tuned import Tuned
from specterm.tui.watch import watch_signals
from specterm.tui.work import Looked, Progressed, Solved, Work
from specterm.views.status import MomentsText

_PAUSE = 0.3
_LINES = 4


class Specterm(Tuned):
    """One sheet and its spectrum."""

    ENABLE_COMMAND_PALETTE = False
    AUTO_FOCUS = None
    TITLE = "specterm"
    CSS_PATH = None
    CSS = CSS

    def __init__(self, document: Document, options: Options, engine: Engine) -> None:
        """Show `document`, computed by `engine`."""
        super().__init__()
        self.document, self.options, self.engine = document, options, engine
        self.folder = options.folder or document.folder
        self.shown = Shown(Look(glyphs=options.glyphs or usual_glyphs(), count=options.count))
        self.work = Work(self, engine)
        self.files = Files(self)
        self.painter = Painter(self)
        self.keeping = Keeping(self)
        self.error = None
        self.found: dict[Hashable, MomentsText | Weighed | Answered | None] = {}
        self.bench = Bench()
        self.pins: tuple[Pinned, ...] = ()
        self._pause: Timer | None = None
        self._table = 0
        self._near: float | None = None
        self.last_words = ""

    def compose(self) -> ComposeResult:
        """Put the panes in their order; the style sheet places them."""
        with Container(id="main"):
            yield SheetPane(self.document.text)
            yield CellPane("figure")
            yield CellPane("levels")
        yield CellPane("message")
        yield CellPane("chosen")
        yield CellPane("moments")
        yield CellPane("trust")
        yield CellPane("bottom")
        yield CellPane("needs")

    @property
    def typing(self) -> bool:
        """Whether the keys go into the sheet."""
        return isinstance(self.screen_stack[0].focused, SheetText)

    def on_mount(self) -> None:
        """Arrange for the size, start the first computation, watch for the end of the connection."""
        self._arrange()
        watch_signals(self, self.options.guarded)
        self.app_resume_signal.subscribe(self, lambda _: self.refresh(layout=True))
        self.compute()
        self.redraw()
        self.keeping.offer()
        if not self.document.text and self.document.path is None and len(self.screen_stack) == 1:
            self.files.preset("Start from a preset, or Tab for an empty sheet")

    def on_resize(self, _: events.Resize) -> None:
        """Arrange for the new size, which the app has once this event has been dealt with."""
        self.call_later(self._resized)

    def _resized(self) -> None:
        """Arrange and draw for the new size."""
        self._arrange()
        self.redraw()

    def on_cell_pane_resized(self) -> None:
        """Draw for the new size of a pane."""
        self.redraw()

    def _arrange(self) -> None:
        """Choose between sheet beside the figure and sheet over it."""
        base = self.screen_stack[0]
        if self.shown.outcome is not None:
            self._share(self.shown.outcome)
        base.set_class(self.size.width >= WIDE, "wide")
        base.set_class(self.size.width < WIDE, "narrow")
        base.set_class(self.size.width < SMALLEST[0] or self.size.height < SMALLEST[1], "tiny")
        base.set_class(self.size.width < BESIDE and self.size.height >= LOW, "apart")
        self.place(typing=self.typing)

    def place(self, *, typing: bool) -> None:
        """Show sheet and figure side by side in a wide screen, else the one that is wanted."""
        wide = self.size.width >= WIDE
        self.sheet.display = wide or typing
        self.screen_stack[0].query_one("#figure").display = wide or not typing
        self.screen_stack[0].query_one("#levels").display = wide or self.shown.look.page == NAMES[0]

    def on_descendant_focus(self) -> None:
        """Arrange anew when typing starts."""
        self._arrange()
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
        self.keeping.noted(self.document.text, monotonic())
        self.document = self.document.edited(text)
        if self._pause is not None:
            self._pause.stop()
        self._pause = self.set_timer(_PAUSE, self.compute)
        self.redraw()

    def compute(self) -> None:
        """Compute the text as it stands."""
        if self._pause is not None:
            self._pause.stop()
            self._pause = None
        options = self.options
        request = Request(
            0, self.document.text, self.folder, self.shown.look.count, options.near, options.tolerance, options.overrides
        )
        self.work.solve(request)

    def on_solved(self, event: Solved) -> None:
        """Show the outcome of the newest request."""
        outcome = event.outcome
        if not self.work.finished(outcome.request.number):
            return
        self.error = outcome.error
        if outcome.origin is None and outcome.error is not None:
            self.shown = replace(self.shown, stale=True)
        else:
            self.found = {}
            self.bench = replace(self.bench, waves={})
            look = self.shown.look.fitted(outcome.spectrum, outcome.states)
            if outcome.request.near is not None and outcome.request.near != self._near:
                look = look.nearest(outcome.request.near, outcome.spectrum)
            self._near = outcome.request.near
            self.shown = replace(self.shown, outcome=outcome, stale=False, look=look)
        if outcome.error or outcome.notes or self.shown.message_style != "good":
            self.say("" if outcome.error else "; ".join(outcome.notes))
        self.redraw()
        self._share(outcome)
        self.call_later(_settle_memory)

    def on_progressed(self, event: Progressed) -> None:
        """Say how far a long computation is."""
        if self.work.busy and event.number == self.work.number:
            self.mark_stale()
            self.say(f"{event.words}; x stops it", "dim")

    def _share(self, outcome: Outcome) -> None:
        """Give the table the rows it needs, at most half of the height, and the sheet the rest."""
        count = len(outcome.spectrum.levels) + 1 if outcome.spectrum and outcome.spectrum.levels else 8
        table = min(max(count, 8), (self.size.height - _LINES) // 2)
        if self.size.width >= WIDE and table != self._table:
            self._table = table
            self.screen_stack[0].query_one("#main").styles.grid_rows = f"1fr {table}"

    def mark_stale(self) -> None:
        """Say of the levels shown that they are not those of the text, where that is so."""
        outcome = self.shown.outcome
        if outcome is not None and outcome.request.text != self.document.text:
            self.shown = replace(self.shown, stale=True)

    def on_looked(self, event: Looked) -> None:
        """Take moments or weights that have arrived for the spectrum shown."""
        outcome = self.shown.outcome
        if outcome is None or outcome.request.number != event.number:
            return
        self.found[event.key] = event.found
        if isinstance(event.found, Answered):
            self.redraw()
            self.on_answer()
            return
        if event.key == self.shown.look.chosen:
            self._look_ahead(outcome)
        if isinstance(event.found, Weighed) and event.found.error is not None and event.key == self.shown.look.state:
            self.say(event.found.error.message, "warn")
        if event.key in (self.shown.look.chosen, self.shown.look.state):
            self.redraw()

    def _look_ahead(self, outcome: Outcome) -> None:
        """Find the moments of the levels a step away before they are asked for."""
        count = len(outcome.spectrum.levels) if outcome.spectrum else 0
        for place in (self.shown.look.chosen - 1, self.shown.look.chosen + 1):
            if 0 <= place < count and place not in self.found:
                self.work.look(outcome, place)

    def on_sheet_text_left(self, _: SheetText.Left) -> None:
        """Come back from typing."""
        self._arrange()
        self.redraw()

    # The terminal

    def post_display_hook(self) -> None:
        """Take note that a frame has been sent."""
        self.painter.displayed()

    def on_cursor_position(self) -> None:
        """Take the terminal's word that a frame has arrived."""
        self.painter.answered()

    def exit(self, result: int | None = None, return_code: int = 0, message: RenderableType | None = None) -> None:
        """Leave, once the terminal has answered what it was asked."""
        leave = super().exit
        self.painter.quiet(lambda: leave(result, return_code, message))

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
        self.shown = replace(self.shown, look=replace(self.shown.look, chosen=0, count=None, choices=Choices()), message="")
        self.painter.forget()
        self.options = replace(self.options, near=None)
        self.compute()
        self.keeping.offer()

    def take_text(self, text: str) -> None:
        """Replace the text, as an edit that can be undone."""
        area = self.sheet.text
        area.replace(text, area.document.start, area.document.end)

    def _fatal_error(self) -> None:
        """Leave after a defect of the screen itself: the text is kept, the details go to the log, the user gets plain words."""
        if not self.options.guarded:
            super()._fatal_error()
            return
        os.write(2, traceback.format_exc().encode("utf-8", "replace"))
        kept = self.keeping.now() and self.document.changed
        self.last_words = f"specterm failed; details are in {state_folder() / 'log'}"
        if kept:
            self.last_words += f"\nunsaved text is kept in {self.keeping.store.file} and offered when the sheet is opened again"
        self._close_messages_no_wait()


def _settle_memory() -> None:
    """Keep the collector away from what lives as long as the session; it is what makes single keys slow."""
    if gc.get_threshold()[0] != 50_000:
        gc.collect()
        gc.freeze()
        gc.set_threshold(50_000, 20, 100)


def make_app(text: str, path: Path | None = None, options: Options | None = None, engine: Engine | None = None) -> Specterm:
    """Return the app for a sheet; `path` is its file, or None; nothing is started."""
    options = options or Options()
    title = "untitled" if path or options.folder is None else presets.titled(text, options.folder)
    return Specterm(Document(text, path, text, title), options, engine or BuiltIn())
