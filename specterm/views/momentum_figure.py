"""The density of a state over momentum as a chart: a curve on a line, sticks on a ring."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from specterm.analysis.momentum import MomentumDensity
from specterm.views.cells import Rows
from specterm.views.line_chart import chart
from specterm.views.plot import Curve

Floats = NDArray[np.float64]


def momentum_rows(density: MomentumDensity, width: int, height: int, glyphs: str = "braille", title: str = "") -> Rows:
    """Return the density in `height` rows of `width` columns; the title says how much of the state the window holds."""
    held = f"{math.floor(1e4 * min(density.held, 1.0)) / 100:.2f}% within"
    curve, xlim = _sticks(density) if density.discrete else (Curve(density.k, density.density, "chosen"), None)
    top = float(np.max(density.density, initial=0.0))
    return chart(
        [curve], width, height, glyphs=glyphs, title=f"{title}, {held}" if title else held, xlim=xlim,
        ylim=(0.0, 1.05 * top if top > 0 else 1.0), xlabel=f"momentum ({density.unit})" if density.unit else "momentum",
    )  # fmt: skip


def _sticks(density: MomentumDensity) -> tuple[Curve, tuple[float, float]]:
    """Return sticks from 0 to each probability as one curve with gaps, and limits with room beside the outermost."""
    k, p = density.k, density.density
    gap = np.full(len(k), np.nan)
    x: Floats = np.column_stack([k, k, gap]).ravel()
    y: Floats = np.column_stack([np.zeros(len(k)), p, gap]).ravel()
    room = float(k[1] - k[0]) / 2 if len(k) > 1 else 1.0
    return Curve(x, y, "chosen"), (float(k[0]) - room, float(k[-1]) + room)
