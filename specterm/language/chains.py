"""A chain of operands with operators of one level between them -> one tree."""

from __future__ import annotations

from typing import NamedTuple

from specterm.errors import Span
from specterm.language.nodes import Binary, Compare, Node

MAX_CHAIN = 16

_COMPARISONS = 4
_POWERS = 8
_FLIPPED = {"+": "-", "-": "+"}


class Item(NamedTuple):
    """A tree and how deep it is."""

    node: Node
    depth: int


def fold(level: int, operators: list[str], items: list[Item]) -> Item:
    """Return the tree of `items[0] operators[0] items[1] ...`, spanning all of them.

    Comparisons become one node, powers group to the right, everything else to the left; a long chain is halved, which
    changes the grouping but not the value: a difference on the right side of the cut becomes a sum.
    """
    if level == _COMPARISONS:
        nodes = tuple(item.node for item in items)
        return Item(Compare(_span(items[0], items[-1]), tuple(operators), nodes), 1 + max(item.depth for item in items))
    if level == _POWERS:
        whole = items[-1]
        for operator, item in zip(reversed(operators), reversed(items[:-1]), strict=True):
            whole = _join(operator, item, whole)
        return whole
    return _halved(operators, items)


def _halved(operators: list[str], items: list[Item]) -> Item:
    """Return the tree of a left-grouping chain, cut in two near the middle where it is long."""
    if len(items) == 2:
        return _join(operators[0], *items)
    cut = _cut(operators) if len(items) > MAX_CHAIN else None
    if cut is None:
        whole = items[0]
        for operator, item in zip(operators, items[1:], strict=True):
            whole = _join(operator, whole, item)
        return whole
    operator, rest = operators[cut], operators[cut + 1 :]
    if operator == "-":
        rest = [_FLIPPED[sign] for sign in rest]
    return _join(operator, _halved(operators[:cut], items[: cut + 1]), _halved(rest, items[cut + 1 :]))


def _cut(operators: list[str]) -> int | None:
    """Return the operator nearest to the middle that a chain may be cut at: any but a division."""
    middle = len(operators) // 2
    for offset in range(middle + 1):
        for place in (middle - offset, middle + offset):
            if place < len(operators) and operators[place] != "/":
                return place
    return None


def _join(operator: str, left: Item, right: Item) -> Item:
    """Return the two trees joined."""
    return Item(Binary(_span(left, right), operator, left.node, right.node), 1 + max(left.depth, right.depth))


def _span(left: Item, right: Item) -> Span:
    """Return the span from one tree to another."""
    return Span(left.node.span.start, right.node.span.end)
