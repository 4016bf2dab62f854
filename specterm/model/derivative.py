"""The symbolic derivative of a term, exact formal algebra kept where a function jumps."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from specterm.language.catalogue import refuse
from specterm.model.compose import call, imaginary_part, power, real_part, where
from specterm.model.elementary import FUNCTIONS
from specterm.model.places import branches_meet
from specterm.model.scalar import ONE, Scalar
from specterm.model.slopes import slope_pairs
from specterm.model.term import NIL, UNIT, Term, add, constant, divide, linear, make, multiply, scaled, whole_powers
from specterm.model.walk import leaves_first

MOST_TERMS = 10_000


def derivative(root: Term) -> Term:
    """Return d root / dx. A jump gives an "edge": the formal derivative of the jumping function, without values.

    Raises SheetError when the result has more than 10,000 distinct parts.
    """
    slopes: dict[int, Term] = {}
    order = leaves_first(root)
    if len(order) > MOST_TERMS:
        raise refuse("too-many-terms", None, limit=MOST_TERMS)
    for term in order:
        slopes[term.digest] = _slope(term, slopes) if term.varies else NIL
    return slopes[root.digest]


def _slope(term: Term, slopes: Mapping[int, Term]) -> Term:
    """Return the derivative of one term, given those of the terms below it; by default it jumps."""
    if term.kind == "quotient":
        return _quotient(term, slopes)
    return _RULES.get(term.kind, _jump)(term, tuple(slopes[a.digest] for a in term.args))


def _jump(term: Term, _slopes: tuple[Term, ...]) -> Term:
    return edge(term)


def edge(term: Term) -> Term:
    """Return the formal derivative of a function that jumps, or the next one of a formal derivative."""
    if term.kind == "edge":
        return make("edge", term.args, term.data + 1, real=term.real)
    return make("edge", (term,), 1, real=term.real)


def _product(term: Term, slopes: tuple[Term, ...]) -> Term:
    parts = [multiply(*term.args[:k], slope, *term.args[k + 1 :]) for k, slope in enumerate(slopes) if slope != NIL]
    return add(*parts)


def _quotient(term: Term, slopes: Mapping[int, Term]) -> Term:
    """Return top'/bottom minus n top base'/(bottom base) for each factor base^n of the bottom."""
    top, bottom = term.args
    falling = [
        (Scalar(-float(n)), divide(multiply(top, slopes[base.digest]), multiply(bottom, base)))
        for base, n in whole_powers(bottom)
    ]
    return linear([(ONE, divide(slopes[top.digest], bottom)), *falling])


def _power(term: Term, slopes: tuple[Term, ...]) -> Term:
    lowered = power(term.args[0], constant(float(term.data - 1)))
    return scaled(Scalar(float(term.data)), multiply(lowered, slopes[0]))


def _raise(term: Term, slopes: tuple[Term, ...]) -> Term:
    base, exponent = term.args
    parts = []
    if slopes[0] != NIL:
        lowered = power(base, linear([(ONE, exponent), (-ONE, UNIT)]))
        parts.append(multiply(exponent, lowered, slopes[0]))
    if slopes[1] != NIL:
        parts.append(multiply(power(base, exponent), call("log", base), slopes[1]))
    return add(*parts)


def _part(term: Term, slopes: tuple[Term, ...]) -> Term:
    return real_part(slopes[0]) if term.kind == "real" else imaginary_part(slopes[0])


def _call(term: Term, slopes: tuple[Term, ...]) -> Term:
    return edge(term) if FUNCTIONS[term.data].jumps else slope_pairs(term.data, term.args, slopes)


def _spline(term: Term, _slopes: tuple[Term, ...]) -> Term:
    slope = term.data.derivative()
    return edge(term) if slope is None else make("spline", (), slope, real=True)


def _choice(term: Term, slopes: tuple[Term, ...]) -> Term:
    """Return the slope of the branch taken, plus an edge unless the branches are seen to meet wherever the choice changes."""
    smooth = where(term.args[0], slopes[1], slopes[2])
    return smooth if branches_meet(term) else add(smooth, edge(term))


_RULES: dict[str, Callable[[Term, tuple[Term, ...]], Term]] = {
    "coordinate": lambda _t, _s: UNIT,
    "sum": lambda t, s: linear(zip(t.data, s, strict=True)),
    "product": _product,
    "power": _power,
    "raise": _raise,
    "real": _part,
    "imaginary": _part,
    "where": _choice,
    "call": _call,
    "spline": _spline,
}
