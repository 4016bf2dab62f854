"""Tables in rows of cells: what fits, what scrolls, what moves aside."""

from specterm.views.cells import plain
from specterm.views.columns import table_rows

HEADINGS = ["n", "first", "second", "third"]
ROWS = [[str(n), f"{n}.1", f"{n}.22", f"{n}.333"] for n in range(6)]


def text(width, height, **options):
    """Return a table as lines."""
    rows = table_rows(HEADINGS, ROWS, width, height, **options)
    assert len(rows) == height
    return plain(rows).split("\n")


def test_everything_fits():
    """A table that fits is shown whole, right-aligned, its marked row strong."""
    lines = text(40, 8, marked=2)
    assert lines[0] == " n  first  second  third"
    assert lines[3] == ">2    2.1    2.22  2.333"
    assert lines[7] == ""


def test_rows_that_do_not_fit_scroll():
    """The last line says which rows are shown; scrolling stops where the table is full."""
    lines = text(40, 5, scroll=2)
    assert [line[:2] for line in lines[1:4]] == [" 2", " 3", " 4"]
    assert lines[-1] == " rows 3-5 of 6"
    assert text(40, 5, scroll=99)[-1] == " rows 4-6 of 6"


def test_columns_that_do_not_fit_move_aside():
    """Fixed columns stay, others are passed over; the last line says so; moving stops at the last column."""
    assert text(18, 8)[0] == " n  first  second"
    assert "3 of 4 columns" in text(60, 8, aside=0)[-1] or text(60, 8)[-1] == ""
    assert text(18, 8, aside=1)[0] == " n  second  third"
    assert text(18, 8, aside=50)[0] == " n  second  third"
    assert text(4, 8)[0].startswith(" n")
