"""What an expression of a sheet can be: a function (a term), an operator, or a sum of levels; and arithmetic over the three."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from specterm.errors import Span
from specterm.language.catalogue import refuse
from specterm.model.compose import conjugate, power, real_part, whole
from specterm.model.function import Function
from specterm.model.operator import Operator, multiplication, total
from specterm.model.scalar import ONE
from specterm.model.setting import Setting
from specterm.model.term import UNIT, Term, divide, linear, multiply, negative
from specterm.model.word import LARGEST_ORDER


@dataclass(frozen=True)
class LevelPart:
    """A coefficient (number or function) times level `index` of the sheet at `path` (None: this sheet)."""

    coefficient: Term
    index: int
    path: str | None


@dataclass(frozen=True)
class Levels:
    """A sum of levels with coefficients."""

    parts: tuple[LevelPart, ...]


Value = Term | Operator | Levels


def sum_of(parts: Iterable[tuple[int, Value, Span]], setting: Setting) -> Value:
    """Return the sum of values with signs; functions and operators mix, levels stand only with levels."""
    parts = list(parts)
    if any(isinstance(v, Levels) for _, v, _ in parts):
        return _sum_of_levels(parts)
    if any(isinstance(v, Operator) for _, v, _ in parts):
        return total(((sign, as_operator(v, setting, span)) for sign, v, span in parts), setting)
    return linear((ONE if sign > 0 else -ONE, v) for sign, v, _ in parts if isinstance(v, Term))


def _sum_of_levels(parts: list[tuple[int, Value, Span]]) -> Levels:
    found: list[LevelPart] = []
    for sign, value, span in parts:
        if not isinstance(value, Levels):
            raise refuse("state-structure", span)
        found += [LevelPart(p.coefficient if sign > 0 else negative(p.coefficient), p.index, p.path) for p in value.parts]
    return Levels(tuple(found))


def as_operator(value: Value, setting: Setting, span: Span) -> Operator:
    """Return a value as an operator, a function as multiplication by it."""
    if isinstance(value, Operator):
        return value
    if isinstance(value, Levels):
        raise refuse("level-outside-state", span)
    return multiplication(value, setting)


def product_of(parts: list[tuple[bool, Value, Span]], setting: Setting) -> Value:
    """Return a product from left to right; `True` marks a divisor. Operators are composed, division is from the right."""
    if any(isinstance(v, Levels) for _, v, _ in parts):
        return _levels_product(parts)
    if any(isinstance(v, Operator) for _, v, _ in parts):
        result: Operator | None = None
        for inverse, value, span in parts:
            if inverse and not isinstance(value, Term):
                raise refuse("division-by-operator", span)
            factor = as_operator(divide(UNIT, value) if inverse and isinstance(value, Term) else value, setting, span)
            result = factor if result is None else result.compose(factor)
        return as_operator(UNIT, setting, parts[0][2]) if result is None else result
    return _term_product(parts)


def _term_product(parts: list[tuple[bool, Value, Span]]) -> Term:
    result, run = UNIT, list[Term]()
    for inverse, value, _ in parts:
        if not isinstance(value, Term):
            continue
        if inverse:
            result, run = divide(multiply(result, *run), value), []
        else:
            run.append(value)
    return multiply(result, *run)


def _levels_product(parts: list[tuple[bool, Value, Span]]) -> Levels:
    levels = [(inverse, v, span) for inverse, v, span in parts if isinstance(v, Levels)]
    if len(levels) > 1 or levels[0][0] or any(isinstance(v, Operator) for _, v, _ in parts):
        raise refuse("state-structure", levels[-1][2])
    factor = _term_product([(inverse, v, span) for inverse, v, span in parts if isinstance(v, Term)])
    return Levels(tuple(LevelPart(multiply(factor, p.coefficient), p.index, p.path) for p in levels[0][1].parts))


def power_of(base: Value, exponent: Value, base_span: Span, exponent_span: Span) -> Value:
    """Return base^exponent; an operator takes whole powers from 0 to 16."""
    if isinstance(base, Levels) or isinstance(exponent, Levels):
        raise refuse("state-structure", base_span)
    if isinstance(exponent, Operator):
        raise refuse("operator-here", exponent_span, what="an exponent")
    if isinstance(base, Term):
        return power(base, exponent)
    n = whole(exponent)
    if n is None or n < 0:
        found = "an expression" if exponent.scalar is None else f"{exponent.scalar.value:.6g}"
        raise refuse("operator-power", exponent_span, found=found)
    if n > LARGEST_ORDER and base.length == 0:
        return multiplication(power(linear((w.coefficient, w.slots[0]) for w in base.words), exponent), base.setting)
    if n > LARGEST_ORDER:
        raise refuse("order-too-high", None, found=n * base.length, limit=LARGEST_ORDER)
    return base.power(n)


def negated(value: Value) -> Value:
    """Return minus the value."""
    if isinstance(value, Levels):
        return Levels(tuple(LevelPart(negative(p.coefficient), p.index, p.path) for p in value.parts))
    return -value if isinstance(value, Operator) else negative(value)


def adjoint(value: Value, span: Span) -> Value:
    """Return the adjoint of an operator, the conjugate of a function."""
    if isinstance(value, Levels):
        raise refuse("state-structure", span)
    return value.adjoint() if isinstance(value, Operator) else conjugate(value)


def as_term(value: Value, what: str, span: Span) -> Term:
    """Return a value that must be a number or a function; a function in the guise of an operator counts."""
    if isinstance(value, Term):
        return value
    if isinstance(value, Levels):
        raise refuse("level-outside-state", span)
    function = value.function if value.length == 0 else None
    if function is None:
        raise refuse("operator-here", span, what=what)
    return function.term


def as_real(value: Value, what: str, span: Span) -> Term:
    """Return a value that must be real."""
    term = as_term(value, what, span)
    if term.real:
        return term
    if not Function(term).is_real:
        shown = "complex" if term.scalar is None else f"{term.scalar.value:.6g}".replace("j", "*i")
        raise refuse("not-real", span, what=what, value=shown)
    return real_part(term)


def as_number(value: Value, what: str, span: Span, coordinate: str) -> float:
    """Return a value that must be a real, finite constant."""
    term = as_term(value, what, span)
    if term.scalar is None:
        raise refuse("not-constant", span, what=what, name=coordinate)
    return finite(as_real(term, what, span), what, span)


def finite(term: Term, what: str, span: Span) -> float:
    """Return the value of a real constant, refused where it is infinite or undefined."""
    scalar = term.scalar
    if scalar is None or not scalar.is_finite:
        raise refuse("not-finite", span, what=what, value="an expression" if scalar is None else scalar.value)
    return float(scalar.value.real)
