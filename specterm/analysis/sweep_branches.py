"""Levels followed along a sweep by the overlaps of their states from point to point."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specterm.analysis.overlap import LINKED, assigned, groups_of
from specterm.analysis.sweep_point import Point
from specterm.arrays import Array, Counts, Values

CLEAR = 0.75
"""A branch whose state shares less than this with every level is mixed: it is carried on as it was."""
TOGETHER = 2.0
"""Levels nearer than this many times the sum of their errors are one as far as is known: any mixture of them is a state."""


def branches(points: Sequence[Point | None]) -> Counts:
    """Return the place of each branch among the levels of each point, shape (points, branches), -1 where it is not known.

    Branch b is the state that is level b at the first point that has levels; states that come in later are further branches.
    Where states are mixed just at a point, a branch is carried on as the mixture nearest to what it was before, so that it goes
    through a crossing that falls on a point, or between two, and follows an avoided crossing that the points resolve. Where a
    point has no links to the one before, or overlaps tell less than half of the states, the order of the levels decides.
    """
    rows: list[list[int]] = []
    carried: dict[int, Values] = {}
    before = 0
    total = 0
    for point in points:
        size = 0 if point is None else len(point.levels)
        row = [-1] * total
        if point is not None and size:
            linked = carried and before and point.links
            row, carried = _next(point, carried, before, total) if linked else _anew(total, size)
            for place in range(size):
                if place not in row:
                    carried[len(row)] = _unit(place, size)
                    row.append(place)
            total, before = len(row), size
        elif point is not None:
            carried, before = {}, 0
        rows.append(row)
    found = np.full((len(rows), total), -1, dtype=np.int64)
    for place, row in enumerate(rows):
        found[place, : len(row)] = row
    return found


def _unit(place: int, size: int) -> Values:
    state = np.zeros(size, dtype=complex)
    state[place] = 1.0
    return state


def _anew(total: int, size: int) -> tuple[list[int], dict[int, Values]]:
    """Return branches by the order of the levels."""
    row = [place if place < size else -1 for place in range(total)]
    return row, {place: _unit(place, size) for place in range(min(total, size))}


def _next(point: Point, carried: dict[int, Values], before: int, total: int) -> tuple[list[int], dict[int, Values]]:
    """Return where the branches go at a point, and their states as mixtures of its levels."""
    size = len(point.levels)
    amplitudes = np.zeros((before, size), dtype=complex)
    for a, b, re, im in point.links:
        if a < before:
            amplitudes[a, b] = complex(re, im)
    names = sorted(carried)
    mixtures = np.array([carried[name] for name in names]) @ amplitudes
    places = assigned(np.abs(mixtures) ** 2)
    row = [-1] * total
    if 2 * sum(place is not None for place in places) < min(len(names), size):
        return _by_order(carried, total, size)
    fresh: dict[int, Values] = {}
    for name, place in zip(names, places, strict=True):
        if place is not None:
            row[name] = place
            fresh[name] = _unit(place, size)
    for some, columns in _mixed(point, mixtures, places):
        turned = _nearest_basis(mixtures[np.ix_(some, columns)])
        for number, k in enumerate(some):
            state = np.zeros(size, dtype=complex)
            state[columns] = turned[number]
            fresh[names[k]] = state
    return row, fresh


def _by_order(carried: dict[int, Values], total: int, size: int) -> tuple[list[int], dict[int, Values]]:
    """Return branches that stay at their places: what a step does that is too wide for overlaps to tell anything."""
    places = {name: int(np.argmax(np.abs(state))) for name, state in carried.items()}
    if len(set(places.values())) < len(places):
        places = {name: place for place, name in enumerate(sorted(places, key=lambda name: places[name]))}
    kept = {name: place for name, place in places.items() if place < size}
    return [kept.get(name, -1) for name in range(total)], {name: _unit(place, size) for name, place in kept.items()}


def _mixed(point: Point, mixtures: Values, places: Sequence[int | None]) -> list[tuple[list[int], list[int]]]:
    """Return rows of the mixtures and the levels they are made of, for groups that are not clear, as many rows as levels."""
    shares: Array = np.abs(mixtures) ** 2
    one = _one_level(point)
    unclear = [k for k, place in enumerate(places) if place is not None and (shares[k, place] < CLEAR or one[place])]
    linked = np.zeros(shares.shape, dtype=bool)
    columns = [place for k in unclear if (place := places[k]) is not None]
    linked[np.ix_(unclear, columns)] = shares[np.ix_(unclear, columns)] > LINKED
    return [(rows, some) for rows, some in groups_of(linked) if len(rows) == len(some) > 1]


def _one_level(point: Point) -> list[bool]:
    """Say of each level whether a neighbour is within the errors."""
    near = [False] * len(point.levels)
    for k in range(len(point.levels) - 1):
        a, b = point.errors[k], point.errors[k + 1]
        if a is not None and b is not None and abs(point.levels[k + 1] - point.levels[k]) <= TOGETHER * (a + b):
            near[k] = near[k + 1] = True
    return near


def _nearest_basis(block: Values) -> Values:
    """Return the orthonormal rows nearest to the rows of a square block (its polar factor)."""
    left, _, right = np.linalg.svd(block)
    basis: Values = left @ right
    return basis
