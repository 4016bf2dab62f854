"""Cells and the dot canvas, as exact strings."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specterm.views.canvas import GLYPHS, Canvas
from specterm.views.cells import cut, fit_row, pad, plain, row_width, width_of


def test_cut_leaves_a_mark():
    """What does not fit is cut with a mark, and wide characters count two."""
    assert [cut("potential", width) for width in (9, 8, 1, 0)] == ["potential", "potenti…", "…", ""]
    assert cut("能量能量", 5) == "能量…"
    assert pad("能量", 6, "~") == "能量  "
    assert width_of("ψ\u0302") == 1


@given(st.text(max_size=20), st.integers(0, 12))
def test_pad_is_exact(text, width):
    """Padded text takes exactly the columns asked for."""
    assert width_of(pad(text, width)) == width


@given(st.lists(st.text(st.characters(categories=["L", "N", "P"]), min_size=1, max_size=5), max_size=5), st.integers(1, 12))
def test_fit_row_is_exact(texts, width):
    """A fitted row takes exactly the columns asked for and no run is empty."""
    row = fit_row(tuple((text, "plain") for text in texts), width)
    assert row_width(row) == width
    assert all(text for text, _ in row)


def test_neighbours_of_one_style_are_one_run():
    """A row of the canvas has one run for neighbouring cells of one style, blanks counted with what stands before them."""
    canvas = Canvas(6, 1, "ascii")
    canvas.write(0, 0, "ab", "axis")
    canvas.write(3, 0, "c", "axis")
    canvas.write(5, 0, "d", "chosen")
    assert canvas.cells() == ((("ab", "axis"), (" ", "plain"), ("c", "axis"), (" ", "plain"), ("d", "chosen")),)
    drawn = Canvas(6, 1, "ascii")
    drawn.curve(np.array([1.0, 2.0]), np.array([1.0, 1.0]), "other")
    assert drawn.cells() == (((" ", "plain"), ("--   ", "other")),)


@pytest.mark.parametrize(
    ("glyphs", "text"), [("braille", "  ⡠⠊\n⡠⠊"), ("block", " ▗▞\n▞▘"), ("ascii", " .|\n-'")]
)
def test_a_rising_line(glyphs, text):
    """A straight line from corner to corner looks so in each set of glyphs."""
    canvas = Canvas(4 if glyphs == "braille" else 3, 2, glyphs)
    canvas.curve(np.array([0.0, canvas.columns - 1]), np.array([canvas.rows - 1.0, 0.0]), "potential")
    assert plain(canvas.cells()) == text


def test_hatch_stands_between_line_and_base():
    """Hatching fills every second dot column from the line to the base, and nothing where the line has a gap."""
    canvas = Canvas(4, 1, "braille")
    rows = np.array([0.0, 0.0, np.nan, 0.0, 0.0])
    canvas.hatch(np.array([0.0, 2.0, 3.5, 5.0, 7.0]), rows, 3.0, "chosen")
    assert plain(canvas.cells()) == "⡇⡇ ⡇"


def test_over_clears_the_ground():
    """A curve drawn over a hatched ground stands alone in its cells."""
    canvas = Canvas(2, 1, "braille")
    canvas.hatch(np.array([0.0, 3.0]), np.zeros(2), 3.0, "chosen")
    canvas.curve(np.array([0.0, 3.0]), np.zeros(2), "potential", over=True)
    assert canvas.cells() == ((("⠉⠉", "potential"),),)


def test_lines_and_letters():
    """Broken lines, upright lines and letters fall into their cells; what is outside is left out."""
    canvas = Canvas(4, 2, "braille")
    canvas.horizontal(0, "threshold", dash=(1, 1))
    canvas.horizontal(99, "threshold")
    canvas.vertical(7, "wall")
    canvas.write(2, 1, "abc", "axis")
    assert plain(canvas.cells()) == "⠁⠁⠁⢹\n  ab"


def test_steep_lines_are_cut_at_the_edge():
    """A line from far below to far above crosses the canvas once and costs nothing."""
    canvas = Canvas(1, 1, "braille")
    canvas.curve(np.array([0.0, 1.0]), np.array([1e300, -1e300]), "potential")
    assert plain(canvas.cells()) == "⡜"


_NUMBERS = st.one_of(st.floats(), st.sampled_from([0.0, 1e300, -1e300, 5.0]))


@given(st.lists(st.tuples(_NUMBERS, _NUMBERS), max_size=8), st.sampled_from(GLYPHS), st.integers(-1, 6), st.integers(-1, 4))
def test_any_numbers_fit(points, glyphs, width, height):
    """NaN, infinities, huge numbers, nothing at all: the canvas keeps its size."""
    canvas = Canvas(width, height, glyphs)
    places = np.sort(np.array([point[0] for point in points], dtype=float))
    rows = np.array([point[1] for point in points], dtype=float)
    canvas.curve(places, rows, "potential")
    canvas.hatch(places, rows, rows[0] if len(rows) else np.nan, "chosen")
    made = canvas.cells()
    assert len(made) == max(0, height)
    assert all(row_width(row) == max(0, width) for row in made)
