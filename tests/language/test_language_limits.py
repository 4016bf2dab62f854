"""Limits of a sheet: what is beyond them is refused, what is within them is read."""

import sys

import pytest

from specterm.errors import SheetError
from specterm.language import decode, parse, parse_expression
from specterm.language.order import children
from specterm.language.parser import MAX_DEPTH


def depth(node) -> int:
    """Return how deep a tree is, without recursion."""
    deepest, stack = 0, [(node, 1)]
    while stack:
        node, level = stack.pop()
        deepest = max(deepest, level)
        stack += [(child, level + 1) for child in children(node)]
    return deepest


@pytest.mark.parametrize("text", ["# " + "x" * 1_000_000, "ä" * 500_001, "\0" * 1_000_001])
def test_too_large(text):
    """A text beyond 1 MB is refused as too large, before anything else is said about it."""
    with pytest.raises(SheetError, match="large"):
        parse(text)
    with pytest.raises(SheetError, match="large"):
        decode(text.encode())


@pytest.mark.parametrize("opening", ["(", "sin(", "-(", "1 + (", "where(1, 2, ", "1 and 1 < 1 + 1*-2^(", "not (", "max(1 + 2*"])
def test_nesting_limit(opening):
    """200 open brackets are read (as far as the tree is not too deep), 201 are refused at once."""
    with pytest.raises(SheetError, match="nested too deeply"):
        parse_expression(opening * 201 + "x" + ")" * 201)
    with pytest.raises(SheetError, match="nested too deeply"):
        parse_expression(opening * 20_000)


def test_nesting_200_is_read():
    """Exactly 200 nested brackets, calls or signs are within the limit."""
    for opening, closing in (("(", ")"), ("sin(", ")"), ("-", ""), ("2^", "")):
        assert depth(parse_expression(opening * 200 + "x" + closing * 200)) <= MAX_DEPTH


def test_no_tree_is_deeper_than_stated():
    """Long chains of terms, factors and mixtures give shallow trees, whatever stands inside."""
    for text in ("+x-y" * 3000, "*x/y" * 1500, " and x or y" * 1500, "-(a*b-c)" * 1500):
        assert depth(parse_expression("x" + text)) <= MAX_DEPTH


def test_long_chain_keeps_its_value():
    """A chain that is halved has the value of the chain read from left to right."""
    numbers = [((7 * k) % 11 + 1) / 4 for k in range(500)]
    for signs in ("+-", "*/", "--", "+++-"):
        text = str(numbers[0]) + "".join(f" {signs[k % len(signs)]} {n}" for k, n in enumerate(numbers[1:]))
        assert value(parse_expression(text)) == pytest.approx(value_from_left(text), rel=1e-12)


def value(node) -> float:
    """Return the value of a tree of numbers."""
    if not children(node):
        return node.value
    left, right = (value(child) for child in children(node))
    return {"+": left + right, "-": left - right, "*": left * right, "/": left / right}[node.operator]


def value_from_left(text: str) -> float:
    """Return the value of a chain, taken strictly from left to right."""
    first, *rest = text.split(" ")
    total = float(first)
    for sign, number in zip(rest[::2], map(float, rest[1::2]), strict=True):
        total = {"+": total + number, "-": total - number, "*": total * number, "/": total / number}[sign]
    return total


def test_deep_trees_are_refused_without_recursion():
    """Half a million signs, powers or brackets neither exhaust Python's stack nor pass."""
    limit = sys.getrecursionlimit()
    for text in ("-" * 500_000, "2^" * 300_000, "not " * 200_000, "a = (" * 150_000, "sin(" * 200_000):
        with pytest.raises(SheetError):
            parse(f"V = {text}x")
    assert sys.getrecursionlimit() == limit


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("V = 0" + "+x" * 400_000, "too long"),
        ("V = 0" + "+x" * 10_000, "too long"),
        (";".join(f"a{k}=1" for k in range(20_001)), "20,000 statements"),
        ("a = " + "9" * 900_000, "more than 400 digits"),
        ("a = 1e999", "too large"),
        ("a = " + "9" * 320, "too large"),
        ("a\0 = 1", "control character U[+]0000"),
        ("# \x1b]0;x\x07", "control character U[+]001B"),
        ("a = 1 # \u0085", "control character U[+]0085"),
        ("a\r= 1", "control character U[+]000D"),
        ("a = 1 # \ud800", "control character U[+]D800"),
    ],
)
def test_other_limits(text, words):
    """Too many terms, statements or digits, numbers that are not finite, and control characters are refused."""
    with pytest.raises(SheetError, match=words):
        parse(text)


def test_20000_statements_are_read():
    """A sheet of exactly 20,000 statements is within the limit."""
    assert len(parse("\n".join(f"a{k} = {k}" for k in range(20_000))).definitions) == 20_000
