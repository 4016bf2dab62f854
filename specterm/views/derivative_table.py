"""Derivatives of levels or lines as a table: a row for each, a column for each parameter, with the digits that are sure."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specterm.arrays import Array
from specterm.views.numbers import bracket, short
from specterm.views.plain_table import sure, text_columns

SURE = 1e-6
"""Derivatives known better than this share of them are shown to six digits without a bracket."""


def derivative_table(
    labels: Sequence[str], values: Sequence[float], value_errors: Sequence[float | None], derivatives: Array, errors: Array,
    headings: Sequence[str],
) -> str:  # fmt: skip
    """Return levels or lines with their derivatives (rows, parameters) as aligned text, `-` where there is none.

    `headings` are those of the label, of the value and of each parameter.
    """
    shown = sure(values, value_errors)
    rows = [
        [label, text, *(_cell(float(d), float(e)) for d, e in zip(row, doubt, strict=True))]
        for label, text, row, doubt in zip(labels, shown, derivatives, errors, strict=True)
    ]
    return text_columns(headings, rows)


def _cell(value: float, error: float) -> str:
    if np.isnan(value):
        return "-"
    if abs(value) <= error:
        return "0"
    return short(value) if error < SURE * abs(value) else bracket(value, error)
