"""The door to plotext: clean input, exact size, no surprises."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from specterm.views.cells import plain, row_width
from specterm.views.plot import Curve, Label, chart, clipped, limits, thinned


def test_a_chart_as_text():
    """A straight line in a frame with ticks and names (recomputed here, read by eye)."""
    line = Curve(np.array([0.0, 10.0]), np.array([0.0, 1.0]), "chosen")
    text = plain(chart([line], 24, 7, glyphs="ascii", xlabel="F (kV/cm)", ylabel="E"))
    assert text.split("\n")[0].startswith(" +----")
    assert "*" in text
    assert text.split("\n")[-1].startswith("E")
    assert text.isascii()


def test_styles_come_back():
    """The style of a curve and of a label survives the way through plotext."""
    line = Curve(np.array([0.0, 1.0]), np.array([0.5, 0.5]), "other")
    rows = chart([line], 30, 8, ylim=(0, 1), labels=[Label(0.5, 0.9, "7", "chosen")])
    assert ("7", "chosen") in [run for row in rows for run in row]
    assert "other" in {style for row in rows for _, style in row}


def test_curves_are_cut_at_the_view():
    """A polyline is cut to the rectangle where it leaves it, with a gap between the pieces."""
    x, y = clipped(np.array([0.0, 1.0, 2.0]), np.array([-1.0, 3.0, -1.0]), (0.0, 2.0), (0.0, 1.0))
    np.testing.assert_allclose(x, [0.25, 0.5, np.nan, 1.5, 1.75])
    np.testing.assert_allclose(y, [0.0, 1.0, np.nan, 1.0, 0.0])


def test_thinning_keeps_extremes_and_gaps():
    """Of many points two a column stay, the extreme ones, and gaps stay gaps."""
    x = np.linspace(0, 1, 10_001)
    y = np.sin(40 * x)
    y[5000] = np.nan
    fewer_x, fewer_y = thinned(x, y, (0.0, 1.0), 50)
    assert len(fewer_x) <= 2 * 51 + 1
    assert np.nanmax(fewer_y) == np.nanmax(y)
    assert np.isnan(fewer_y).sum() == 1


def test_limits_never_meet():
    """Limits hold the finite numbers and differ, whatever is given."""
    assert limits([np.array([1.0, np.nan, 3.0, np.inf])]) == (1.0, 3.0)
    assert limits([]) == (0.0, 1.0)
    low, high = limits([np.array([2.0, 2.0])])
    assert low < 2.0 < high


def test_small_sizes_are_blank():
    """A size without room for a chart gives blank rows of that size."""
    curve = [Curve(np.array([0.0, 1.0]), np.array([0.0, 1.0]))]
    assert chart(curve, 5, 2) == ((("     ", "plain"),),) * 2
    assert chart(curve, 0, 0) == ()


_NUMBERS = st.one_of(st.floats(), st.sampled_from([0.0, 1.0, 1e300, -1e300, 1e5]))


@settings(max_examples=60, deadline=None)
@given(st.lists(st.tuples(_NUMBERS, _NUMBERS), max_size=7), st.sampled_from(["braille", "block", "ascii"]))
def test_any_numbers_make_a_chart(points, glyphs):
    """NaN, infinities, 1e300, constants, one point, nothing: a chart of the asked size comes out."""
    x = np.sort(np.array([point[0] for point in points], dtype=float))
    y = np.array([point[1] for point in points], dtype=float)
    rows = chart([Curve(x, y, "chosen")], 30, 8, glyphs=glyphs, ylim=(0.0, 2.0))
    assert [row_width(row) for row in rows] == [30] * 8
    assert [row_width(row) for row in chart([Curve(x, y)], 31, 9, glyphs=glyphs)] == [31] * 9
