"""Prepared states: a function, or a sum of levels with coefficients."""

from __future__ import annotations

from dataclasses import dataclass

from specterm.errors import Span
from specterm.language.catalogue import refuse
from specterm.model.function import Function
from specterm.model.values import Levels, Value, as_term


@dataclass(frozen=True)
class State:
    """A prepared state, not normalised: `function`, or the sum over `levels` of (coefficient function, index, path or None).

    Exactly one of the two is given: `levels` is empty where `function` is not None.
    """

    name: str
    span: Span
    function: Function | None
    levels: tuple[tuple[Function, int, str | None], ...]


def build_state(name: str, span: Span, value: Value, expression_span: Span) -> State:
    """Return the state an expression stands for; a state that is zero everywhere is refused."""
    if isinstance(value, Levels):
        levels = tuple((Function(p.coefficient), p.index, p.path) for p in value.parts if Function(p.coefficient).constant != 0)
        if not levels:
            raise refuse("state-not-normalisable", expression_span, name=name, reason="it is zero")
        return State(name, span, None, levels)
    function = Function(as_term(value, f"the state `{name}`", expression_span))
    if function.constant == 0:
        raise refuse("state-not-normalisable", expression_span, name=name, reason="it is zero everywhere")
    return State(name, span, function, ())
