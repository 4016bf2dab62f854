"""Terms that are polynomials of low degree in the coordinate, and their real zeros in closed form."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from specterm.model.scalar import ONE, ZERO, Scalar
from specterm.model.term import Term
from specterm.model.walk import leaves_first

Coefficients = tuple[Scalar, ...]


def coefficients(root: Term, degree: int) -> Coefficients | None:
    """Return the coefficients, lowest power first, if the term is a real polynomial of at most this degree, else None."""
    found: dict[int, Coefficients | None] = {}
    for term in leaves_first(root):
        args = [found[a.digest] for a in term.args]
        known = [a for a in args if a is not None]
        found[term.digest] = _of(term, known, degree) if len(known) == len(args) else None
    return found[root.digest]


def _of(term: Term, args: list[Coefficients], degree: int) -> Coefficients | None:
    result: Coefficients | None = None
    if term.kind == "constant":
        result = (term.data,) if term.real else None
    elif term.kind == "coordinate":
        result = (ZERO, ONE)
    elif term.kind == "sum":
        result = (ZERO,)
        for c, a in zip(term.data, args, strict=True):
            result = _added(result, tuple(c * k for k in a)) if c.is_real else (ZERO,) * (degree + 2)
    elif term.kind in ("product", "power"):
        result = (ONE,)
        for a in args * term.data if term.kind == "power" and term.data <= degree else args:
            result = _multiplied(result, a)
        if term.kind == "power" and term.data > degree:
            result = None
    return result if result is not None and len(result) <= degree + 1 else None


def _added(a: Coefficients, b: Coefficients) -> Coefficients:
    if len(a) < len(b):
        a, b = b, a
    return tuple(c + b[k] if k < len(b) else c for k, c in enumerate(a))


def _multiplied(a: Coefficients, b: Coefficients) -> Coefficients:
    total = [ZERO] * (len(a) + len(b) - 1)
    for j, p in enumerate(a):
        for k, q in enumerate(b):
            total[j + k] = total[j + k] + p * q
    return tuple(total)


def roots(polynomial: Coefficients) -> NDArray[np.float64]:
    """Return the simple real zeros of a polynomial of degree <= 2, sorted; a double zero changes no sign and is left out.

    The stable form of the quadratic formula: Press et al., Numerical Recipes 5.6 (from memory).
    """
    values = [float(np.real(c.value)) for c in polynomial]
    while values and values[-1] == 0:
        values.pop()
    if len(values) < 2:
        return np.empty(0)
    if len(values) == 2:
        return _finite([-values[0] / values[1]])
    c, b, a = values
    under = b * b - 4 * a * c
    if not under > 0:
        return np.empty(0)
    q = -0.5 * (b + math.copysign(math.sqrt(under), b))
    return _finite([q / a, c / q] if q != 0 else [0.0])


def _finite(values: list[float]) -> NDArray[np.float64]:
    return np.sort(np.array([v for v in values if math.isfinite(v)]))
