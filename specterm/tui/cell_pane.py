"""A pane of rows of cells, drawn line by line without layout: the cheapest way onto the screen."""

from __future__ import annotations

from typing import ClassVar

from rich.segment import Segment
from rich.style import Style
from textual.strip import Strip
from textual.widget import Widget

from specterm.views.cells import Rows, row_width

LOOKS: dict[str, Style] = {
    "plain": Style(),
    "title": Style(bold=True),
    "axis": Style(dim=True),
    "potential": Style(),
    "chosen": Style(bold=True, color="cyan"),
    "forbidden": Style(color="cyan"),
    "other": Style(color="blue"),
    "threshold": Style(color="yellow"),
    "wall": Style(),
    "weight": Style(color="magenta"),
    "dim": Style(dim=True),
    "good": Style(),
    "warn": Style(bold=True, color="red"),
    "key": Style(bold=True),
    "bar": Style(reverse=True),
}
"""What each style of cell looks like, in the terminal's own sixteen colours."""


class CellPane(Widget):
    """Shows rows of cells; `show` replaces them and asks for a repaint, never for a new layout."""

    can_focus = False
    DEFAULT_CSS: ClassVar[str] = "CellPane { height: 1; width: 1fr; }"

    def __init__(self, name: str | None = None) -> None:
        """Start with nothing; `name` is the pane's id."""
        super().__init__(id=name)
        self._rows: Rows = ()

    @property
    def rows(self) -> Rows:
        """The rows shown."""
        return self._rows

    def show(self, rows: Rows) -> None:
        """Show other rows; nothing happens when they are the same."""
        if rows != self._rows:
            self._rows = rows
            self.refresh()

    def render_line(self, y: int) -> Strip:
        """Return one line for the screen."""
        if y >= len(self._rows):
            return Strip.blank(self.size.width, self.rich_style)
        row = self._rows[y]
        strip = Strip([Segment(text, LOOKS[style]) for text, style in row], row_width(row))
        return strip.adjust_cell_length(self.size.width)
