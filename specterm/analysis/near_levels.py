"""What is known of an observable in a level that others come so near that their states may be mixed."""

from __future__ import annotations

import math

import numpy as np

from specterm.analysis.commutator import joined
from specterm.analysis.matrix_elements import jets, shared_rule
from specterm.analysis.observables import Observable
from specterm.arrays import Array, Values
from specterm.spectrum import Spectrum

LOST = 0.1
"""A state that may be off by this much in norm has no error to speak of."""


def near_rows(spectrum: Spectrum, index: int) -> list[int]:
    """Return the rows of the levels that may be mixed with one, itself included: neighbours nearer than 100 errors."""
    values, blur = _values(spectrum)
    row = [level.index for level in spectrum.levels].index(index)
    first = last = row
    while first > 0 and _joins(values, blur, first - 1):
        first -= 1
    while last < len(values) - 1 and _joins(values, blur, last):
        last += 1
    return list(range(first, last + 1))


def _joins(values: Array, blur: Array, row: int) -> bool:
    """Say whether a level may be mixed with the next one by more than `LOST`."""
    return bool(values[row + 1] - values[row] <= (blur[row] + blur[row + 1]) / LOST**2)


def _values(spectrum: Spectrum) -> tuple[Array, Array]:
    """Return the levels and their errors, infinite where there is none."""
    errors = [math.inf if level.error is None else level.error for level in spectrum.levels]
    return np.array([level.value for level in spectrum.levels]), np.array(errors)


def mixing_with_others(spectrum: Spectrum, rows: list[int]) -> float:
    """Return a bound on the error of the span of some states, from the errors of their levels and the distance to others.

    1 where a neighbour of theirs was not computed.
    """
    values, blur = _values(spectrum)
    first, last = rows[0], rows[-1]
    if last == len(values) - 1 or (first == 0 and spectrum.levels[0].index != 0):
        return 1.0
    gap = min(values[last + 1] - values[last], values[first] - values[first - 1] if first else math.inf)
    blurs = float(blur[rows].sum())
    return min(1.0, math.sqrt(blurs / gap) + blurs / gap) if gap > 0 and math.isfinite(blurs) else 1.0


def ranges(
    spectrum: Spectrum, asked: Observable, rows: list[int], mean: float
) -> tuple[tuple[float, float], tuple[float, float]]:
    """Return between what A - mean lies in the mixtures of some states, and between what their spreads lie."""
    states = spectrum.states
    if states is None:
        return (0.0, 0.0), (0.0, 0.0)
    x, w = joined([shared_rule(asked, states, states)])
    jet = jets(states, x, asked.order)
    psi: Values = jet(x, 0)[rows]
    moved = asked.apply(jet, x)[rows] - mean * psi
    means = np.linalg.eigvalsh(_hermitian((w * psi.conj()) @ moved.T))
    squares = np.linalg.eigvalsh(_hermitian((w * moved.conj()) @ moved.T))
    low, high = float(means[0]), float(means[-1])
    farthest, nearest = max(low**2, high**2), 0.0 if low <= 0 <= high else min(low**2, high**2)
    least, most = max(0.0, float(squares[0]) - farthest), max(0.0, float(squares[-1]) - nearest)
    return (low, high), (math.sqrt(least), math.sqrt(most))


def _hermitian(matrix: Values) -> Values:
    return (matrix + matrix.conj().T) / 2
