"""Derivatives of levels or lines as a table: a row for each, a column for each parameter, with the digits that are sure."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specterm.arrays import Array
from specterm.views.numbers import bracket, short
from specterm.views.plain_table import sure, text_columns


def derivative_table(
    labels: Sequence[str], values: Sequence[float], value_errors: Sequence[float | None], derivatives: Array, errors: Array,
    headings: Sequence[str],
) -> str:  # fmt: skip
    """Return levels or lines with their derivatives (rows, parameters) as aligned text, `-` where there is none.

    `headings` are those of the label, of the value and of each parameter.
    """
    shown = sure(values, value_errors)
    rows = [
        [label, text, *(cell_text(float(d), float(e)) for d, e in zip(row, doubt, strict=True))]
        for label, text, row, doubt in zip(labels, shown, derivatives, errors, strict=True)
    ]
    return text_columns(headings, rows)


def cell_text(value: float, error: float, digits: int = 6) -> str:
    """Return one derivative with the digits that are sure, at most `digits` of them; `-` for nan."""
    if np.isnan(value):
        return "-"
    if abs(value) <= error < np.inf:
        return "0"
    return short(value, digits) if error < 10.0**-digits * abs(value) else bracket(value, error)


def parameter_headings(parameters: Sequence[str], units: Sequence[str]) -> list[str]:
    """Return the headings of the parameters, each with the unit of its column where that says more than the name."""
    return [name if " per " in unit or not unit else f"{name} ({unit})" for name, unit in zip(parameters, units, strict=True)]
