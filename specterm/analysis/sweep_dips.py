"""Where along a sweep neighbouring levels come closest, as far as its points tell."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from specterm.analysis.sweep_point import Point
from specterm.analysis.sweep_request import SweepRequest
from specterm.arrays import Array, Counts

BEYOND = 4.0
"""Gaps differ where they differ by so many times their errors."""
FLAT = 1e-9
"""... and by this share of themselves."""


@dataclass(frozen=True)
class Dip:
    """A smallest gap of levels number `lower` and `lower` + 1 between two values of the parameter.

    `touching` says at which ends of the range (left, right) the gap is zero within its error.
    """

    request: SweepRequest
    lower: int
    left: float
    right: float
    touching: tuple[bool, bool] = (False, False)


def dips(request: SweepRequest, points: Sequence[Point | None], rows: Counts) -> list[Dip]:
    """Return the brackets of smallest gaps of a sweep over one parameter; `rows` are its branches.

    Where the gap at the points has a minimum that errors do not explain, and where two neighbouring branches change places.
    """
    order = np.argsort(request.axes[0].values, kind="stable")
    values = np.asarray(request.axes[0].values)[order]
    ascending = [points[k] for k in order]
    pairs = {n for point in points if point is not None for n in point.numbers if n + 1 in point.numbers}
    found = []
    for lower in sorted(pairs):
        gaps, errors = _sampled(ascending, lower)
        zero = gaps <= BEYOND * errors
        for low, high in _brackets(gaps, errors, _swaps(ascending, rows[order], lower)):
            if np.isfinite(gaps[low : high + 1]).all() and values[low] < values[high]:
                ends = bool(low == 0 and zero[0]), bool(high == len(gaps) - 1 and zero[-1])
                found.append(Dip(request, lower, float(values[low]), float(values[high]), ends))
    return found


def _sampled(points: Sequence[Point | None], lower: int) -> tuple[Array, Array]:
    """Return the gap above the level of a number, and its error, at each point; nan where one is missing."""
    gaps, errors = np.full(len(points), np.nan), np.full(len(points), np.nan)
    for k, point in enumerate(points):
        if point is None or lower not in point.numbers or lower + 1 not in point.numbers:
            continue
        a, b = point.numbers.index(lower), point.numbers.index(lower + 1)
        below, above = point.errors[a], point.errors[b]
        if below is not None and above is not None:
            gaps[k], errors[k] = abs(point.levels[b] - point.levels[a]), below + above
    return gaps, errors


def _swaps(points: Sequence[Point | None], rows: Counts, lower: int) -> list[int]:
    """Return the points k at which two branches are on levels `lower` and the next that have changed places at k + 1."""
    pairs = []
    for point, row in zip(points, rows, strict=True):
        branches = dict.fromkeys((lower, lower + 1), -1)
        for branch, place in enumerate(row):
            if point is not None and place >= 0 and point.numbers[place] in branches:
                branches[point.numbers[place]] = branch
        pairs.append((branches[lower], branches[lower + 1]))
    return [k for k in range(len(pairs) - 1) if min(pairs[k]) >= 0 and pairs[k] == pairs[k + 1][::-1]]


def _brackets(gaps: Array, errors: Array, swaps: Sequence[int]) -> list[tuple[int, int]]:
    """Return first and last point of brackets: around runs of equal gaps lower than both their neighbours, and swaps.

    Gaps that are zero within their errors are equal; levels that are one all along have no smallest gap.
    """
    last = len(gaps) - 1
    zero = gaps <= BEYOND * errors

    def above(k: int, low: int) -> bool:
        """Say whether the gap at k is larger than at `low`, beyond errors."""
        slack = BEYOND * (errors[k] + errors[low]) + FLAT * gaps[low]
        return bool(gaps[k] > gaps[low] + slack) and not zero[k]

    found = []
    low = 0
    while low <= last:
        high = low
        while high < last and np.isfinite(gaps[high + 1]) and not above(high + 1, low) and not above(low, high + 1):
            high += 1
        falls, rises = low > 0 and above(low - 1, low), high < last and above(high + 1, low)
        if (falls or (low == 0 and zero[0])) and (rises or (high == last and zero[last])) and (falls or rises):
            found.append((max(0, low - 1), min(last, high + 1)))
        low = high + 1
    unseen = [k for k in swaps if not any(low <= k and k + 1 <= high for low, high in found)]
    return found + [(max(0, k - 1), min(last, k + 2)) for k in unseen if not (zero[k] and zero[k + 1])]
