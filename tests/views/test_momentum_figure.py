"""Momentum densities as charts."""

import numpy as np
import pytest

from specterm.analysis.momentum import MomentumDensity
from specterm.views.cells import plain, row_width
from specterm.views.momentum_figure import momentum_rows

K = np.linspace(-3, 3, 61)
SMOOTH = MomentumDensity(K, np.exp(-(K**2)), False, "hbar/nm", 0.99999)
STICKS = MomentumDensity(np.arange(-1.0, 2.0), np.array([0.25, 0.5, 0.25]), True, "hbar", 1.0)


@pytest.mark.parametrize("density", [SMOOTH, STICKS])
@pytest.mark.parametrize("glyphs", ["braille", "block", "ascii"])
@pytest.mark.parametrize("size", [(80, 24), (40, 8), (12, 5), (5, 3)])
def test_it_has_the_size_asked_for(density, glyphs, size):
    """The chart has exactly the rows and columns asked for."""
    rows = momentum_rows(density, *size, glyphs, "level(0)")
    assert len(rows) == size[1]
    assert {row_width(row) for row in rows} == {size[0]}


def test_the_title_never_promises_more_than_is_held():
    """A share of 0.99999 is told as 99.99 per cent, and the axis has its unit."""
    text = plain(momentum_rows(SMOOTH, 60, 16, "ascii", "level(0)"))
    assert "level(0), 99.99% within" in text
    assert "momentum (hbar/nm)" in text


def test_sticks_stand_at_their_momenta():
    """On a ring each momentum is one upright stick, the middle one twice as high as the others."""
    text = plain(momentum_rows(STICKS, 40, 14, "ascii")).split("\n")
    inside = [row[4:-1] for row in text if row.endswith("|")]
    heights = [sum(row[column : column + 1] == "|" for row in inside) for column in range(40)]
    columns = [column for column, height in enumerate(heights) if height]
    assert len(columns) == 3
    assert heights[columns[1]] == max(heights)
    assert abs(heights[columns[0]] - heights[columns[1]] / 2) <= 1


def test_one_momentum_alone_has_room():
    """A single stick is drawn with room on both sides."""
    one = MomentumDensity(np.array([2.0]), np.array([1.0]), True, "", 1.0)
    assert {row[15] for row in plain(momentum_rows(one, 30, 8, "ascii")).split("\n")[2:5]} == {"|"}
