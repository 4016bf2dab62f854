"""Numbers as text: the sure digits and no more."""

from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specterm.views.numbers import bracket, duration, short, with_unit
from specterm.views.ticks import ticks


@pytest.mark.parametrize(
    ("value", "error", "text"),
    [
        (1.0603620904842, 2.6e-14, "1.06036209048420(3)"),
        (-1.5e-9, 1.4e-10, "-1.5(2)e-9"),
        (0.0, 1e-12, "0(1)e-12"),
        (0.0, 0.0, "0"),
        (0.1, 0.0, "0.1"),
        (1 / 3, 0.0, "0.3333333333333333"),
        (1e300, 1e290, "1.0000000000(2)e300"),
        (1234.0, 300.0, "1.2(4)e3"),
        (0.001, 0.5, "0.0(6)"),
        (9.99996, 0.00009, "10.0000(2)"),
        (3.0, 1e-30, "3.0000000000000000(1)"),
        (-13.6, 1e-8, "-13.60000000(2)"),
        (1.23456789, None, "~1.23457"),
        (1.23456789, float("inf"), "~1.23457"),
        (float("nan"), 0.1, "nan"),
        (float("-inf"), 0.1, "-inf"),
    ],
)
def test_bracket_texts(value, error, text):
    """A value with its error has one known text (worked out by hand)."""
    assert bracket(value, error) == text


def _read(text):
    """Return the value and the error that a bracket text promises."""
    head, _, rest = text.partition("(")
    last, _, power = rest.partition(")")
    scale = Decimal(10) ** int(power[1:] or 0) if power else Decimal(1)
    digits = len(head.partition(".")[2])
    return Decimal(head) * scale, Decimal(last) * Decimal(10) ** -digits * scale


@given(st.floats(-1e290, 1e290), st.floats(1e-290, 1e290))
def test_bracket_never_promises_too_much(value, error):
    """The interval the text stands for holds the interval that is known, and no more than 17 digits are shown."""
    text = bracket(value, error)
    shown, promised = _read(text)
    assert abs(shown - Decimal(value)) + Decimal(error) <= promised
    assert len(text.partition("(")[0].replace(".", "").lstrip("-0")) <= 17


@given(st.floats(allow_nan=True, allow_infinity=True), st.one_of(st.none(), st.floats(allow_nan=True, allow_infinity=True)))
def test_bracket_takes_any_float(value, error):
    """Every pair of floats has a printable text of bounded length."""
    text = bracket(value, error)
    assert text.isprintable()
    assert len(text) < 60


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_exact_values_read_back(value):
    """A value without error is shown so that it reads back unchanged."""
    assert float(bracket(value, 0.0)) == value


def test_short_numbers():
    """Plain numbers lose their padding: zeros, plus signs, minus zero."""
    assert [short(value, 4) for value in (-0.0, 3e-8, 12.50, 123456.0)] == ["0", "3e-8", "12.5", "1.235e5"]
    assert with_unit("3", "meV") == "3 meV"
    assert with_unit("3", "") == "3"


def test_durations():
    """Times are shown in the unit that suits them."""
    assert [duration(t) for t in (0.0031, 0.034, 0.234, 1.24, 130.2)] == ["3.1 ms", "34 ms", "234 ms", "1.2 s", "130 s"]


def test_ticks_of_usual_ranges():
    """Ticks stand at 1, 2, 5 times a power of ten; big and small numbers share a power."""
    assert ticks(0, 10, 5).labels == ("0", "2", "4", "6", "8", "10")
    assert ticks(-1, 1, 4).labels == ("-1.0", "-0.5", "0.0", "0.5", "1.0")
    assert (ticks(-1e6, 3e6, 4).labels, ticks(-1e6, 3e6, 4).note) == (("-1", "0", "1", "2", "3"), "10^6")


def test_ticks_of_a_narrow_range_have_a_base():
    """A range far narrower than its distance from zero is counted from a base, so that the labels differ."""
    marks = ticks(1.06036, 1.06036 + 1e-10, 4)
    assert marks.note == "1.06036 + 10^-10"
    assert len(set(marks.labels)) == len(marks.labels) > 1


@given(st.floats(), st.floats(), st.integers(-1, 30))
def test_ticks_take_anything(low, high, count):
    """Any two ends give labels that are as many as the places, all different, and not too many."""
    marks = ticks(low, high, count)
    assert len(marks.places) == len(marks.labels) == len(set(marks.labels)) <= max(0, 2 * count + 2)
