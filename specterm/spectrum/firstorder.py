"""Levels of operators of first order, (B p + p B)/2 + V: in closed form on a ring, none elsewhere."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array, Counts, Values
from specterm.discrete.quadrature import gauss_legendre
from specterm.discrete.reduce import integral
from specterm.errors import PhysicsError
from specterm.model import Function, Model
from specterm.model.regular import regular_slope

MOST_WAVES = 1_000_000
"""Levels on a ring are numbered up to here."""


@dataclass(frozen=True)
class RunningStates:
    """States exp(i integral of (E - V)/B) / sqrt(|B|), normalised, for the energies `values`."""

    values: Array
    rate: Function
    drift: Function
    size: float
    places: Array

    @property
    def count(self) -> int:
        """Return the number of states."""
        return len(self.values)

    def evaluate(self, x: Array, derivative: int = 0) -> Values:
        """Return psi, d psi/dx or the second derivative of every state at the places x: shape (states, len(x))."""
        x = np.asarray(x, dtype=float)
        element = np.clip(np.searchsorted(self.places, x, side="right") - 1, 0, len(self.places) - 2)
        ones, tops = self._phases(x, element)
        angle = np.outer(self.values, ones) - tops
        psi = np.sqrt(np.abs(self.rate(x)) / self.size) * np.exp(1j * angle)
        if derivative == 0:
            return psi
        rate, steepness = self.rate(x), regular_slope(self.rate)
        growth = steepness(x) / (2 * rate) + 1j * (np.outer(self.values, rate) - self.drift(x))
        if derivative == 1:
            return psi * growth
        bend = regular_slope(steepness)(x) / (2 * rate) - (steepness(x) / rate) ** 2 / 2
        turn = np.outer(self.values, steepness(x)) - regular_slope(self.drift)(x)
        return psi * (growth**2 + bend + 1j * turn)

    def _phases(self, x: Array, element: Counts) -> tuple[Array, Array]:
        """Return the integrals of 1/B and V/B from the left end to x."""
        t, w = gauss_legendre(20)
        results = []
        for function in (self.rate, self.drift):
            half = np.diff(self.places)[:, None] / 2
            whole = (half * w * function((self.places[:-1, None] + half * (1 + t)).ravel()).reshape(len(half), -1)).sum(axis=1)
            start = np.concatenate([[0.0], np.cumsum(whole)])[element]
            part = (x - self.places[element])[:, None] / 2
            points = (self.places[element][:, None] + part * (1 + t)).ravel()
            results.append(start + (part * w * function(points).reshape(len(x), -1)).sum(axis=1))
        return results[0], results[1]


@dataclass(frozen=True)
class RunningLevels:
    """Quantum numbers, values and errors (levels,) and the states."""

    numbers: Counts
    values: Array
    error: Array
    states: RunningStates


def running_levels(model: Model, count: int, near: float | None) -> RunningLevels:
    """Return the `count` levels nearest to `near`: E_n = (2 pi (n + phase) + integral of V/B) / (integral of 1/B).

    Raises PhysicsError off a ring, where B vanishes, and without `near`, as there is neither a lowest nor a highest level.
    """
    rate, drift, edges = _rates(model)
    domain = model.domain
    around, offset, turn = running_integrals(model)
    if near is None:
        raise PhysicsError("the operator has neither a lowest nor a highest level", mend="say where to look: --near E")
    middle = (near * around - offset) / (2 * math.pi) - turn
    if not abs(middle) + count < MOST_WAVES:
        raise PhysicsError(f"levels of more than {MOST_WAVES:,} waves on the ring are out of reach", mend="look nearer to 0")
    centre = round(middle)
    numbers = centre + np.arange(-count - 1, count + 2)
    values: Array = np.asarray((2 * math.pi * (numbers + turn) + offset) / around, dtype=np.float64)
    nearest = np.sort(np.argsort(np.abs(values - near), kind="stable")[:count])
    numbers, values = numbers[nearest], values[nearest]
    order = np.argsort(values)
    numbers, values = numbers[order], values[order]
    error = 1e-14 * (np.abs(values) + abs(offset / around) + 2 * math.pi * np.abs(numbers + turn) / abs(around))
    places = np.unique(np.concatenate([np.linspace(domain.left, domain.right, 4 * int(np.abs(numbers).max() + 8)), edges]))
    size = abs(integral(rate, domain.left, domain.right, edges))
    return RunningLevels(numbers, values, error, RunningStates(values, rate, drift, size, places))


def running_integrals(model: Model) -> tuple[float, float, float]:
    """Return the integrals of 1/B and V/B around the ring, and the Bloch phase in turns; PhysicsError as `running_levels`."""
    rate, drift, edges = _rates(model)
    domain = model.domain
    around, offset = (integral(f, domain.left, domain.right, edges) for f in (rate, drift))
    return around, offset, domain.phase or 0.0


def _rates(model: Model) -> tuple[Function, Function, Array]:
    """Return 1/B, V/B and the places where they jump."""
    sturm = model.operator.sturm()
    _refuse(model, sturm.B)
    drift_by = sturm.B
    if drift_by is None:
        raise PhysicsError("the operator contains no derivative")
    rate, drift = 1 / drift_by, sturm.V / drift_by
    ends = (model.domain.left, model.domain.right)
    return rate, drift, np.unique(np.concatenate([f.edges(*ends) for f in (rate, drift)]))


def _refuse(model: Model, first: Function | None) -> None:
    """Raise PhysicsError where an operator of first or no order has no levels."""
    domain = model.domain
    if first is None:
        raise PhysicsError(
            f"`{model.main}` contains no momentum: it multiplies by a function, and its spectrum is continuous",
            mend="write an operator with p, such as p^2/2 + V",
        )
    if not domain.is_ring:
        if domain.left_end == domain.right_end == "open":
            raise PhysicsError(
                f"`{model.main}` is of first order: on an open line its spectrum is continuous and it has no levels",
                mend="use a ring: x in ring(a, b)",
            )
        raise PhysicsError(
            f"`{model.main}` is of first order: between walls, or on a half line, it is not self-adjoint",
            mend=f"the form to use is a ring: {domain.coordinate} in ring(a, b), or the operator squared",
        )
    x = np.linspace(domain.left, domain.right, 400)
    values = first(x)
    if not np.isfinite(values).all() or values.min() <= 0 <= values.max():
        raise PhysicsError("the function beside the momentum vanishes on the ring: no levels", mend="keep it of one sign")
