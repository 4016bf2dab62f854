"""Tables in rows of cells: columns that do not fit are left out from the right, rows that do not fit are scrolled."""

from __future__ import annotations

from collections.abc import Sequence

from specterm.views.cells import MARKS, Row, Rows, cut, fit_row, width_of

GAP = 2


def table_rows(
    headings: Sequence[str],
    rows: Sequence[Sequence[str]],
    width: int,
    height: int,
    *,
    marked: int | None = None,
    scroll: int = 0,
    left: frozenset[int] = frozenset(),
    glyphs: str = "braille",
) -> Rows:
    """Return a table of exactly `height` rows of `width` columns.

    `marked` is the row drawn strong; `scroll` the first row wanted, held so that the table stays full; columns with a place in
    `left` stand on the left, the others on the right. The last line says which rows are shown where not all are.
    """
    if height <= 0 or width <= 0:
        return ((),) * max(0, height)
    mark = MARKS[glyphs]
    widths = [max([width_of(head), *(width_of(row[k]) for row in rows)]) for k, head in enumerate(headings)]
    kept = _fitting(widths, width - 1)
    more = len(rows) > height - 1
    room = max(1, height - 1 - more)
    first = max(0, min(scroll, len(rows) - room))
    lines: list[Row] = [fit_row(((" " + _line(headings, widths, kept, left), "axis"),), width, mark)]
    for place in range(first, min(len(rows), first + room)):
        text = (">" if place == marked else " ") + _line(rows[place], widths, kept, left)
        lines.append(fit_row(((text, "chosen" if place == marked else "plain"),), width, mark))
    if more:
        words = f" rows {first + 1}-{min(len(rows), first + room)} of {len(rows)}"
        lines.append(fit_row(((words, "dim"),), width, mark))
    return padded(lines, width, height)


def _fitting(widths: Sequence[int], width: int) -> int:
    """Return how many columns from the left fit, at least one."""
    used = 0
    for place, one in enumerate(widths):
        used += one + (GAP if place else 0)
        if used > width and place:
            return place
    return len(widths)


def _line(texts: Sequence[str], widths: Sequence[int], kept: int, left: frozenset[int]) -> str:
    """Return one line of the columns kept."""
    cells = []
    for place in range(kept):
        blank = " " * (widths[place] - width_of(texts[place]))
        cells.append(texts[place] + blank if place in left else blank + texts[place])
    return (" " * GAP).join(cells)


def text_rows(text: str, width: int, style: str = "plain", glyphs: str = "braille") -> Rows:
    """Return lines of text as rows, cut where they are too long."""
    return tuple(fit_row(((cut(" " + line, width, MARKS[glyphs]), style),), width) for line in text.split("\n"))


def padded(rows: Sequence[Row], width: int, height: int) -> Rows:
    """Return exactly `height` rows: blank ones are added, what is too much is cut off."""
    blank: Row = ((" " * max(0, width), "plain"),)
    return (*rows, *(blank,) * max(0, height - len(rows)))[: max(0, height)]
