"""Terms made of terms beyond sums and products: powers, functions, comparisons, choices, complex parts. Constants fold."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from specterm.model.arrays import Values
from specterm.model.elementary import FUNCTIONS
from specterm.model.scalar import ONE, ULP, Scalar, snap
from specterm.model.term import NIL, UNIT, Term, constant, divide, linear, make, multiply, scaled, split, subtract
from specterm.model.walk import rebuild

COMPARISONS: dict[str, Callable[..., Values]] = {
    "<": np.less,
    "<=": np.less_equal,
    ">": np.greater,
    ">=": np.greater_equal,
    "==": np.equal,
    "!=": np.not_equal,
}
LARGEST_POWER = 64
"""Whole exponents up to this size are repeated multiplication; others go through the general power."""


def power(base: Term, exponent: Term) -> Term:
    """Return base^exponent; a real base that is negative under a broken exponent gives nan."""
    n = whole(exponent)
    if n is None or abs(n) > LARGEST_POWER:
        if base.kind == "constant" and exponent.kind == "constant":
            return folded(np.power, (base, exponent), 8)
        return make("raise", (base, exponent))
    if n < 0:
        return divide(UNIT, power(base, constant(-n)))
    return _whole_power(base, int(n))


def whole(term: Term) -> int | None:
    """Return the value of a constant that is a whole number, else None."""
    scalar = term.scalar
    if scalar is None or isinstance(scalar.value, complex) or not math.isfinite(scalar.value):
        return None
    return int(scalar.value) if scalar.value == int(scalar.value) and abs(scalar.value) < 2**53 else None


def _whole_power(base: Term, n: int) -> Term:
    if n == 0:
        return UNIT
    coefficient, core = split(base)
    factor = ONE
    for _ in range(n):
        factor = factor * coefficient
    if core.kind == "constant":
        return constant(factor)
    if core.kind == "quotient":
        return scaled(factor, divide(_whole_power(core.args[0], n), _whole_power(core.args[1], n)))
    if core.kind == "product":
        return scaled(factor, multiply(*(_whole_power(a, n) for a in core.args)))
    if core.kind == "power":
        core, n = core.args[0], core.data * n
    return scaled(factor, core if n == 1 else make("power", (core,), n))


def call(name: str, *args: Term) -> Term:
    """Return the elementary function `name` (its first name) of `args`; abs of a complex argument is a root of squares."""
    function = FUNCTIONS[name]
    if name == "abs" and not args[0].real:
        x, y = real_part(args[0]), imaginary_part(args[0])
        return call("hypot", x, y)
    if all(a.kind == "constant" for a in args):
        return folded(function.value, args, function.ulps)
    if name in ("min", "max") and len(args) == 1:
        return args[0]
    return make("call", args, name)


def folded(value: Callable[..., Values], args: tuple[Term, ...], ulps: float) -> Term:
    """Return the constant value(*args) with its slack: what the slack of each argument does, plus the function's own error."""
    numbers = [np.complex128(v) if isinstance(v := a.data.value, complex) else np.float64(v) for a in args]
    with np.errstate(all="ignore"):
        result = _number(value(*numbers))
        slack = (ulps + 1) * ULP * abs(result)
        for k, argument in enumerate(args):
            if argument.data.slack > 0:
                slack += argument.data.slack * _slope(value, numbers, k, argument.data.slack)
    slack = float(slack)
    if not any(isinstance(n, complex) for n in numbers):
        return constant(Scalar(result, slack))
    return constant(Scalar(snap(result, slack), slack))


def _slope(value: Callable[..., Values], numbers: list[Values], k: int, slack: float) -> float:
    """Return a bound of |d value / d argument k| from both sides, over a step that rounding does not swamp."""
    step = max(8 * slack, 2.0**-26 * min(abs(numbers[k]), 1.0))
    here = _number(value(*numbers))
    slopes = [0.0]
    for sign in (-1, 1):
        moved = [*numbers[:k], numbers[k] + sign * step, *numbers[k + 1 :]]
        slopes.append(abs(_number(value(*moved)) - here) / step)
    return max(s for s in slopes if math.isfinite(s))


def _number(value: Values) -> Values:
    return complex(value) if np.iscomplexobj(value) else float(value)


def compare(operator: str, a: Term, b: Term) -> Term:
    """Return the truth value (1 or 0) of a comparison of real terms."""
    if a.kind == "constant" and b.kind == "constant":
        return constant(float(COMPARISONS[operator](a.data.value, b.data.value)))
    return make("compare", (a, b), operator)


def logic(operator: str, *args: Term) -> Term:
    """Return the truth value of `and`, `or` (two terms) or `not` (one); what is not 0 is true."""
    truths = [None if a.kind != "constant" else bool(a.data.value != 0) for a in args]
    if operator == "not":
        return make("logic", args, "not") if truths[0] is None else constant(float(not truths[0]))
    decisive = operator == "or"
    if decisive in truths:
        return constant(float(decisive))
    if None not in truths:
        return constant(float(not decisive))
    return make("logic", args, operator)


def where(condition: Term, a: Term, b: Term) -> Term:
    """Return a where the condition is not 0, else b."""
    if condition.kind == "constant":
        return a if condition.data.value != 0 else b
    return a if a == b else make("where", (condition, a, b), real=a.real and b.real)


def conjugate(term: Term) -> Term:
    """Return the complex conjugate for a real coordinate (every function of the table obeys f(z*) = f(z)* off its cuts)."""
    if term.real:
        return term
    return rebuild(term, _conjugate_constant)


def _conjugate_constant(scalar: Scalar) -> Scalar:
    return scalar.conjugate()


def real_part(term: Term) -> Term:
    """Return the real part."""
    if term.real:
        return term
    if term.kind == "constant":
        return constant(Scalar(term.data.value.real, term.data.slack))
    if term.kind == "sum":
        return linear(_part(c, t, imaginary=False) for c, t in zip(term.data, term.args, strict=True))
    return make("real", (term,), real=True)


def imaginary_part(term: Term) -> Term:
    """Return the imaginary part."""
    if term.real:
        return NIL
    if term.kind == "constant":
        return constant(Scalar(term.data.value.imag, term.data.slack))
    if term.kind == "sum":
        return linear(_part(c, t, imaginary=True) for c, t in zip(term.data, term.args, strict=True))
    return make("imaginary", (term,), real=True)


def _part(coefficient: Scalar, term: Term, *, imaginary: bool) -> tuple[Scalar, Term]:
    """Return the real or imaginary part of coefficient times term, as one pair."""
    value = complex(coefficient.value)
    a, b = Scalar(value.real, coefficient.slack), Scalar(value.imag, coefficient.slack)
    if term.real:
        return (b if imaginary else a), term
    x, y = make("real", (term,), real=True), make("imaginary", (term,), real=True)
    return ONE, linear([(b, x), (a, y)] if imaginary else [(a, x), (-b, y)])


def modulus(a: Term, b: Term) -> Term:
    """Return a - b floor(a/b), between 0 and b."""
    return subtract(a, multiply(b, call("floor", divide(a, b))))


def argument(term: Term) -> Term:
    """Return the phase of a complex term, from -pi to pi."""
    return call("atan2", imaginary_part(term), real_part(term))
