"""Derivative rules of the elementary functions, one row a function (calculus; Bessel and Airy: DLMF 10.6, 10.29, 9.2)."""

from __future__ import annotations

import math
from collections.abc import Callable

from specterm.model.compose import call, compare, power, where
from specterm.model.scalar import Scalar, written
from specterm.model.term import UNIT, Term, add, constant, divide, linear, multiply, negative, scaled, subtract


def _c(value: float) -> Scalar:
    return written(value)


def _times(value: float, term: Term) -> Term:
    return scaled(_c(value), term)


def _squared(u: Term) -> Term:
    return power(u, constant(2.0))


def _over(u: Term) -> Term:
    return divide(UNIT, u)


def _root(u: Term) -> Term:
    return call("sqrt", u)


def _one_minus_square(u: Term) -> Term:
    return multiply(subtract(UNIT, u), add(UNIT, u))


def _square_minus_one(u: Term) -> Term:
    return multiply(subtract(u, UNIT), add(u, UNIT))


def _one_plus_square(u: Term) -> Term:
    return add(UNIT, _squared(u))


def _neighbours(name: str, n: Term, u: Term, lower: float, upper: float) -> Term:
    """Return lower f_{n-1}(u) + upper f_{n+1}(u)."""
    return linear([(_c(lower), call(name, subtract(n, UNIT), u)), (_c(upper), call(name, add(n, UNIT), u))])


def _gaussian(u: Term, factor: float) -> Term:
    return _times(factor / math.sqrt(math.pi), call("exp", negative(_squared(u))))


def _reciprocal_circle(u: Term) -> Term:
    """Return 1/(u^2 sqrt(1 - 1/u^2)), the slope of asec."""
    return _over(multiply(_squared(u), _root(subtract(UNIT, _over(_squared(u))))))


_ONE: dict[str, Callable[[Term], Term]] = {
    "exp": lambda u: call("exp", u),
    "expm1": lambda u: call("exp", u),
    "log": _over,
    "log1p": lambda u: _over(add(UNIT, u)),
    "log10": lambda u: _times(1 / math.log(10), _over(u)),
    "log2": lambda u: _times(1 / math.log(2), _over(u)),
    "sqrt": lambda u: _times(0.5, _over(_root(u))),
    "cbrt": lambda u: _times(1 / 3, _over(_squared(call("cbrt", u)))),
    "sin": lambda u: call("cos", u),
    "cos": lambda u: negative(call("sin", u)),
    "tan": lambda u: _squared(call("sec", u)),
    "sec": lambda u: multiply(call("sec", u), call("tan", u)),
    "csc": lambda u: negative(multiply(call("csc", u), call("cot", u))),
    "cot": lambda u: negative(_squared(call("csc", u))),
    "asin": lambda u: _over(_root(_one_minus_square(u))),
    "acos": lambda u: negative(_over(_root(_one_minus_square(u)))),
    "atan": lambda u: _over(_one_plus_square(u)),
    "asec": _reciprocal_circle,
    "acsc": lambda u: negative(_reciprocal_circle(u)),
    "acot": lambda u: negative(_over(_one_plus_square(u))),
    "sinh": lambda u: call("cosh", u),
    "cosh": lambda u: call("sinh", u),
    "tanh": lambda u: _squared(call("sech", u)),
    "sech": lambda u: negative(multiply(call("sech", u), call("tanh", u))),
    "csch": lambda u: negative(multiply(call("csch", u), call("coth", u))),
    "coth": lambda u: negative(_squared(call("csch", u))),
    "asinh": lambda u: _over(_root(_one_plus_square(u))),
    "acosh": lambda u: _over(_root(_square_minus_one(u))),
    "atanh": lambda u: _over(_one_minus_square(u)),
    "asech": lambda u: negative(_over(multiply(u, _root(_one_minus_square(u))))),
    "acsch": lambda u: negative(_over(multiply(_squared(u), _root(add(UNIT, _over(_squared(u))))))),
    "acoth": lambda u: _over(_one_minus_square(u)),
    "abs": lambda u: call("sign", u),
    "erf": lambda u: _gaussian(u, 2.0),
    "erfc": lambda u: _gaussian(u, -2.0),
    "gamma": lambda u: multiply(call("gamma", u), call("digamma", u)),
    "lgamma": lambda u: call("digamma", u),
    "digamma": lambda u: call("polygamma", UNIT, u),
    "airyai": lambda u: call("airyaiprime", u),
    "airybi": lambda u: call("airybiprime", u),
    "airyaiprime": lambda u: multiply(u, call("airyai", u)),
    "airybiprime": lambda u: multiply(u, call("airybi", u)),
}

_ORDERED: dict[str, Callable[[Term, Term], Term]] = {
    "polygamma": lambda n, u: call("polygamma", add(n, UNIT), u),
    "besselj": lambda n, u: _neighbours("besselj", n, u, 0.5, -0.5),
    "bessely": lambda n, u: _neighbours("bessely", n, u, 0.5, -0.5),
    "besseli": lambda n, u: _neighbours("besseli", n, u, 0.5, 0.5),
    "besselk": lambda n, u: _neighbours("besselk", n, u, -0.5, -0.5),
}


def slope_pairs(name: str, args: tuple[Term, ...], slopes: tuple[Term, ...]) -> Term:
    """Return d/dx name(args), given the derivatives of the arguments; not for functions that jump."""
    if name in _ONE:
        return multiply(_ONE[name](args[0]), slopes[0])
    if name in _ORDERED:
        return multiply(_ORDERED[name](*args), slopes[1])
    if name in ("min", "max"):
        return _extreme(name, args, slopes)
    u, v = args
    if name == "hypot":
        return divide(add(multiply(u, slopes[0]), multiply(v, slopes[1])), call("hypot", u, v))
    square = add(_squared(u), _squared(v))
    return divide(subtract(multiply(v, slopes[0]), multiply(u, slopes[1])), square)


def _extreme(name: str, args: tuple[Term, ...], slopes: tuple[Term, ...]) -> Term:
    """Return the slope of the argument that is smallest (largest); the first one where two are equal."""
    best, slope = args[-1], slopes[-1]
    for u, du in zip(args[-2::-1], slopes[-2::-1], strict=True):
        slope = where(compare("<=" if name == "min" else ">=", u, best), du, slope)
        best = call(name, u, best)
    return slope
