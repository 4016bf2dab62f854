"""Evaluation with numbers of unlimited range, for places where double precision meets inf/inf or 0*inf.

A wide number is m * 2^e with |m| in [0.5, 1) and e a float: sums, products, quotients, whole powers, exp, sinh, cosh, sqrt
and abs are carried through, every other function sees ordinary numbers.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specterm.model.arrays import Values
from specterm.model.scalar import ULP
from specterm.model.tape import runner
from specterm.model.term import Term
from specterm.model.walk import leaves_first

_LOG2E = 1.4426950408889634
_FAR = 1e300


@dataclass(frozen=True)
class Wide:
    """Arrays of m * 2^e."""

    m: Values
    e: Values

    @property
    def plain(self) -> Values:
        """The ordinary numbers, inf or 0 where they are out of range."""
        return self.m * np.exp2(np.clip(self.e, -2000, 2000))


def wide(m: Values, e: Values = 0.0) -> Wide:
    """Return m * 2^e with the size of m brought into [0.5, 1); zero has the exponent 0."""
    _, shift = np.frexp(np.abs(m))
    fine = np.isfinite(m)
    shift = np.where(fine, shift, 0)
    return Wide(m * np.exp2(-shift.astype(float)), np.where(np.equal(m, 0), 0.0, e + shift))


def evaluate(root: Term, x: NDArray[np.float64]) -> tuple[Values, NDArray[np.float64]]:
    """Return the values at x and a bound of their rounding error (relative to the value, growing with the exponents met)."""
    values: dict[int, Wide] = {}
    order = leaves_first(root)
    largest = np.zeros(x.shape)
    with np.errstate(all="ignore"):
        for term in order:
            value = _one(term, x, [values[a.digest] for a in term.args])
            values[term.digest] = value
            largest = np.fmax(largest, np.abs(value.e))
        result = np.broadcast_to(values[root.digest].plain, x.shape)
        return result, (8 * len(order) + 2 * largest) * ULP * np.abs(result)


def _one(term: Term, x: NDArray[np.float64], args: list[Wide]) -> Wide:
    if term.kind == "constant":
        return wide(np.full(x.shape, term.data.value))
    if term.kind == "coordinate":
        return wide(x)
    if term.kind in ("pieces", "spline"):
        return wide(runner(term)(x))
    rule = _RULES.get(f"{term.kind} {term.data}" if term.kind == "call" else term.kind)
    if rule is not None:
        return rule(term, args)
    return wide(np.asarray(runner(term)(*[a.plain for a in args]), dtype=None if not term.real else float))


def _sum(term: Term, args: list[Wide]) -> Wide:
    parts = [wide(c.value * a.m, a.e) for c, a in zip(term.data, args, strict=True)]
    top = parts[0].e
    for part in parts[1:]:
        top = np.where(np.equal(part.m, 0), top, np.maximum(top, part.e))
    return wide(sum(p.m * np.exp2(np.maximum(p.e - top, -2000)) for p in parts), top)


def _product(_term: Term, args: list[Wide]) -> Wide:
    m, e = args[0].m, args[0].e
    for a in args[1:]:
        m, e = m * a.m, e + a.e
    return wide(m, e)


def _power(term: Term, args: list[Wide]) -> Wide:
    return wide(args[0].m ** term.data, args[0].e * term.data)


def _sqrt(_term: Term, args: list[Wide]) -> Wide:
    odd = np.mod(args[0].e, 2)
    return wide(np.sqrt(args[0].m * (1 + odd)), (args[0].e - odd) / 2)


def _exponential(argument: Values) -> Wide:
    """Return exp: 2^k times the exponential of a small remainder, ln 2 taken in two parts; far out only the size is right."""
    k = np.rint(np.real(argument) * _LOG2E)
    rest = (argument - k * 0.693145751953125) - k * 1.4286068203094173e-06
    return wide(np.exp(np.where(np.abs(k) < 2.0**50, rest, 0.0)), np.clip(k, -_FAR, _FAR))


def _exp(_term: Term, args: list[Wide]) -> Wide:
    return _exponential(args[0].plain)


def _hyperbolic(sign: float) -> Callable[[Term, list[Wide]], Wide]:
    def rule(term: Term, args: list[Wide]) -> Wide:
        u = args[0].plain
        rising, falling = _exponential(u), _exponential(-u)
        top = np.maximum(rising.e, falling.e)
        far = rising.m * np.exp2(rising.e - top) + sign * falling.m * np.exp2(falling.e - top)
        near = np.abs(u) < 1
        return wide(np.where(near, runner(term)(u), far / 2), np.where(near, 0.0, top))

    return rule


_RULES: dict[str, Callable[[Term, list[Wide]], Wide]] = {
    "sum": _sum,
    "product": _product,
    "quotient": lambda _t, a: wide(a[0].m / a[1].m, a[0].e - a[1].e),
    "power": _power,
    "call sqrt": _sqrt,
    "call exp": _exp,
    "call sinh": _hyperbolic(-1.0),
    "call cosh": _hyperbolic(1.0),
    "call abs": lambda _t, a: Wide(np.abs(a[0].m), a[0].e),
}
