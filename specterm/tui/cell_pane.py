"""A pane of rows of cells, drawn line by line without layout: the cheapest way onto the screen."""

from __future__ import annotations

import itertools
from typing import ClassVar

from rich.segment import Segment
from rich.style import Style
from textual.geometry import Region
from textual.message import Message
from textual.strip import Strip
from textual.widget import Widget

from specterm.views.cells import Row, Rows, plainly_narrow, row_width, width_of

LOOKS: dict[str, Style] = {
    "plain": Style(),
    "title": Style(bold=True),
    "axis": Style(dim=True),
    "potential": Style(),
    "chosen": Style(bold=True, color="magenta"),
    "forbidden": Style(color="magenta"),
    "other": Style(dim=True),
    "threshold": Style(),
    "wall": Style(),
    "weight": Style(color="red"),
    "dim": Style(dim=True),
    "pinned": Style(color="red", dim=True),
    "good": Style(),
    "warn": Style(bold=True, color="red"),
    "key": Style(bold=True),
    "bar": Style(reverse=True),
}
"""What each style of cell looks like, in the terminal's own sixteen colours.

Magenta and red are the two that stand out from black and from white; no meaning rests on them alone.
"""


def changed_columns(before: Row, after: Row) -> tuple[int, int] | None:
    """Return the first column that differs between two rows and how many from there on may; None when they are the same."""
    if before == after:
        return None
    if row_width(before) != row_width(after):
        return 0, max(row_width(before), row_width(after))
    same = sum(1 for _ in itertools.takewhile(lambda pair: pair[0] == pair[1], zip(before, after, strict=False)))
    start = row_width(after[:same])
    pairs = zip(_cells(before[same:]), _cells(after[same:]), strict=True)
    differing = [place for place, (old, new) in enumerate(pairs, start) if old != new]
    if not differing:
        return 0, row_width(before)
    return differing[0], differing[-1] - differing[0] + 1


def _cells(row: Row) -> list[tuple[str, str]]:
    """Return the row cell by cell, a wide character over two cells."""
    cells: list[tuple[str, str]] = []
    for text, style in row:
        wide = text if plainly_narrow(text) else [character for character in text for _ in range(width_of(character))]
        cells.extend(zip(wide, itertools.repeat(style)))
    return cells


class CellPane(Widget):
    """Shows rows of cells; `show` replaces them and asks for a repaint, never for a new layout."""

    can_focus = False
    DEFAULT_CSS: ClassVar[str] = "CellPane { height: 1; width: 1fr; }"

    class Resized(Message):
        """The pane has another size than what it shows was drawn for."""

    def __init__(self, name: str | None = None) -> None:
        """Start with nothing; `name` is the pane's id."""
        super().__init__(id=name)
        self._rows: Rows = ()

    @property
    def rows(self) -> Rows:
        """The rows shown."""
        return self._rows

    def show(self, rows: Rows) -> bool:
        """Show other rows, only the cells that differ are sent to the terminal; return whether there are any to be seen."""
        before, self._rows = self._rows, rows
        if len(before) != len(rows):
            self.refresh()
            return bool(self.display)
        regions = []
        for number, (old, new) in enumerate(zip(before, rows, strict=True)):
            changed = changed_columns(old, new)
            if changed is not None:
                regions.append(Region(changed[0], number, changed[1], 1))
        if regions:
            self.refresh(*regions)
        return bool(regions and self.display)

    def on_resize(self) -> None:
        """Tell the app."""
        self.post_message(self.Resized())

    def render_line(self, y: int) -> Strip:
        """Return one line for the screen."""
        if y >= len(self._rows):
            return Strip.blank(self.size.width, self.rich_style)
        row = self._rows[y]
        strip = Strip([Segment(text, LOOKS[style]) for text, style in row], row_width(row))
        return strip.adjust_cell_length(self.size.width)
