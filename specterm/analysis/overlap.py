"""Overlaps between the eigenstates of two spectra, and which levels are the same states."""

from __future__ import annotations

import numpy as np

from specterm.arrays import Array, Flags, Values
from specterm.discrete.quadrature import gauss_legendre
from specterm.spectrum import Spectrum
from specterm.spectrum.states import ElementStates

POINTS = 14
"""Gauss points for each piece on which both states are smooth: exact for products of the elements' polynomials."""
SURE = 0.6
"""States that share more than this are the same."""
SAME = 0.5
"""Groups of as many states on either side are the same that share more than this for each state."""
LIKELY = 0.25
"""States that share at least this, and with no other state as much, are taken for the same when nothing better is left."""
LINKED = 0.02
"""An overlap from which on two states may belong to one group."""
AT_ONCE = 4096


def amplitudes(left: Spectrum, right: Spectrum) -> Values:
    """Return <a|b> for each state a of `left` and b of `right`, shape (left levels, right levels).

    The two may have other domains and meshes; each state is 0 off its own. Where neither has levels the array is empty.
    Integrated by 14 Gauss points on each piece between the places of both; tested to 1e-10 against displaced oscillator states.
    """
    one, other = left.states, right.states
    shape = (len(left.levels), len(right.levels))
    if one is None or other is None or 0 in shape:
        return np.zeros(shape)
    if isinstance(one, ElementStates) and isinstance(other, ElementStates) and _one_mesh(one, other):
        return _on_one_mesh(one, other)
    low, high = max(one.places[0], other.places[0]), min(one.places[-1], other.places[-1])
    if not low < high:
        return np.zeros(shape)
    places = np.unique(np.concatenate([[low, high], _inside(one.places, low, high), _inside(other.places, low, high)]))
    t, w = gauss_legendre(POINTS)
    half = np.diff(places)[:, None] / 2
    x, weights = (places[:-1, None] + half * (1 + t)).ravel(), (half * w).ravel()
    parts = []
    for start in range(0, len(x), AT_ONCE):
        some = slice(start, start + AT_ONCE)
        parts.append((one.evaluate(x[some]).conj() * weights[some]) @ other.evaluate(x[some]).T)
    total: Values = np.sum(parts, axis=0)
    return total


def _one_mesh(one: ElementStates, other: ElementStates) -> bool:
    """Say whether the states of both are polynomials on the same elements, with nothing taken out of them."""
    meshes = (one.mesh, other.mesh)
    plain = all(s.twist is None for s in (one, other)) and all(m.left.power is None and m.right.power is None for m in meshes)
    return plain and meshes[0].order == meshes[1].order and np.array_equal(meshes[0].places, meshes[1].places)


def _on_one_mesh(one: ElementStates, other: ElementStates) -> Values:
    """Return <a|b> from the values at the mesh's own points of integration."""
    weights = one.solved.condensed.grid.mass.ravel()
    product: Values = (one.sampled.conj().T * weights) @ other.sampled
    return product


def overlaps(left: Spectrum, right: Spectrum) -> Array:
    """Return |<a|b>|^2 for each state a of `left` and b of `right`, shape (left levels, right levels), as `amplitudes` does."""
    return np.abs(amplitudes(left, right)) ** 2


def matched(left: Spectrum, right: Spectrum) -> tuple[int | None, ...]:
    """Return for each level of `left` the place in `right` of the level that is the same state, None where there is none.

    The matching of the largest overlap in all. States mixed among each other, as degenerate and nearly equal levels are, count
    as a group that is the same on both sides; within it the order decides. After a large change, where states share less than
    half with any other, those that share the most with each other are matched.
    """
    return assigned(overlaps(left, right))


def assigned(shares: Array) -> tuple[int | None, ...]:
    """Return the matching, as `matched` does, from overlaps |<a|b>|^2 of shape (left levels, right levels)."""
    from scipy.optimize import linear_sum_assignment  # noqa: PLC0415 - heavy, and only matching needs it

    found: list[int | None] = [None] * len(shares)
    rows, columns = linear_sum_assignment(-shares)
    sure = shares[rows, columns] > SURE
    for row, column in zip(rows[sure], columns[sure], strict=True):
        found[row] = int(column)
    free = np.ones(shares.shape, dtype=bool)
    free[rows[sure], :] = False
    free[:, columns[sure]] = False
    for group, partners in groups_of(free & (shares > LINKED)):
        if len(group) == len(partners) and shares[np.ix_(group, partners)].sum() >= SAME * len(group):
            for row, column in zip(group, partners, strict=True):
                found[row] = column
    for row, column in zip(rows[~sure], columns[~sure], strict=True):
        best = max(shares[row].max(), shares[:, column].max())
        if found[row] is None and column not in found and shares[row, column] >= max(LIKELY, best):
            found[row] = int(column)
    return tuple(found)


def groups_of(linked: Flags) -> list[tuple[list[int], list[int]]]:
    """Return rows and columns, each ascending, of the parts that hang together through `linked` (rows, columns)."""
    groups: list[tuple[list[int], list[int]]] = []
    left = [row for row in range(len(linked)) if linked[row].any()]
    while left:
        rows: Flags = np.zeros(len(linked), dtype=bool)
        rows[left[0]] = True
        size = 0
        while rows.sum() > size:
            size = int(rows.sum())
            columns = np.asarray(linked[rows].any(axis=0))
            rows = np.asarray(linked[:, columns].any(axis=1))
        groups.append((np.flatnonzero(rows).tolist(), np.flatnonzero(columns).tolist()))
        left = [row for row in left if not rows[row]]
    return groups


def _inside(places: Array, low: float, high: float) -> Array:
    return places[(places > low) & (places < high)]
