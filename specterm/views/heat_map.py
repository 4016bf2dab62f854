"""A matrix as a map of shades: one cell of two columns for each element, darker where its modulus is larger."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specterm.views.cells import Row, Rows
from specterm.views.numbers import short

_SHADES = {"ascii": " .:-=+*#%@", "block": " ░▒▓█", "braille": " ░▒▓█"}
DECADES = 6
"""How many powers of ten the shades span on the logarithmic scale."""


def heat_map(
    sizes: NDArray[np.float64], rows: Sequence[int], columns: Sequence[int], width: int, *, glyphs: str = "braille",
    logarithmic: bool = False,
) -> Rows:  # fmt: skip
    """Return a map of a matrix of moduli (rows, columns) with level numbers at the sides and a legend below.

    As many columns as fit in `width` are drawn, and as many rows. The scale is linear up to the largest modulus, or logarithmic
    over six powers of ten.
    """
    shades = _SHADES[glyphs]
    margin = max(len(str(row)) for row in rows) + 1 if len(rows) else 2
    room = max(0, (width - margin) // 2)
    across, down = list(columns)[:room], list(rows)[:room]
    largest = float(np.nanmax(sizes, initial=0.0))
    drawn: list[Row] = list(_numbers(across, margin))
    for place, row in enumerate(down):
        cells = "".join(
            2 * _shade(float(sizes[place, k]), largest, shades, logarithmic=logarithmic) for k in range(len(across))
        )
        drawn.append(((f"{row:>{margin - 1}} ", "axis"), (cells, "plain")))
    drawn.append(((_legend(largest, shades, logarithmic=logarithmic), "axis"),))
    if len(across) < len(columns):
        drawn.append(((f"{len(across)} of {len(columns)} levels fit", "dim"),))
    return tuple(drawn)


def _numbers(across: Sequence[int], margin: int) -> list[Row]:
    """Return the numbers over the columns, every one that has room."""
    step = 1 if max(across, default=0) < 10 else 2
    line = " " * margin
    for place in range(0, len(across), step):
        line += f"{across[place]:<{2 * step}}"
    return [((line.rstrip(), "axis"),)]


def _shade(size: float, largest: float, shades: str, *, logarithmic: bool) -> str:
    """Return the shade of one modulus; what is not nothing leaves a mark on the logarithmic scale."""
    if not math.isfinite(size):
        return "?"
    if largest <= 0 or size <= 0:
        return shades[0]
    part = 1 + math.log10(size / largest) / DECADES if logarithmic else size / largest
    return shades[
        min(
            len(shades) - 1,
            max(0, math.ceil(part * (len(shades) - 1) - 1e-9 if logarithmic else part * (len(shades) - 1) - 0.5)),
        )
    ]


def _legend(largest: float, shades: str, *, logarithmic: bool) -> str:
    """Return what the shades stand for."""
    low = short(largest * 10.0**-DECADES, 2) if logarithmic else "0"
    return f"{low} {shades} {short(largest, 3)}"
