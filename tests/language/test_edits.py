"""Numbers of a sheet changed in place."""

from decimal import Decimal

import pytest

from specterm.errors import SheetError
from specterm.language import parse
from specterm.language.edits import number_text, plain_numbers, step_of, with_number

SHEET = """# a comment with a = 3
H = p^2/(2*m) + a*x^2 ; a = 7.20   # the strength
m=-.5e-1 [m_e]  # light
b = - ( 4 ) [nm]
c = a + 1
d = −2
units: energy meV, length nm, mass m_e
x in (0, 1)
"""


def test_plain_numbers_are_found_with_their_signs():
    """Only bare numbers count; the characters hold sign and digits, not the unit."""
    found = plain_numbers("a = 7.20; m=-.5e-1 [m_e]\nb = +(-(4)); c = a + 1; d = −2; e = 2^2; f = --3; H = p^2; x in (0, 1)")
    assert {name: (place.text, place.value, place.unit) for name, place in found.items()} == {
        "a": ("7.20", 7.2, ""),
        "m": ("-.5e-1", -0.05, "m_e"),
        "b": ("4", -4.0, ""),
        "d": ("−2", -2.0, ""),
        "f": ("--3", 3.0, ""),
    }


@pytest.mark.parametrize(
    ("name", "value", "old", "new"),
    [
        ("a", 7.3, "a = 7.20 ", "a = 7.30 "),
        ("a", 7.199999999999999, "a = 7.20 ", "a = 7.20 "),
        ("a", -0.001, "a = 7.20 ", "a = -0.001 "),
        ("m", 0.06, "m=-.5e-1 [m_e]", "m=0.6e-1 [m_e]"),
        ("d", 3, "d = −2", "d = 3"),
    ],
)
def test_only_the_number_changes(name, value, old, new):
    """The number is replaced in the style it was written in; every other character stays."""
    text = SHEET.replace("b = - ( 4 ) [nm]\n", "")
    assert with_number(text, name, value) == text.replace(old, new)


@pytest.mark.parametrize("value", [5.0, -5.0, 0.0, 1e-30, -2.5e40, 1 / 3, 123456.789])
@pytest.mark.parametrize("name", ["a", "m", "d", "b"])
def test_what_is_written_reads_back(name, value):
    """The changed sheet parses, and its number is the value to 1e-12 (of it or of the step)."""
    text = SHEET.replace("( 4 ) [nm]", "(4)")
    changed = plain_numbers(with_number(text, name, value))
    step = float(step_of(plain_numbers(text)[name].text))
    assert changed[name].value == pytest.approx(value, rel=1.1e-12, abs=1.1e-12 * step)
    assert {k: v.value for k, v in changed.items() if k != name} == {
        k: v.value for k, v in plain_numbers(text).items() if k != name
    }


def test_a_hundred_nudges_leave_no_dust():
    """Steps added one by one in floating point are written with the decimals of the step, back and forth."""
    text = "H = p^2 + a*x; x in (0, 1); a = 7.2"
    for sign in (1, -1):
        for _ in range(100):
            place = plain_numbers(text)["a"]
            text = with_number(text, "a", place.value + sign * float(step_of(place.text)))
    assert text == "H = p^2 + a*x; x in (0, 1); a = 7.2"


@pytest.mark.parametrize(
    ("text", "step"), [("7.2", "0.1"), ("20", "1"), ("1.5e-3", "1e-4"), ("-.5E2", "10"), ("9.", "1"), ("− 0.250", "0.001")]
)
def test_step_is_one_unit_of_the_last_digit(text, step):
    """The step follows the digits written, trailing zeros included."""
    assert step_of(text) == Decimal(step)


@pytest.mark.parametrize(
    ("value", "like", "written"),
    [
        (7.3, "7.2", "7.3"),
        (0.1 + 0.2, "0.1", "0.3"),
        (0.3 - 0.1 - 0.1 - 0.1, "0.3", "0.0"),
        (7.25, "7.2", "7.25"),
        (21, "20", "21"),
        (0.0016, "1.5e-3", "1.6e-3"),
        (1.6e5, "1.5e-3", "1.6e5"),
        (Decimal("2e-30"), "20", "2.0e-30"),
        (1 / 3, "1.0", "0.333333333333"),
        (Decimal("5.30"), "5.3", "5.3"),
    ],
)
def test_numbers_are_written_in_the_style_of_the_old_one(value, like, written):
    """Decimals and exponent follow the old number; more digits come only where the value has them."""
    assert number_text(value, like) == written


def test_names_that_are_no_plain_numbers_are_refused():
    """An expression, an unknown name and an infinite value are refused with a way on."""
    with pytest.raises(SheetError, match="not written as a plain number"):
        with_number(SHEET.replace("( 4 ) [nm]", "4"), "c", 1)
    with pytest.raises(SheetError, match="cannot be written"):
        number_text(float("inf"), "1")


def test_a_parsed_sheet_serves_as_well():
    """Places of a parsed sheet are those of its text."""
    text = "H = p^2 + a*x; x in (0, 1); a = 7.2"
    assert plain_numbers(parse(text)) == plain_numbers(text)
