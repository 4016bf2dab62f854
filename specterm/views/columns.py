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
    fixed: int = 1,
    aside: int = 0,
    glyphs: str = "braille",
) -> Rows:
    """Return a table of exactly `height` rows of `width` columns.

    `marked` is the row drawn strong; `scroll` the first row wanted, held so that the table stays full; columns with a place in
    `left` stand on the left, the others on the right. Behind the first `fixed` columns `aside` ones are passed over, held so
    that the last column stays in view. The last line says which rows and columns are shown where not all are.
    """
    if height <= 0 or width <= 0:
        return ((),) * max(0, height)
    mark = MARKS[glyphs]
    widths = [max([width_of(head), *(width_of(row[k]) for row in rows)]) for k, head in enumerate(headings)]
    places = _fitting(widths, width - 1, min(fixed, len(headings)), aside)
    hidden = len(places) < len(headings)
    more = len(rows) > height - 1 or hidden
    room = max(1, height - 1 - more)
    first = max(0, min(scroll, len(rows) - room))
    lines: list[Row] = [fit_row(((" " + _line(headings, widths, places, left), "axis"),), width, mark)]
    for place in range(first, min(len(rows), first + room)):
        text = (">" if place == marked else " ") + _line(rows[place], widths, places, left)
        lines.append(fit_row(((text, "chosen" if place == marked else "plain"),), width, mark))
    if more:
        words = f" rows {first + 1}-{min(len(rows), first + room)} of {len(rows)}" if len(rows) > room else ""
        words += f"  {len(places)} of {len(headings)} columns: left and right move them" if hidden else ""
        lines.append(fit_row(((words, "dim"),), width, mark))
    return padded(lines, width, height)


def _fitting(widths: Sequence[int], width: int, fixed: int, aside: int) -> list[int]:
    """Return the places of the columns that fit: the fixed ones, then those behind the ones passed over."""

    def after(passed: int) -> list[int]:
        places, used = list(range(fixed)), sum(widths[:fixed]) + GAP * (fixed - 1)
        for place in range(fixed + passed, len(widths)):
            used += GAP + widths[place]
            if used > width:
                break
            places.append(place)
        return places

    most = next((passed for passed in range(len(widths)) if after(passed)[-1] == len(widths) - 1), 0)
    return after(min(aside, most))


def _line(texts: Sequence[str], widths: Sequence[int], places: Sequence[int], left: frozenset[int]) -> str:
    """Return one line of the columns at some places."""
    cells = []
    for place in places:
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
