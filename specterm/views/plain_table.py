"""Aligned plain-text tables of any columns."""

from __future__ import annotations

import math
from collections.abc import Sequence

from specterm.views.cells import width_of
from specterm.views.level_table import aligned
from specterm.views.numbers import bracket, short


def text_columns(headings: Sequence[str], rows: Sequence[Sequence[str]], *, left: frozenset[int] = frozenset()) -> str:
    """Return rows of texts under their headings; columns stand on the right unless their place is in `left`."""
    columns = [[heading, *(row[place] for row in rows)] for place, heading in enumerate(headings)]
    widths = [max(width_of(text) for text in column) for column in columns]
    lines = []
    for number in range(len(rows) + 1):
        cells = []
        for place, column in enumerate(columns):
            blank = " " * (widths[place] - width_of(column[number]))
            cells.append(column[number] + blank if place in left else blank + column[number])
        lines.append("  ".join(cells).rstrip())
    return "\n".join(lines)


def sure(values: Sequence[float], errors: Sequence[float | None]) -> tuple[str, ...]:
    """Return values with the digits that are sure, their decimal points under each other; without an error behind a `~`."""
    return aligned([bracket(value, error) for value, error in zip(values, errors, strict=True)])


def known(values: Sequence[float], errors: Sequence[float], scale: float) -> tuple[str, ...]:
    """Return values with the digits that are sure, `-` where the error is not known (nan) or not below the scale."""
    return aligned([_known(value, error, scale) for value, error in zip(values, errors, strict=True)])


def _known(value: float, error: float, scale: float) -> str:
    if math.isinf(value):
        return short(value)
    return bracket(value, error) if error < scale or error == 0 else "-"


def bare(values: Sequence[float | None], digits: int = 6) -> tuple[str, ...]:
    """Return short numbers, `-` for None."""
    return tuple("-" if value is None else short(value, digits) for value in values)
