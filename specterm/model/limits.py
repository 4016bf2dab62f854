"""Values by continuity at places where an expression reads 0/0, as sin(x)/x at 0."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specterm.model.arrays import Values
from specterm.model.rounding import rounding
from specterm.model.tape import compile_term
from specterm.model.term import Term

_FROM_ZERO = (1e-150, 1e-75, 1e-30, 1e-15, 1e-11, 1e-8, 1e-6)
_FROM_ELSEWHERE = (2.0**-50, 2.0**-44, 2.0**-38, 2.0**-32, 2.0**-26, 2.0**-20)
_AGREE = 1e-11


def limits(root: Term, x: NDArray[np.float64]) -> tuple[Values, NDArray[np.float64]]:
    """Return the values at x by continuity and a bound of their error; nan where both sides do not agree on one.

    Both sides are evaluated at several small distances and at twice each. The distance with the smallest sum of rounding bounds
    and differences between the four values counts, and only if that sum is below 1e-11 of the value.
    """
    tape = compile_term(root)
    best = np.full(x.shape, np.nan, dtype=float if root.real else complex)
    error = np.full(x.shape, np.inf)
    for at_zero, elsewhere in zip(_FROM_ZERO, (*_FROM_ELSEWHERE, 2.0**-16), strict=True):
        step = np.where(x == 0, at_zero, np.abs(x) * elsewhere)
        near = [np.broadcast_to(np.asarray(tape(x + s * step)), x.shape) for s in (-2, -1, 1, 2)]
        with np.errstate(all="ignore"):
            middle = (near[1] + near[2]) / 2
            spread = sum(np.abs(value - middle) for value in near)
            doubt = spread + rounding(root, x + step) + rounding(root, x - step)
            better = (doubt < error) & (doubt <= _AGREE * np.abs(middle))
        best = np.where(better, middle, best)
        error = np.where(better, doubt, error)
    return best, np.where(np.isnan(best), np.nan, error)
