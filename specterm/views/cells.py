"""Rows of cells: text with the name of what it shows, no colour.

A row is a tuple of runs, each a text and the name of a style ("chosen", "axis", ...); what a style looks like is decided by
whoever shows it. Widths are terminal columns.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable

Run = tuple[str, str]
Row = tuple[Run, ...]
Rows = tuple[Row, ...]

STYLES = (
    "plain", "title", "axis", "potential", "chosen", "forbidden", "other", "threshold", "wall", "weight", "dim", "good", "warn",
    "pinned",
)
MARKS = {"braille": "…", "block": "…", "ascii": "~"}


_NARROW = re.compile("[ -~\u2500-\u25a0\u2800-\u28ff\u2026]*")
"""Characters of one column that figures are made of: ASCII, lines, blocks, braille."""


def plainly_narrow(text: str) -> bool:
    """Return whether each character is known at a glance to take one column."""
    return text.isascii() or _NARROW.fullmatch(text) is not None


def width_of(text: str) -> int:
    """Return how many columns `text` takes: two for wide East Asian characters, none for combining ones."""
    if plainly_narrow(text):
        return len(text)
    return sum(_columns(character) for character in text)


def _columns(character: str) -> int:
    """Return the columns of one character."""
    if unicodedata.combining(character) or unicodedata.category(character) in ("Cf", "Me", "Mn"):
        return 0
    return 2 if unicodedata.east_asian_width(character) in ("W", "F") else 1


def cut(text: str, width: int, mark: str = "…") -> str:
    """Return `text` in at most `width` columns; what is cut leaves `mark` at the end."""
    if width_of(text) <= width:
        return text
    room = width - width_of(mark)
    if room < 0:
        return mark[: max(0, width)]
    kept = ""
    for character in text:
        room -= _columns(character)
        if room < 0:
            break
        kept += character
    return kept + mark


def pad(text: str, width: int, mark: str = "…") -> str:
    """Return `text` in exactly `width` columns, cut with a mark or filled with blanks on the right."""
    text = cut(text, width, mark)
    return text + " " * (width - width_of(text))


def row_width(row: Row) -> int:
    """Return the columns of a row."""
    return sum(width_of(text) for text, _ in row)


def fit_row(row: Row, width: int, mark: str = "…") -> Row:
    """Return the row in exactly `width` columns, cut with a mark or filled with plain blanks."""
    total = row_width(row)
    if total < width:
        return (*row, (" " * (width - total), "plain"))
    if total == width:
        return row
    kept: list[Run] = []
    room = width
    for text, style in row:
        if width_of(text) < room:
            kept.append((text, style))
            room -= width_of(text)
        else:
            kept.append((pad(text + " " * (total - width), room, mark), style))
            break
    return tuple(run for run in kept if run[0])


def plain(rows: Iterable[Row]) -> str:
    """Return rows as text, one line a row, blanks at the ends removed."""
    return "\n".join("".join(text for text, _ in row).rstrip() for row in rows)
