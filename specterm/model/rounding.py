"""A running error bound: how far double precision may have moved the value of an expression (first order, absolute).

Every constant, the coordinate itself and every operation contribute; the method is the running error analysis of Higham,
Accuracy and Stability of Numerical Algorithms (2nd ed., 2002), section 3.3 (from memory). At the place of a comparison the
branch taken is believed.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from specterm.model.arrays import Values
from specterm.model.elementary import FUNCTIONS, ORDERED
from specterm.model.scalar import ULP
from specterm.model.tape import runner
from specterm.model.term import Term
from specterm.model.walk import leaves_first
from specterm.stopping import check

Bounds = NDArray[np.float64]


def rounding(root: Term, x: NDArray[np.float64]) -> Bounds:
    """Return a bound of |computed - true| at the places x, the rounding of x itself (2^-52 |x|) included; shape of x."""
    values: dict[int, Values] = {}
    bounds: dict[int, Values] = {}
    with np.errstate(all="ignore"):
        for term in leaves_first(root):
            check()
            inputs = [values[a.digest] for a in term.args]
            errors = [bounds[a.digest] for a in term.args]
            values[term.digest], bounds[term.digest] = step(term, x, inputs, errors)
        return np.array(np.broadcast_to(np.asarray(bounds[root.digest], dtype=float), x.shape))


def step(term: Term, x: NDArray[np.float64], inputs: list[Values], errors: list[Values]) -> tuple[Values, Values]:
    """Return value and bound of one term, given those of the terms it is made of."""
    if term.kind == "constant":
        return term.data.value, term.data.slack
    if term.kind == "coordinate":
        return x, 2 * ULP * np.abs(x)
    if term.kind == "edge":
        return np.full(x.shape, np.nan), np.full(x.shape, np.nan)
    value = runner(term)(x) if term.kind in ("pieces", "spline") else runner(term)(*inputs)
    if term.kind in ("pieces", "spline"):
        return value, term.data.rounding(x)
    return value, _RULES[term.kind](term, inputs, errors, value)


def _sum(term: Term, inputs: list[Values], errors: list[Values], _value: Values) -> Values:
    total: Values = 0.0
    bound: Values = 0.0
    for k, (c, v, e) in enumerate(zip(term.data, inputs, errors, strict=True)):
        part = c.value * v
        total = total + part
        bound = bound + abs(c.value) * e + c.slack * np.abs(v) + (0 if c.value in (1, -1) else 2 * ULP) * np.abs(part)
        if k:
            bound = bound + ULP * np.abs(total)
    return bound


def _product(_term: Term, inputs: list[Values], errors: list[Values], _value: Values) -> Values:
    value, bound = inputs[0], errors[0]
    for v, e in zip(inputs[1:], errors[1:], strict=True):
        bound = np.abs(value) * e + np.abs(v) * bound + bound * e + 2 * ULP * np.abs(value * v)
        value = value * v
    return bound


def _quotient(_term: Term, inputs: list[Values], errors: list[Values], value: Values) -> Values:
    (_, bottom), (e, f) = inputs, errors
    size = np.abs(bottom)
    return (e + np.abs(value) * f) / np.maximum(size - f, size / 2) + 4 * ULP * np.abs(value)


def _power(term: Term, inputs: list[Values], errors: list[Values], value: Values) -> Values:
    n = term.data
    widest = np.abs(inputs[0]) + errors[0]
    return n * widest ** (n - 1) * errors[0] + 2 * n * ULP * np.abs(value)


def _raise(_term: Term, inputs: list[Values], errors: list[Values], value: Values) -> Values:
    return _through(np.power, inputs, errors, value) + 8 * ULP * np.abs(value)


def _call(term: Term, inputs: list[Values], errors: list[Values], value: Values) -> Values:
    function = FUNCTIONS[term.data]
    if function.jumps:
        return 0.0 * np.abs(value)
    if term.data in ("min", "max"):
        return np.max(np.broadcast_arrays(*errors), axis=0)
    bound = _through(function.value, inputs, errors, value) + function.ulps * ULP * np.abs(value)
    if function.ulps >= 16:
        inner = [function.ulps / 4 * ULP * np.abs(v) for v in inputs]
        bound = bound + _through(function.value, inputs, inner, value, term.data in ORDERED)
    return bound


def _through(
    function: Callable[..., Values], inputs: list[Values], errors: list[Values], value: Values, skip: bool = False
) -> Values:
    """Return what the errors of the arguments do to the value: the steeper of the two one-sided slopes times the error.

    The slope is taken over a step much longer than rounding (2^-26 of the argument or of 1, the smaller); `skip` leaves the
    first argument out.
    """
    total: Values = 0.0
    for k in range(1 if skip else 0, len(inputs)):
        total = total + _one_through(function, inputs, k, errors[k], value)
    return total


def _one_through(function: Callable[..., Values], inputs: list[Values], k: int, error: Values, value: Values) -> Values:
    if not np.any(error):
        return 0.0
    here = inputs[k]
    size = np.abs(here)
    step = np.maximum(np.maximum(np.abs(error), 2.0**-26 * np.minimum(size, 1.0)), 8 * np.spacing(size))
    steepest: Values = 0.0
    for sign in (-1, 1):
        moved = here + sign * step
        change = np.abs(function(*inputs[:k], moved, *inputs[k + 1 :]) - value)
        steepest = np.fmax(steepest, change / np.abs(moved - here))
    return steepest * error


def _choice(_term: Term, inputs: list[Values], errors: list[Values], _value: Values) -> Values:
    return np.where(np.not_equal(inputs[0], 0), errors[1], errors[2])


def _nothing(_term: Term, _inputs: list[Values], _errors: list[Values], value: Values) -> Values:
    return 0.0 * np.abs(value)


_RULES: dict[str, Callable[[Term, list[Values], list[Values], Values], Values]] = {
    "sum": _sum,
    "product": _product,
    "quotient": _quotient,
    "power": _power,
    "raise": _raise,
    "call": _call,
    "compare": _nothing,
    "logic": _nothing,
    "where": _choice,
    "real": lambda _t, _i, e, _v: e[0],
    "imaginary": lambda _t, _i, e, _v: e[0],
}
