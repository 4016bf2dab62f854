"""One line of a table file cut into cells: quotation marks as in CSV (RFC 4180), comments behind a blank, in linear time."""

from __future__ import annotations

import csv
import re

MARKS = (" #", " %", " !", "\t#")
"""What begins a comment behind the cells."""
_QUOTED = re.compile(r'"([^"]*)"|(\S+)')
_DECIMAL = re.compile(r"[+-]?(\d+([.,]\d*)?|[.,]\d+)([eEdD][+-]?\d+)?", re.ASCII)


class QuoteError(ValueError):
    """Quotation marks that do not enclose a cell."""


def separator_of(row: str) -> str | None:
    """Return what stands between the cells of a row outside quotation marks: a tab, else `;`, else `,`; None for blanks."""
    outside = "".join(row.split('"')[::2])
    return next((mark for mark in ("\t", ";", ",") if mark in outside), None)


def cells_of(row: str, separator: str | None) -> list[str]:
    """Return the cells of a row without quotation marks and blanks around them; QuoteError where marks are odd."""
    if '"' not in row:
        row = _before_comment(row)
        return row.split() if separator is None else [cell.strip() for cell in row.split(separator)]
    row = _plain(row)
    if separator is None:
        return [quoted or bare for quoted, bare in _QUOTED.findall(row)]
    try:
        return [cell.strip() for cell in next(csv.reader([row], delimiter=separator, skipinitialspace=True, strict=True))]
    except csv.Error as error:
        raise QuoteError(str(error)) from None


def looks_like_number(cell: str) -> bool:
    """Say whether a cell is a number, one with a decimal comma included."""
    return _DECIMAL.fullmatch(cell) is not None


def _before_comment(text: str) -> str:
    for mark in MARKS:
        text = text.split(mark, 1)[0]
    return text


def _plain(row: str) -> str:
    """Return a row without its comment and without blanks behind closing quotation marks."""
    pieces = row.split('"')
    kept = []
    for number, piece in enumerate(pieces):
        if number % 2:
            kept.append(piece)
            continue
        content = _before_comment(piece)
        kept.append(content.lstrip(" ") if number else content)
        if content != piece:
            break
    if len(kept) % 2 == 0:
        raise QuoteError("a quotation mark is not closed")
    return '"'.join(kept)
