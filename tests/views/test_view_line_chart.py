"""Charts on our own canvas: exact size, ticks where they belong, no surprises; what they show was read by eye."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specterm.views.cells import plain, row_width
from specterm.views.line_chart import chart
from specterm.views.plot import Curve, Label

_LINE = Curve(np.array([0.0, 10.0]), np.array([0.0, 1.0]), "chosen")


def test_a_chart_as_text():
    """A straight line runs from corner to corner of a frame with ticks, a title and names."""
    text = plain(chart([_LINE], 30, 9, glyphs="ascii", title="rise", xlabel="F (kV/cm)", ylabel="E"))
    assert text.split("\n") == [
        "             rise",
        "   +-------------------------+",
        "1.0+                   ..--''|",
        "   |             ..--''      |",
        "0.5+      ..--'''            |",
        "0.0+..--''                   |",
        "   ++-----------+-----------++",
        "    0           5           10",
        "E           F (kV/cm)",
    ]


def test_ticks_stand_at_their_places():
    """The ends of the axes lie on the first and last column and row, and a tick half way stands in the middle."""
    rows = plain(chart([_LINE], 34, 9, glyphs="braille", xlim=(0, 4), ylim=(0, 2))).split("\n")
    assert rows[1].startswith("2.0┤") or rows[1].startswith("2┤")
    bottom = rows[-2]
    width = len(bottom) - bottom.index("└") - 2
    marks = [place - bottom.index("└") - 1 for place, character in enumerate(bottom) if character == "┬"]
    assert marks[0] == 0
    assert marks[-1] == width - 1


def test_styles_and_labels():
    """Curves keep their styles, labels stand in their own and stay inside."""
    flat = Curve(np.array([0.0, 1.0]), np.array([0.5, 0.5]), "other")
    rows = chart([flat], 30, 8, ylim=(0, 1), labels=[Label(1.0, 0.9, "17", "chosen")])
    assert ("17", "chosen") in [run for row in rows for run in row]
    assert "other" in {style for row in rows for _, style in row}


def test_curves_end_at_the_view():
    """A curve that leaves the view is cut where it leaves it, however far it goes."""
    steep = Curve(np.array([0.0, 1.0, 2.0]), np.array([0.0, 1e9, 0.0]), "chosen")
    rows = plain(chart([steep], 40, 10, glyphs="block", ylim=(0.0, 1.0))).split("\n")[1:-2]
    inner = [row[4:-1] for row in rows]
    assert all(row[:2].strip() and row.rstrip()[-2:].strip() for row in inner)
    assert all(not row[4:-4].strip() for row in inner)


@pytest.mark.parametrize("size", [(12, 5), (13, 5), (20, 6), (40, 7)])
def test_small_charts_keep_their_size(size):
    """Down to the smallest size names and title give way and a row of the curve is left."""
    rows = chart([_LINE], *size, title="a title longer than the chart is wide", xlabel="a name that is long", ylabel="E")
    assert [row_width(row) for row in rows] == [size[0]] * size[1]
    assert "chosen" in {style for row in rows for _, style in row}
    assert chart([_LINE], 11, 5) == ((("           ", "plain"),),) * 5
    assert chart([_LINE], 0, 0) == ()


_NUMBERS = st.one_of(st.floats(), st.sampled_from([0.0, 1.0, 1e300, -1e300, 1e5, 5e-324]))


@settings(max_examples=80, deadline=None)
@given(st.lists(st.tuples(_NUMBERS, _NUMBERS), max_size=7), st.sampled_from(["braille", "block", "ascii"]))
def test_any_numbers_make_a_chart(points, glyphs):
    """NaN, infinities, 1e300, constants, one point, nothing: a chart of the asked size comes out."""
    x = np.sort(np.array([point[0] for point in points], dtype=float))
    y = np.array([point[1] for point in points], dtype=float)
    rows = chart([Curve(x, y, "chosen")], 30, 8, glyphs=glyphs, ylim=(0.0, 2.0), labels=[Label(0.0, 0.0, "0", "other")])
    assert [row_width(row) for row in rows] == [30] * 8
    assert [row_width(row) for row in chart([Curve(x, y)], 31, 9, glyphs=glyphs)] == [31] * 9
