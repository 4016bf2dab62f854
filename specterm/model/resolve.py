"""Expression trees -> values: names looked up, units converted, functions and operators combined. Nothing recurses."""

from __future__ import annotations

import cmath
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from specterm.errors import SheetError, Span
from specterm.language.catalogue import refuse
from specterm.language.nodes import Binary, Call, Compare, ForeignLevel, Name, Node, Number, Table, Unary
from specterm.model import calls, compose
from specterm.model.scalar import written
from specterm.model.setting import Setting
from specterm.model.term import Term, constant
from specterm.model.values import Value, as_real, negated, power_of, product_of, sum_of
from specterm.units import UnitSystem


@dataclass(frozen=True)
class Context:
    """What names and tables mean where an expression stands."""

    setting: Setting
    units: UnitSystem
    lookup: Callable[[Name], Value]
    table: Callable[[Table], Term]


def resolve(root: Node, context: Context) -> Value:
    """Return the value of an expression. Raises SheetError with the place of what cannot be."""
    values: dict[int, Value] = {}
    stack: list[tuple[Node, bool]] = [(root, False)]
    while stack:
        node, ready = stack.pop()
        parts = operands(node)
        if parts and not ready:
            stack.append((node, True))
            stack.extend((part, False) for part in parts)
            continue
        values[id(node)] = _placed(node, [values[id(part)] for part in parts], context)
    return values[id(root)]


def operands(node: Node) -> Sequence[Node]:
    """Return the expressions a node is made of; sums and products whole, however long."""
    if isinstance(node, Binary):
        return [part for _, part in _chain(node)]
    if isinstance(node, Unary):
        return (node.operand,)
    if isinstance(node, Compare):
        return node.operands
    if isinstance(node, Call):
        return node.arguments
    return (node.index,) if isinstance(node, ForeignLevel) else ()


def names_in(root: Node) -> list[Name]:
    """Return every name in an expression."""
    found, stack = [], [root]
    while stack:
        node = stack.pop()
        if isinstance(node, Name):
            found.append(node)
        stack.extend(operands(node))
    return found


def forbid_levels(root: Node) -> None:
    """Refuse `level(n)` in an expression that is no state."""
    stack = [root]
    while stack:
        node = stack.pop()
        if isinstance(node, ForeignLevel) or (isinstance(node, Call) and node.name == "level"):
            raise refuse("level-outside-state", node.span)
        stack.extend(operands(node))


def _chain(node: Binary) -> list[tuple[str, Node]]:
    """Return the operands of a chain of one level, each with the operator before it, from left to right."""
    level = {"+": "+-", "-": "+-", "*": "*/", "/": "*/"}.get(node.operator)
    if level is None:
        return [("", node.left), (node.operator, node.right)]
    parts: list[tuple[str, Node]] = []
    walker: Node = node
    while isinstance(walker, Binary) and walker.operator in level:
        parts.append((walker.operator, walker.right))
        walker = walker.left
    parts.append((level[0], walker))
    return parts[::-1]


def _placed(node: Node, values: list[Value], context: Context) -> Value:
    """Return the value of one node; an error without a place gets the node's."""
    try:
        value = _RULES[type(node)](node, values, context)
    except SheetError as error:
        error.span = error.span or node.span
        raise
    if isinstance(value, Term):
        _check_finite(value, node.span)
    return value


def _check_finite(term: Term, span: Span) -> None:
    """Refuse a constant, or a constant factor, that is infinite or undefined."""
    numbers = term.data if term.kind == "sum" else (term.data,) if term.kind == "constant" else ()
    lost = next((n for n in numbers if not n.is_finite), None)
    if lost is not None:
        raise refuse("not-finite", span, what="this", value="undefined" if cmath.isnan(lost.value) else "infinite")


def _number(node: Number, units: UnitSystem) -> Term:
    scalar = written(node.value)
    if node.unit is not None:
        scalar = scalar * written(units.parse(node.unit, node.span)[0])
    return constant(scalar)


def _unary(node: Unary, value: Value) -> Value:
    if node.operator == "not":
        return compose.logic("not", as_real(value, "the operand of `not`", node.operand.span))
    return negated(value) if node.operator == "-" else value


def _binary(node: Binary, values: list[Value], setting: Setting) -> Value:
    chain = _chain(node)
    spans: list[Span] = [part.span for _, part in chain]
    if node.operator in "+-":
        return sum_of([(-1 if op == "-" else 1, v, s) for (op, _), v, s in zip(chain, values, spans, strict=True)], setting)
    if node.operator in "*/":
        return product_of([(op == "/", v, s) for (op, _), v, s in zip(chain, values, spans, strict=True)], setting)
    if node.operator == "^":
        return power_of(values[0], values[1], spans[0], spans[1])
    what = f"an operand of `{node.operator}`"
    return compose.logic(node.operator, *(as_real(v, what, s) for v, s in zip(values, spans, strict=True)))


def _comparison(node: Compare, values: list[Value]) -> Term:
    terms = [as_real(v, "a side of a comparison", part.span) for v, part in zip(values, node.operands, strict=True)]
    result = compose.compare(node.operators[0], terms[0], terms[1])
    for operator, a, b in zip(node.operators[1:], terms[1:-1], terms[2:], strict=True):
        result = compose.logic("and", result, compose.compare(operator, a, b))
    return result


_RULES: dict[type[Node], Callable[[Any, list[Value], Context], Value]] = {
    Number: lambda node, _values, context: _number(node, context.units),
    Name: lambda node, _values, context: context.lookup(node),
    Table: lambda node, _values, context: context.table(node),
    Unary: lambda node, values, _context: _unary(node, values[0]),
    Binary: lambda node, values, context: _binary(node, values, context.setting),
    Compare: lambda node, values, _context: _comparison(node, values),
    Call: lambda node, values, context: calls.call_value(node, values, context.setting),
    ForeignLevel: lambda node, values, context: calls.level(values[0], node.index.span, node.path, context.setting),
}
