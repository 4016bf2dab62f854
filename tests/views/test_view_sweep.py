"""The figure of a sweep, from sweeps put together by hand."""

import numpy as np
import pytest

from specterm.analysis.sweep import Axis, Gap, Quantity, Sweep, SweepRequest
from specterm.views.cells import plain, row_width
from specterm.views.sweep_figure import branch_of, ends_table, gap_table, map_rows, sweep_rows


def made(values, levels, branches=None, second=None, gaps=()):
    """Return a sweep over F with these levels (points, levels)."""
    levels = np.array(levels, dtype=float)
    axes = (Axis("F", tuple(values)), *([Axis("G", tuple(second))] if second else []))
    request = SweepRequest("", axes, quantity=Quantity())
    places = np.array([request.place(k) for k in range(request.size)])
    if branches is None:
        branches = np.tile(np.arange(levels.shape[1]), (len(levels), 1))
    errors = np.full(levels.shape, 1e-6)
    return Sweep(
        request, ("kV/cm",) * len(axes), "meV", "meV", places, tuple(range(levels.shape[1])), levels, errors,
        tuple(("bound",) * levels.shape[1] for _ in levels), levels, errors, np.array(branches),
        np.ones(len(levels), dtype=bool), True, gaps,
    )  # fmt: skip


def styles(rows):
    """Return the styles of what is not blank."""
    return {style for row in rows for text, style in row if text.strip()}


CROSSING = made([0, 1, 2, 3], [[0, 3], [1, 2], [1, 2], [0, 3]], [[0, 1], [0, 1], [1, 0], [1, 0]])


@pytest.mark.parametrize("size", [(40, 12), (12, 5), (100, 30)])
@pytest.mark.parametrize("cursor", [None, 0, 3])
def test_size(size, cursor):
    """The figure fills exactly the rows and columns asked for, with and without a cursor."""
    rows = sweep_rows(CROSSING, *size, 0, cursor)
    assert [row_width(row) for row in rows] == [size[0]] * size[1]


def test_the_chosen_state_is_followed_through_the_crossing():
    """The strong curve goes from the lower left to the upper right, as its branch does."""
    assert CROSSING.along(0, CROSSING.levels).tolist() == [0, 1, 2, 3]
    rows = sweep_rows(CROSSING, 40, 12, 0, glyphs="ascii")
    assert styles(rows) >= {"chosen", "other", "axis"}
    heights = {}
    for line, row in enumerate(rows):
        column = 0
        for text, style in row:
            heights.update({column + k: line for k, c in enumerate(text) if style == "chosen" and c != " "})
            column += len(text)
    lines = [heights[column] for column in sorted(heights)]
    assert lines == sorted(lines, reverse=True)


def test_cursor_draws_a_line_and_marks_the_state():
    """The cursor is a line at its point, with a mark on the chosen state."""
    rows = sweep_rows(CROSSING, 40, 12, 0, 2, "ascii")
    assert "wall" in styles(rows)
    assert any("o" in text for row in rows for text, style in row if style == "chosen")


def test_points_not_done_are_gaps_and_one_point_is_a_figure():
    """Sweeps with missing points, with one point, and with none at all, are drawn without complaint."""
    hole = made([0, 1, 2], [[0, 1], [np.nan, np.nan], [0, 1]], [[0, 1], [-1, -1], [0, 1]])
    for found in (hole, made([1], [[1.0, 2.0]]), made([0, 1], np.full((2, 1), np.nan), [[-1], [-1]])):
        assert len(sweep_rows(found, 40, 10, 0)) == 10
    lone = plain(sweep_rows(made([5], [[1.0]]), 60, 10, 0))
    assert "10^" not in lone
    assert "F (kV/cm)" in lone
    assert ends_table(made([5], [[1.0]])).splitlines()[0].count("=") == 1


def test_levels_that_are_not_there():
    """A level that was not computed is no branch."""
    assert branch_of(CROSSING, 7) is None
    assert branch_of(CROSSING, None) is None
    assert "chosen" not in styles(sweep_rows(CROSSING, 40, 12, 7))


def test_logarithmic_axis():
    """Values spaced by equal factors are drawn by their logarithms, and the axis says so."""
    assert "log10 F" in plain(sweep_rows(made([1, 10, 100], [[1.0], [2.0], [3.0]]), 50, 12))
    assert "log10" not in plain(sweep_rows(made([1, 2, 3], [[1.0], [2.0], [3.0]]), 50, 12))


def test_map():
    """A map has a row for each value of the first parameter, darker where the level is higher."""
    found = made([0, 1], [[0.0], [1.0], [2.0], [3.0], [4.0], [5.0]], second=[5, 6, 7])
    lines = plain(map_rows(found, 40, 0, "ascii")).splitlines()
    assert lines[1] == "rows: F (kV/cm) = 0 ... 1"
    assert lines[5].rstrip() == "0   ::=="
    assert lines[6].endswith("@@")


def test_tables():
    """Gaps show the digits that are sure; ends show both ends."""
    lost = Gap((2, 3), 3, 0.0, 1e-9, 4e-14, None)
    gaps = (Gap((0, 1), 1.5, 0.25, 1e-4, 1e-3, False), Gap((1, 2), 2.5, 1e-9, 1e-4, 1e-8, True), lost)
    table = gap_table(made([0, 1], [[1.0, 2.0]] * 2, gaps=gaps))
    assert "0-1" in table
    assert "avoided" in table
    assert "crossing" in table
    assert "not resolved" in table
    assert gap_table(CROSSING) == ""
    assert ends_table(CROSSING).splitlines()[0].split("  ")[0] == "level"
