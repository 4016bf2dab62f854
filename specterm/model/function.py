"""A function of the coordinate: an immutable resolved expression with fast evaluation, derivatives, edges and error bounds."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from specterm.model import compose, term
from specterm.model.arrays import Values
from specterm.model.derivative import derivative
from specterm.model.limits import limits
from specterm.model.places import centres, edges, knots
from specterm.model.rounding import rounding
from specterm.model.scalar import Scalar, written
from specterm.model.tape import Tape, compile_term
from specterm.model.term import Term
from specterm.model.text import show
from specterm.model.wide import evaluate

_SAMPLE = np.concatenate([s * np.geomspace(1e-3, 1e3, 61) * 1.0123456789 for s in (-1, 1)])


AT_ONCE = 200_000
"""Functions are evaluated at so many places at once: memory stays small, and a stop is heard between the pieces."""


def _in_pieces(function: Callable[[NDArray[np.float64]], NDArray[Any]], places: NDArray[np.float64]) -> NDArray[Any]:
    """Return the values of a function at many places."""
    flat = places.ravel()
    return np.concatenate([function(flat[k : k + AT_ONCE]) for k in range(0, flat.size, AT_ONCE)]).reshape(places.shape)


@dataclass(frozen=True, repr=False)
class Function:
    """A function of the coordinate; equal where the expressions are, up to the order of sums and products."""

    term: Term

    def __repr__(self) -> str:
        return f"Function({show(self.term)})"

    @cached_property
    def _tape(self) -> Tape:
        return compile_term(self.term)

    @cached_property
    def _slope(self) -> Function:
        return Function(derivative(self.term))

    def __call__(self, x: ArrayLike) -> NDArray[Any]:
        """Return the values at the places x: float64, or complex128 where the function truly is complex; same shape as x.

        Where the function is undefined the value is nan, beyond the range of numbers inf; nothing warns.
        """
        places = np.asarray(x, dtype=float)
        if places.size > AT_ONCE:
            return _in_pieces(self, places)
        values = self._raw(places)
        if np.iscomplexobj(values) and self.is_real:
            values = values.real
        return np.array(np.broadcast_to(values, places.shape))

    def _raw(self, places: NDArray[np.float64]) -> Values:
        values = np.asarray(self._tape(places))
        lost = np.isnan(values) & np.isfinite(places)
        if lost.any() and values.shape == places.shape:
            values = values.astype(complex if np.iscomplexobj(values) else float)
            values[lost] = self._rescued(places[lost])[0]
        return values

    def _rescued(self, places: NDArray[np.float64]) -> tuple[Values, NDArray[np.float64]]:
        """Return values and error bounds where double precision met inf/inf, 0*inf or 0/0."""
        values, bounds = evaluate(self.term, places)
        lost = np.isnan(values)
        if lost.any():
            values, bounds = np.array(values), np.array(bounds)
            values[lost], bounds[lost] = limits(self.term, places[lost])
        return values, bounds

    def derivative(self) -> Function:
        """Return the derivative; where the function jumps it holds an edge, which stays formal and cannot be evaluated."""
        return self._slope

    @property
    def constant(self) -> complex | float | None:
        """The value, if it does not depend on the coordinate."""
        scalar = self.term.scalar
        return None if scalar is None else scalar.value

    @cached_property
    def is_real(self) -> bool:
        """Say whether the values are real: by construction, by the conjugate being the same expression, or on a sample."""
        if self.term.real or compose.conjugate(self.term) == self.term:
            return True
        if self.term.broken or self.term.kind == "constant":
            return False
        imaginary = np.imag(self._raw(_SAMPLE))
        return bool(np.all((imaginary == 0) | np.isnan(imaginary)) and np.any(imaginary == 0))

    @property
    def has_edge(self) -> bool:
        """Say whether a function that jumps has been differentiated inside, so that this one has no values."""
        return self.term.broken

    def edges(self, left: float, right: float) -> NDArray[np.float64]:
        """Return the sorted places strictly between left and right where the function or a derivative of it jumps."""
        return edges(self.term, left, right)

    def knots(self) -> int:
        """Return how many knots of tables are in the function."""
        return knots(self.term)

    def centres(self, left: float, right: float) -> NDArray[np.float64]:
        """Return the natural places within [left, right]: zeros of every sum that depends on the coordinate."""
        return centres(self.term, left, right)

    def rounding(self, x: ArrayLike) -> NDArray[np.float64]:
        """Return a bound of |computed - true| at x, in the function's own unit (see `specterm.model.rounding`)."""
        places = np.asarray(x, dtype=float)
        if places.size > AT_ONCE:
            return _in_pieces(self.rounding, places)
        bounds = rounding(self.term, places)
        lost = np.isnan(bounds) & np.isfinite(places)
        if lost.any() and not self.term.broken:
            bounds[lost] = self._rescued(places[lost])[1]
        return bounds

    def conj(self) -> Function:
        """Return the complex conjugate."""
        return Function(compose.conjugate(self.term))

    def real(self) -> Function:
        """Return the real part."""
        return Function(compose.real_part(self.term))

    def imag(self) -> Function:
        """Return the imaginary part."""
        return Function(compose.imaginary_part(self.term))

    def __add__(self, other: Function | complex) -> Function:
        return Function(term.add(self.term, as_term(other)))

    def __radd__(self, other: complex) -> Function:
        return Function(term.add(as_term(other), self.term))

    def __sub__(self, other: Function | complex) -> Function:
        return Function(term.subtract(self.term, as_term(other)))

    def __rsub__(self, other: complex) -> Function:
        return Function(term.subtract(as_term(other), self.term))

    def __mul__(self, other: Function | complex) -> Function:
        return Function(term.multiply(self.term, as_term(other)))

    def __rmul__(self, other: complex) -> Function:
        return Function(term.multiply(as_term(other), self.term))

    def __truediv__(self, other: Function | complex) -> Function:
        return Function(term.divide(self.term, as_term(other)))

    def __rtruediv__(self, other: complex) -> Function:
        return Function(term.divide(as_term(other), self.term))

    def __pow__(self, exponent: float) -> Function:
        return Function(compose.power(self.term, as_term(exponent)))

    def __neg__(self) -> Function:
        return Function(term.negative(self.term))


def as_term(value: Function | Scalar | complex) -> Term:
    """Return the term of a function or a number."""
    if isinstance(value, Function):
        return value.term
    return term.constant(value if isinstance(value, Scalar) else written(value))


X = Function(term.COORDINATE)
"""The coordinate itself."""


def number(value: Scalar | complex) -> Function:
    """Return a constant function."""
    return Function(as_term(value))
