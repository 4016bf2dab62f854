"""Matrix elements as a table of numbers, with the digits that are sure."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specterm.arrays import Values
from specterm.views.numbers import bracket, short
from specterm.views.plain_table import text_columns

MOST = 8
"""So many levels are printed; the whole matrix is in the map, in JSON and in CSV."""


def element_table(values: Values, errors: NDArray[np.float64], rows: Sequence[int], columns: Sequence[int]) -> str:
    """Return the corner of a matrix (rows, columns) as aligned text; elements below their error show as 0."""
    return text_columns(*element_columns(values, errors, rows[:MOST], columns[:MOST]))


def element_columns(
    values: Values, errors: NDArray[np.float64], rows: Sequence[int], columns: Sequence[int]
) -> tuple[list[str], list[list[str]]]:
    """Return headings and cells of a matrix (rows, columns); elements below their error show as 0."""
    texts = [
        [str(row), *(element_text(complex(values[a, b]), float(errors[a, b])) for b in range(len(columns)))]
        for a, row in enumerate(rows)
    ]
    return ["", *(str(column) for column in columns)], texts


def element_text(value: complex, error: float) -> str:
    """Return a complex number to six digits, or fewer where the error says so; a part below the error is left out.

    Without a known error (infinite or nan) the digits stand behind a `~`.
    """
    limit = max(error if math.isfinite(error) else 0.0, 1e-12 * abs(value))
    real, imaginary = abs(value.real) > limit, abs(value.imag) > limit
    if not real and not imaginary:
        return "0"
    if imaginary and real:
        return f"{_part(value.real, error)}{'+' if value.imag > 0 else ''}{_part(value.imag, error)}i"
    return f"{_part(value.imag, error)}i" if imaginary else _part(value.real, error)


def _part(value: float, error: float) -> str:
    return short(value) if error < 1e-6 * abs(value) else bracket(value, error)
