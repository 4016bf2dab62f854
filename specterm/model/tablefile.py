"""Reading the text of a table file: columns of numbers, with comments and perhaps a header. Only regular files are read."""

from __future__ import annotations

import math
import os
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from specterm.errors import Span, printable
from specterm.language.catalogue import refuse
from specterm.language.suggest import nearest
from specterm.model.cells import QuoteError, cells_of, looks_like_number, separator_of
from specterm.regular import NotRegularError, TooLargeError, read_regular

if TYPE_CHECKING:
    from pathlib import Path

LARGEST_FILE = 20_000_000
MOST_ROWS = 300_000
LONGEST_ROW = 1_000_000
_COMMENT = ("#", "%", "!")
_NUMBER = re.compile(r"[+-]?(\d+(\.\d*)?|\.\d+)([eEdD][+-]?\d+)?", re.ASCII)


@dataclass(frozen=True)
class TableText:
    """The lines of a table cut into cells: header names (or none), rows and the line number of each row.

    No row has more cells than the header, or than the first row where there is none.
    """

    path: str
    names: tuple[str, ...]
    rows: list[list[str]]
    lines: list[int]


def read_table(folder: Path | None, path: str, span: Span) -> TableText:
    """Return the cells of a file; `path` starts at `folder`. Only regular files up to 20 MB and 300,000 rows are read."""
    shown = printable(path)
    full = path if folder is None else os.path.join(folder, path)
    try:
        return _cut(shown, read_regular(full, LARGEST_FILE), span)
    except NotRegularError:
        raise refuse("file-special", span, path=shown) from None
    except TooLargeError as error:
        found, limit = f"{error.size} bytes", f"{LARGEST_FILE} bytes"
        raise refuse("file-too-large", span, path=shown, found=found, limit=limit) from None
    except FileNotFoundError:
        raise refuse("file-missing", span, path=shown) from None
    except OSError as error:
        raise refuse("file-unreadable", span, path=shown, reason=error.strerror) from None


def _cut(path: str, data: bytes, span: Span) -> TableText:
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise refuse("file-unreadable", span, path=path, reason="it is not UTF-8 text") from None
    if "\0" in text:
        raise refuse("file-unreadable", span, path=path, reason="it is not text")
    rows, lines = [], []
    for number, line in enumerate(text.splitlines(), 1):
        content = line.strip()
        if content and not content.startswith(_COMMENT):
            rows.append(content)
            lines.append(number)
        if len(content) > LONGEST_ROW:
            found = f"{len(content)} characters in line {number}"
            raise refuse("file-too-large", span, path=path, found=found, limit=f"{LONGEST_ROW} characters")
        if len(rows) > MOST_ROWS + 1:
            raise refuse("file-too-large", span, path=path, found=f"over {MOST_ROWS} rows", limit=f"{MOST_ROWS} rows")
    separator = separator_of(rows[0]) if rows else None
    cells = [_cells(path, row, separator, line, span) for row, line in zip(rows, lines, strict=True)]
    names: tuple[str, ...] = ()
    if cells and not any(looks_like_number(c) for c in cells[0]):
        names = tuple(_bare(c) for c in cells[0])
    width = len(cells[0]) if names or separator is not None else max(map(len, cells), default=0)
    for row, place in zip(cells, lines, strict=True):
        if len(row) > width and any(row[width:]):
            wanted = f"the header has {width}" if names else f"the first row has {width}"
            raise refuse("table-cells", span, path=path, line=place, found=len(row), wanted=wanted)
    skipped = 1 if names else 0
    return TableText(path, names, cells[skipped:], lines[skipped:])


def _cells(path: str, row: str, separator: str | None, line: int, span: Span) -> list[str]:
    try:
        return cells_of(row, separator)
    except QuoteError:
        raise refuse("table-quotes", span, path=path, line=line) from None


def _bare(name: str) -> str:
    """Return a header's name without quotation marks and without a unit in brackets behind it."""
    name = name.strip().strip('"').strip("'").strip()
    if not name.endswith(("]", ")")):
        return name
    inner = name[:-1]
    begin = max(inner.rfind("]"), inner.rfind(")")) + 1
    opened = [place for mark in "[(" if (place := inner.find(mark, begin)) >= 0]
    return (inner[: min(opened)].rstrip() if opened else "") or name


def column(table: TableText, which: str | int, span: Span) -> NDArray[np.float64]:
    """Return a column, by header or by number from 1, as finite numbers; shape (rows,)."""
    place = _place(table, which, span)
    values = np.empty(len(table.rows))
    for k, row in enumerate(table.rows):
        cell = row[place] if place < len(row) else ""
        value = float(cell.replace("d", "e").replace("D", "e")) if _NUMBER.fullmatch(cell) else math.nan
        if not math.isfinite(value):
            raise refuse("table-cell", span, path=table.path, line=table.lines[k], column=place + 1, found=printable(cell))
        values[k] = value
    return values


def _place(table: TableText, which: str | int, span: Span) -> int:
    width = len(table.rows[0]) if table.rows else len(table.names)
    names = table.names or tuple(str(k) for k in range(1, width + 1))
    shown = printable(", ".join(names))
    if isinstance(which, int):
        if width and which > width:
            raise refuse("table-column-unknown", span, path=table.path, name=which, near=None, names=shown)
        return which - 1
    wanted = _bare(which)
    exact = [k for k, name in enumerate(table.names) if name == wanted]
    loose = exact or [k for k, name in enumerate(table.names) if name.casefold() == wanted.casefold()]
    if not loose:
        near = nearest(wanted, table.names)
        raise refuse("table-column-unknown", span, path=table.path, name=f'"{printable(which)}"', near=near, names=shown)
    return loose[0]
