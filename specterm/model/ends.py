"""The domain statement -> the domain: its ends as numbers, and what holds at them."""

from __future__ import annotations

import math

from specterm.errors import Span
from specterm.language.catalogue import refuse
from specterm.language.nodes import DomainStatement, Name, Node, Unary
from specterm.model.domain import FREE, OPEN, RING, WALL, Domain
from specterm.model.scalar import Scalar, written
from specterm.model.scope import Scope


def build_domain(statement: DomainStatement, scope: Scope) -> Domain:
    """Return the domain a statement gives; raise SheetError where its ends make none."""
    left, right = _ends(statement, scope)
    if statement.shape != "ring":
        return _interval(statement, left, right)
    for node, end in ((statement.left, left), (statement.right, right)):
        if node is not None and not end.is_finite:
            raise refuse("domain-infinite-ring", node.span)
    phase = None if statement.phase is None else scope.number(statement.phase, "the phase")
    return _between(statement.coordinate, left, right, (RING, RING), phase)


def _between(name: str, left: Scalar, right: Scalar, kinds: tuple[str, str], phase: float | None = None) -> Domain:
    return Domain(name, left.value.real, right.value.real, *kinds, phase, left.slack, right.slack)


def _ends(statement: DomainStatement, scope: Scope) -> tuple[Scalar, Scalar]:
    if statement.left is None or statement.right is None:
        return _outermost(statement, scope)
    left = _end(statement.left, "the left end of the domain", scope)
    right = _end(statement.right, "the right end of the domain", scope)
    _check_ends(statement.left, statement.right, left.value.real, right.value.real)
    return left, right


def _outermost(statement: DomainStatement, scope: Scope) -> tuple[Scalar, Scalar]:
    """Return the first and the last boundary of the layers."""
    if not scope.blocks:
        raise refuse("no-layers", statement.coordinate_span, name=statement.coordinate)
    scope.ensure(scope.blocks)
    left = min(float(block.boundaries[0]) for block in scope.layers.values())
    right = max(float(block.boundaries[-1]) for block in scope.layers.values())
    return written(left), written(right)


def _interval(statement: DomainStatement, left: Scalar, right: Scalar) -> Domain:
    free = (statement.free_left, statement.free_right)
    ends = [OPEN if not end.is_finite else FREE if is_free else WALL for end, is_free in zip((left, right), free, strict=True)]
    lost = [is_free and end == OPEN for is_free, end in zip(free, ends, strict=True)]
    if (any(free) and FREE not in ends) or (any(lost) and not all(free)):
        raise refuse("free-open", statement.span)
    return _between(statement.coordinate, left, right, (ends[0], ends[1]))


def _end(node: Node, what: str, scope: Scope) -> Scalar:
    """Return one end of the domain: a number, `inf` or `-inf`."""
    sign, inner = 1.0, node
    while isinstance(inner, Unary) and inner.operator in "+-":
        sign, inner = -sign if inner.operator == "-" else sign, inner.operand
    if isinstance(inner, Name) and inner.name == "inf" and "inf" not in scope.definitions:
        return Scalar(sign * math.inf)
    return scope.scalar(node, what)


def _check_ends(left_node: Node, right_node: Node, left: float, right: float) -> None:
    span = Span(left_node.span.start, right_node.span.end)
    if left == right:
        raise refuse("domain-empty", span, left=f"{left:g}")
    if left > right:
        raise refuse("domain-reversed", span, left=f"{left:g}", right=f"{right:g}")
