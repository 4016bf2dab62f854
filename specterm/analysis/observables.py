"""Observables made ready: what an operator does to a wave between its jumps, its weak form, and the unit it is measured in."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from specterm.analysis.unit_names import Scaled, shown_unit, unit_of
from specterm.arrays import Array, Values
from specterm.errors import PhysicsError
from specterm.model import Function, Model, Operator
from specterm.model.regular import regular_part
from specterm.model.term import linear

Jet = Callable[[Array, int], Values]
"""Derivatives of waves: jet(x, k) has shape (n,) for one wave or (waves, n) for many."""
HIGHEST = 2


@dataclass(frozen=True)
class Observable:
    """An operator of order 0 to 2 as `text` says it.

    `terms`: the weak form, ((j, k), c) for integrals of conj(D^j f) c D^k g; `parts`: c_0 ... c_order with A = sum of c_k D^k
    between the places where something jumps; `unit`: the name of its unit, empty where that is not known;
    `shown` is what numbers of it are divided by to be shown, and the unit they then have.
    """

    text: str
    operator: Operator
    terms: tuple[tuple[tuple[int, int], Function], ...]
    parts: tuple[Function, ...]
    unit: str
    shown: Scaled = (1.0, "")

    @property
    def order(self) -> int:
        """The highest derivative in it."""
        return len(self.parts) - 1

    @property
    def highest(self) -> int:
        """The highest derivative that is taken of a wave, in the weak form too."""
        return max([self.order, *(max(key) for key, _ in self.terms)])

    def functions(self) -> tuple[Function, ...]:
        """Return every function in it."""
        return (*self.parts, *(c for _, c in self.terms))

    def apply(self, jet: Jet, x: Array) -> Values:
        """Return A psi at places x off the jumps, where `jet` gives the derivatives of psi; nan and inf count as 0."""
        with np.errstate(all="ignore"):
            total = np.sum([c(x) * jet(x, k) for k, c in enumerate(self.parts)], axis=0)
        return np.nan_to_num(total, nan=0.0, posinf=0.0, neginf=0.0)

    def flux(self, jet: Jet, x: Array) -> Values:
        """Return what must not jump for A psi to have no pulses: the sum of c D^k psi over the terms (1, k)."""
        parts = [c(x) * jet(x, k) for (j, k), c in self.terms if j == 1]
        return np.nan_to_num(np.sum(parts, axis=0)) if parts else np.zeros_like(x)


def observable(model: Model, text: str, *, hermitian: bool = True) -> Observable:
    """Return a name of the sheet or an expression made ready.

    Raises SheetError where it cannot be understood; PhysicsError where it is not Hermitian (unless allowed), of an order above
    two, or differentiates a jump.
    """
    operator = model.observable(text)
    fault = operator.hermitian() if hermitian else None
    if fault is not None:
        raise PhysicsError(f"`{text}` is not an observable: {fault.reason}", mend=fault.mend)
    return replace(of_operator(operator, text, unit_of(model, text)), shown=shown_unit(model, text))


def of_operator(operator: Operator, text: str, unit: str = "") -> Observable:
    """Return an operator made ready; PhysicsError above order two or where a jump is differentiated."""
    order = operator.order
    if order > HIGHEST:
        raise PhysicsError(
            f"`{text}` is of order {order} in the momentum; expectations are available up to order {HIGHEST}",
            mend="the level values themselves are available at any even order",
        )
    terms = operator.form().terms
    if any(c.has_edge for _, c in terms) or any(max(key) > HIGHEST for key, _ in terms):
        raise PhysicsError(
            f"a function that jumps is differentiated in `{text}`",
            mend="write it so that the jump is not differentiated: p*f*p instead of f*p^2",
        )
    normal = operator.normal
    parts = tuple(regular_part(Function(linear(normal.get(k, ())))) for k in range(order + 1))
    return Observable(text, operator, terms, parts, unit)


def weak(terms: Sequence[tuple[tuple[int, int], Function]], left: Jet, right: Jet, x: Array, w: Array) -> tuple[Values, Array]:
    """Return the integrals of conj(D^j f) c D^k g summed over the terms, and those of the moduli.

    Waves given as (n,) give numbers, as (waves, n) a matrix (waves, waves).
    """
    total, size = np.zeros((), dtype=complex), np.zeros(())
    for (j, k), coefficient in terms:
        with np.errstate(all="ignore"):
            values = np.nan_to_num(coefficient(x), nan=0.0, posinf=0.0, neginf=0.0)
        bra, ket = left(x, j), w * values * right(x, k)
        total = total + bra.conj() @ ket.T
        size = size + np.abs(bra) @ np.abs(ket).T
    return total, size
