"""What is known of an evolution, as text."""

from __future__ import annotations

import numpy as np

from specterm.analysis.evolution import Evolution
from specterm.views.numbers import scale_of, short, with_unit
from specterm.views.plain_table import known


def moment_texts(found: Evolution, some: slice = slice(None)) -> tuple[tuple[str, ...], tuple[str, ...], str]:
    """Return means and spreads at `some` of the times with the digits that are sure, `-` where none is, and their unit."""
    by, unit = found.shown
    size = float((np.abs(found.mean) + np.where(np.isfinite(found.spread), found.spread, 0.0)).max()) / by

    def texts(values: np.ndarray, errors: np.ndarray) -> tuple[str, ...]:
        return known((values[some] / by).tolist(), (errors[some] / by).tolist(), size)

    return texts(found.mean, found.mean_error), texts(found.spread, found.spread_error), unit


def repeat_texts(found: Evolution) -> list[str]:
    """Return the period and the time of revival, where they mean something."""
    scale, unit = scale_of(found.unit)
    pairs = (("period", found.classical), ("revival", found.revival))
    return [f"{name} {with_unit(short(scale * value), unit)}" for name, value in pairs if value is not None]
