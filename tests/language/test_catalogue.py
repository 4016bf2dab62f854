"""The error catalogue: every row's example gives its error, at its place."""

import re

import pytest

from specterm.errors import SheetError, describe
from specterm.language import parse
from specterm.language.catalogue import MARK, ROWS
from specterm.language.dimensions import check_dimensions
from specterm.model import build
from specterm.units import UnitSystem

EXAMPLES = [(key, example) for key, row in ROWS.items() for example in row.examples]
FACTS = re.compile(r"\{\w+\}")


def error_of(text: str, stage: str) -> SheetError:
    """Return the error of a sheet, which must come from the stage that its row names."""
    if stage == "language":
        with pytest.raises(SheetError) as caught:
            parse(text)
    else:
        sheet = parse(text)
        with pytest.raises(SheetError) as caught:
            make_ready(sheet)
    return caught.value


def make_ready(sheet) -> None:
    """Run what comes after parsing: units, dimensions, the model."""
    check_dimensions(sheet, UnitSystem.make(sheet.units.pairs, sheet.units.span) if sheet.units else UnitSystem())
    build(sheet)


@pytest.mark.parametrize(("key", "example"), EXAMPLES, ids=[f"{key}-{n}" for n, (key, _) in enumerate(EXAMPLES)])
def test_example_gives_its_error_at_its_place(key, example):
    """Each example is refused with the message and the mend of its row, at the mark (line, column and caret)."""
    row = ROWS[key]
    at = example.find(MARK)
    error = error_of(example.replace(MARK, "", 1), row.stage)
    assert re.fullmatch(".*".join(re.escape(part) for part in FACTS.split(row.message)), error.message)
    assert re.fullmatch(".*".join(re.escape(part) for part in FACTS.split(row.mend)), error.mend)
    assert (error.span.start if error.span else -1) == at
    if error.span is not None:
        text = example.replace(MARK, "", 1)
        line, column = text.count("\n", 0, at) + 1, at - (text.rfind("\n", 0, at) + 1) + 1
        assert describe(error, text, "a.sheet").startswith(f"a.sheet:{line}:{column}: ")
        assert error.span.end > error.span.start


@pytest.mark.parametrize("key", ROWS)
def test_row_says_what_and_how_to_mend(key):
    """Every row has a message and a way to mend it, neither ends with a full stop, and it belongs to a stage."""
    row = ROWS[key]
    assert row.message
    assert row.mend
    assert not row.message.endswith(".")
    assert not re.search(r"[^.]\.$", row.mend)
    assert row.stage in {"language", "model"}


def test_near_name_is_offered():
    """A misspelt word is answered with the nearest known one."""
    with pytest.raises(SheetError) as caught:
        parse("x in rign(0, 1)")
    assert "did you mean `ring`?" in caught.value.mend


def test_long_facts_are_cut():
    """A name of a thousand letters does not fill the screen."""
    with pytest.raises(SheetError) as caught:
        parse("x" * 1000 + " == 3")
    assert len(caught.value.mend) < 120
