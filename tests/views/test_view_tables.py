"""The table of levels, the bars of weights, the two status lines."""

import dataclasses

import pytest
from hypothesis import given
from hypothesis import strategies as st
from standin import spectrum

from specterm.spectrum.result import Level
from specterm.views.cells import plain, row_width
from specterm.views.element_table import element_text
from specterm.views.level_table import Weighing, aligned, table, text_table
from specterm.views.status import MomentsText, Units, state_line, trust_line
from specterm.views.weight_bars import bar, percent

LEVELS = spectrum(3).levels
PACKET = Weighing("packet", {0: 0.6, 1: 0.3, 2: 1e-7}, {}, 0.9)
UNITS = Units("meV", "nm", "hbar/nm")


def test_table_as_text():
    """The plain table is aligned and leaves out nothing that is known."""
    assert text_table(LEVELS, "meV") == (
        " n value (meV)       kind  nodes parity\n"
        " 0 0.500000000000(4) bound     0 even\n"
        " 1 1.500000000000(4) bound     1 odd\n"
        " 2 2.500000000000(4) bound     2 even"
    )


def test_columns_without_content_are_left_out():
    """Nodes and parity have no column when no level has them; without levels the headings stand alone."""
    levels = [Level(0, 12.5, None, "box"), Level(1, 113.0, 0.5, "unresolved")]
    assert text_table(levels) == " n value    kind\n 0 ~12.5    box\n 1 113.0(5) unresolved"
    assert text_table(()) == " n value kind"


def test_decimal_points_stand_under_each_other():
    """Numbers are shifted so that their points line up."""
    assert aligned(["-1.5(2)", "12.25(1)", "3(1)e-12", "~7"]) == ("-1.5(2)", "12.25(1)", " 3(1)e-12", "~7")


def test_resonances_show_their_width():
    """A resonance carries its width behind its value."""
    assert "width 0.01" in text_table([Level(0, 1.0, 1e-9, "resonance", width=0.01)])


def test_table_with_bars():
    """The bar of a prepared state stands in the level's row, and the captured part over the bars."""
    rows = table(LEVELS, 70, 5, unit="meV", chosen=1, weighing=PACKET)
    lines = plain(rows).split("\n")
    assert "packet 90.00% captured" in lines[0]
    assert lines[2].startswith(">1 1.5")
    assert lines[1].rstrip().endswith("60.00%")
    assert lines[3].rstrip().endswith("<0.01%")
    assert rows[2][0][1] == "chosen"


@given(st.integers(-1, 90), st.integers(-1, 8), st.booleans(), st.integers(0, 3))
def test_table_fills_its_cells(width, height, weighed, first):
    """Whatever the size, the table fills it exactly."""
    rows = table(LEVELS, width, height, unit="meV", chosen=1, first=first, weighing=PACKET if weighed else None)
    assert [row_width(row) for row in rows] == [max(0, width)] * max(0, height)


def test_narrow_tables_cut_with_a_mark():
    """A value without room is cut visibly."""
    assert "…" in plain(table(LEVELS, 12, 3, unit="meV"))


@pytest.mark.parametrize(
    ("weight", "text"),
    [(0.0, "    "), (1.0, "████"), (0.5, "██  "), (0.53125, "██▏ "), (1e-6, ".   "), (2.0, "████"), (float("nan"), "?   ")],
)
def test_bars(weight, text):
    """A bar has eighths of a column, a dot for a trace, a question mark for no number."""
    assert bar(weight, 4) == text


@given(st.floats(), st.integers(-2, 20), st.sampled_from(["braille", "block", "ascii"]))
def test_bars_have_their_width(weight, width, glyphs):
    """Any float makes a bar of the width asked for."""
    assert len(bar(weight, width, glyphs)) == max(0, width)


def test_percentages_show_sure_digits():
    """A weight is shown to the digits its error leaves."""
    assert [percent(0.97313, error) for error in (None, 1e-9, 2e-3, 0.1)] == [" 97.31%", " 97.31%", "    97%", "    97%"]
    assert percent(float("inf")) == "      ?"


def test_state_line_with_moments():
    """The line of the chosen state has value, kind, nodes, parity, expectations and spreads with units; noise around 0 is 0."""
    line = plain([state_line(LEVELS[2], UNITS, 140, moments=MomentsText(1e-17, 1.5811, 0.0, 1.5811))])
    assert line == (
        "level 2  2.500000000000(4) meV  bound  2 nodes  even  <x> 0 spread 1.581 nm  <p> 0 spread 1.581 hbar/nm"
    )


def test_lines_are_cut_with_a_mark():
    """Parts that do not fit leave a mark, at any width."""
    assert plain([state_line(LEVELS[2], UNITS, 40)]) == "level 2  2.500000000000(4) meV  bound …"
    for width in range(60):
        for row in (state_line(LEVELS[2], UNITS, width), trust_line(spectrum(3), UNITS, width), state_line(None, UNITS, width)):
            assert row_width(row) <= width


def test_trust_line():
    """The line of trust says how sure, how many, whether complete, where, how and how long."""
    assert plain([trust_line(spectrum(3), UNITS, 120)]) == (
        "error <= 3e-12 meV  3 levels, complete  x -9..9 nm  113 unknowns  3.1 ms  elements of order 14"
    )


def test_trust_line_warns():
    """Unresolved levels and a count that does not agree are said in the line and by its style."""
    levels = (dataclasses.replace(LEVELS[0], kind="unresolved"), *LEVELS[1:])
    row = trust_line(dataclasses.replace(spectrum(3), levels=levels, complete=False, bound=2), UNITS, 120)
    assert row[0][1] == "warn"
    assert "3 levels, 2 bound, 1 UNRESOLVED, MAY BE INCOMPLETE" in row[0][0]
    assert trust_line(None, UNITS, 80) == (("no spectrum yet", "dim"),)


def test_an_element_without_a_known_error_is_no_zero():
    """What is not known to any digit is shown behind a mark, not as 0; what is below a known error is 0."""
    assert element_text(3.08 + 0j, float("inf")) == "~3.08"
    assert element_text(0.25j, float("nan")) == "~0.25i"
    assert element_text(1e-9 + 0j, 1e-6) == "0"
