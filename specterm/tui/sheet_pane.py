"""The operator pane: the sheet, edited in place, with the place of an error underlined and the reason below."""

from __future__ import annotations

from typing import ClassVar

from rich.style import Style
from rich.text import Text
from textual import events
from textual.app import ComposeResult
from textual.binding import Binding
from textual.containers import Vertical
from textual.message import Message
from textual.widgets import TextArea

from specterm.errors import Span, SpectermError, position
from specterm.tui.cell_pane import CellPane
from specterm.tui.complaint import complaint
from specterm.tui.keys import TYPING

_POINTED = Style(bold=True, reverse=True)
_MARKED = Style(underline=True, bold=True, color="red")


class SheetText(TextArea):
    """The text of the sheet; Tab leaves it."""

    BINDINGS: ClassVar[list[Binding]] = [  # type: ignore[assignment]
        Binding(key.keys, key.action, key.verb, id=key.id, tooltip=key.tooltip, priority=True)
        for key in TYPING
        if key.action == "done"
    ]

    class Left(Message):
        """The user is done typing."""

    def __init__(self, text: str) -> None:
        """Show the text without blinking, colours of its own or a border."""
        super().__init__(text, soft_wrap=True, tab_behavior="focus", show_line_numbers=True, highlight_cursor_line=False)
        self.cursor_blink = False
        self.compact = True
        self._marks: dict[int, tuple[int, int]] = {}
        self._pointed: dict[int, tuple[int, int]] = {}

    def action_done(self) -> None:
        """Leave the text at once, so that the next key is no text any more."""
        self.screen.set_focus(None)
        self.post_message(self.Left())

    def put(self, span: Span, text: str) -> None:
        """Replace the characters of `span`, as an edit that can be undone; the cursor stays."""
        here = self.cursor_location
        start, end = (self._location(place) for place in (span.start, span.end))
        self.history.checkpoint()
        self.replace(text, start, end, maintain_selection_offset=False)
        self.history.checkpoint()
        self.move_cursor(here)

    def point(self, span: Span | None) -> None:
        """Show the characters of `span` strong, and bring them into view."""
        self._pointed = marks_of(self.text, span)
        if span is not None:
            self.scroll_to(y=max(0, self._location(span.start)[0] - self.size.height // 2), animate=False)
        self._line_cache.clear()
        self.refresh()

    def _location(self, place: int) -> tuple[int, int]:
        """Return row and column, from 0, of a place in the text."""
        row, column = position(self.text, place)
        return row - 1, column - 1

    def mark(self, span: Span | None) -> None:
        """Underline the characters of `span`, or nothing."""
        marks = marks_of(self.text, span)
        if marks != self._marks:
            self._marks = marks
            self._line_cache.clear()
            self.refresh()

    def get_line(self, line_index: int) -> Text:
        """Return one line with the place of the error underlined."""
        line = super().get_line(line_index)
        pointed = self._pointed.get(line_index)
        if pointed is not None:
            line.stylize(_POINTED, *pointed)
        place = self._marks.get(line_index)
        if place is not None:
            line.stylize(_MARKED, *place)
        return line

    async def _on_paste(self, event: events.Paste) -> None:
        """Take pasted text without its control characters."""
        event.stop()
        event.prevent_default()
        text = event.text.replace("\r\n", "\n").replace("\r", "\n")
        await super()._on_paste(events.Paste("".join(c for c in text if c.isprintable() or c in "\n\t")))


def marks_of(text: str, span: Span | None) -> dict[int, tuple[int, int]]:
    """Return for every line the part of it that lies in `span`; an empty part at a line's end marks its last character."""
    if span is None:
        return {}
    found: dict[int, tuple[int, int]] = {}
    start = 0
    for number, line in enumerate(text.split("\n")):
        stop = start + len(line)
        if start <= span.end and span.start <= stop and (span.start < stop or not found):
            first = max(0, min(span.start - start, max(0, len(line) - 1)))
            found[number] = (first, max(first + 1, min(span.end - start, len(line))))
        start = stop + 1
        if start > span.end:
            break
    return found


class SheetPane(Vertical):
    """A heading, the text, and up to six lines for what is wrong with it."""

    DEFAULT_CSS = """
    SheetPane { width: 1fr; height: 1fr; }
    SheetPane SheetText { border: none; padding: 0; height: 1fr; background: ansi_default; scrollbar-size-vertical: 1; }
    SheetPane SheetText:focus { border: none; }
    SheetPane #error { height: 0; }
    """

    def __init__(self, text: str) -> None:
        """Hold the text."""
        super().__init__(id="sheet")
        self.text = SheetText(text)
        self.heading = CellPane("sheet-heading")
        self.error = CellPane("error")

    def compose(self) -> ComposeResult:
        """Put heading, text and error below each other."""
        yield self.heading
        yield self.text
        yield self.error

    def complain(self, error: SpectermError | None) -> bool:
        """Mark the place of an error and say what it is, or clear both; return whether that changes what is seen."""
        self.text.mark(error.span if error else None)
        rows = complaint(error, self.text.text, max(20, self.size.width)) if error else ()
        if len(rows) != len(self.error.rows):
            self.error.styles.height = len(rows)
        return self.error.show(rows)
