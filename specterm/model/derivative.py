"""The symbolic derivative of a term, exact formal algebra kept where a function jumps."""

from __future__ import annotations

from specterm.errors import SheetError
from specterm.model.compose import call, power, where
from specterm.model.elementary import FUNCTIONS
from specterm.model.scalar import ONE, Scalar
from specterm.model.slopes import slope_pairs
from specterm.model.term import NIL, UNIT, Term, add, constant, divide, linear, make, multiply, scaled, subtract
from specterm.model.walk import leaves_first

MOST_TERMS = 10_000


def derivative(root: Term) -> Term:
    """Return d root / dx. A jump gives an "edge": the formal derivative of the jumping function, without values.

    Raises SheetError when the result has more than 10,000 distinct parts.
    """
    slopes: dict[int, Term] = {}
    order = leaves_first(root)
    for term in order:
        slopes[term.digest] = _slope(term, tuple(slopes[a.digest] for a in term.args)) if term.varies else NIL
    if len(order) > MOST_TERMS:
        raise SheetError(
            f"a derivative in this operator has more than {MOST_TERMS} terms",
            mend="write the operator with fewer products of functions between the momenta",
        )
    return slopes[root.digest]


def _slope(term: Term, slopes: tuple[Term, ...]) -> Term:
    args, kind = term.args, term.kind
    if kind == "coordinate":
        return UNIT
    if kind == "sum":
        return linear(zip(term.data, slopes, strict=True))
    if kind == "product":
        return _product(args, slopes)
    if kind == "quotient":
        return _quotient(args[0], args[1], slopes[0], slopes[1])
    if kind == "power":
        lowered = power(args[0], constant(float(term.data - 1)))
        return scaled(Scalar(float(term.data)), multiply(lowered, slopes[0]))
    if kind == "raise":
        return _raise(args[0], args[1], slopes)
    if kind in ("real", "imaginary"):
        return make(kind, slopes, real=True) if slopes[0].varies else _constant_part(kind, slopes[0])
    if kind == "where":
        return _choice(term, slopes)
    if kind == "call" and not FUNCTIONS[term.data].jumps:
        return slope_pairs(term.data, args, slopes)
    if kind == "spline":
        slope = term.data.derivative()
        return edge(term) if slope is None else make("spline", (), slope, real=True)
    return edge(term)


def edge(term: Term) -> Term:
    """Return the formal derivative of a function that jumps, or the next one of a formal derivative."""
    if term.kind == "edge":
        return make("edge", term.args, term.data + 1, real=term.real)
    return make("edge", (term,), 1, real=term.real)


def _product(args: tuple[Term, ...], slopes: tuple[Term, ...]) -> Term:
    parts = [multiply(*args[:k], slope, *args[k + 1 :]) for k, slope in enumerate(slopes) if slope != NIL]
    return add(*parts)


def _quotient(top: Term, bottom: Term, top_slope: Term, bottom_slope: Term) -> Term:
    """Return top'/bottom - top bottom'/bottom^2, the second power kept apart from what may overflow."""
    falling = divide(multiply(top, bottom_slope), power(bottom, constant(2.0)))
    return subtract(divide(top_slope, bottom), falling)


def _raise(base: Term, exponent: Term, slopes: tuple[Term, ...]) -> Term:
    parts = []
    if slopes[0] != NIL:
        lowered = power(base, linear([(ONE, exponent), (-ONE, UNIT)]))
        parts.append(multiply(exponent, lowered, slopes[0]))
    if slopes[1] != NIL:
        parts.append(multiply(power(base, exponent), call("log", base), slopes[1]))
    return add(*parts)


def _constant_part(kind: str, term: Term) -> Term:
    value = complex(term.data.value)
    return constant(Scalar(value.real if kind == "real" else value.imag, term.data.slack))


def _choice(term: Term, slopes: tuple[Term, ...]) -> Term:
    """Return the slope of the branch taken, plus an edge unless the branches are seen to meet wherever the choice changes."""
    from specterm.model.places import branches_meet

    smooth = where(term.args[0], slopes[1], slopes[2])
    return smooth if branches_meet(term) else add(smooth, edge(term))
