"""Waves carried from one domain to another: jumps to jumps and ends to ends, straight lines between."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from specterm.analysis.displaced import SAME, Shape
from specterm.arrays import Array, Flags

EVEN = 1e-12
"""A map whose slopes differ by no more is one straight line."""


@dataclass(frozen=True)
class Carry:
    """The map from `places` to `moved` (both ascending), straight lines between, the identity outside; and a gauge.

    `turn` is the phase per length put onto the wave, in terms of the old coordinate.
    """

    places: Array
    moved: Array
    turn: float

    @property
    def slopes(self) -> Array:
        """The slope of the map between the places, 1 outside, shape (places + 1,)."""
        inner = np.diff(self.moved) / np.diff(self.places)
        return np.concatenate([[1.0], inner, [1.0]])

    def __call__(self, x: Array) -> tuple[Array, Array]:
        """Return where the places x go and the slope of the map there."""
        if len(self.places) == 0 or np.array_equal(self.places, self.moved):
            return x, np.ones_like(x)
        piece = np.clip(np.searchsorted(self.places, x, side="right"), 1, len(self.places) - 1)
        slope = self.slopes[piece]
        start = self.places[piece - 1]
        inside = (x >= self.places[0]) & (x <= self.places[-1])
        return np.where(inside, self.moved[piece - 1] + slope * (x - start), x), np.where(inside, slope, 1.0)


def carry(base: Shape, other: Shape, hull: tuple[float, float]) -> Carry | str:
    """Return the map from one shape to another, or why there is none; `hull` is the part of the domain the states live on."""
    if np.isfinite(base.ends).tolist() != np.isfinite(other.ends).tolist() or (base.phase is None) != (other.phase is None):
        return "the ends of the domain change their nature with it"
    pairs = _pairs(base.anchors, other.anchors)
    if pairs is None:
        return "places where something jumps appear or vanish with it"
    places, moved = pairs
    still = [end for end, fixed in zip(hull, base.ends, strict=True) if not np.isfinite(fixed)]
    outer = np.array([end for end in still if len(places) == 0 or not places[0] <= end <= places[-1]])
    order = np.argsort(np.concatenate([places, outer]))
    places, moved = (np.concatenate([ends, outer])[order] for ends in (places, moved))
    if (np.diff(moved) <= 0).any():
        return "places where something jumps pass each other"
    turn = 0.0 if base.phase is None or other.phase is None else (other.phase - base.phase) / (base.ends[1] - base.ends[0])
    found = Carry(places, moved, turn)
    inner = found.slopes[1:-1]
    if max(base.highest, other.highest) > 1 and len(inner) and inner.max() - inner.min() > EVEN:
        return "it moves a jump, and the operator is of higher order than two"
    return found


def _pairs(base: Array, other: Array) -> tuple[Array, Array] | None:
    """Return which places go where; those that stay need no partner. None where the others do not match by number.

    Jumps that the base does not have yet, while all of its own stay, are left where they come up: they are small.
    """
    if len(base) == len(other):
        return base, other
    width = SAME * max(np.abs(base).max(initial=0.0), np.abs(other).max(initial=0.0))
    loose = [~_near(a, b, width) for a, b in ((base, other), (other, base))]
    stay = base[~loose[0]]
    if not loose[0].any():
        return stay, stay
    if loose[0].sum() != loose[1].sum():
        return None
    places, moved = np.concatenate([stay, base[loose[0]]]), np.concatenate([stay, other[loose[1]]])
    order = np.argsort(places)
    return places[order], moved[order]


def _near(places: Array, others: Array, width: float) -> Flags:
    """Say which places are among the others."""
    if len(others) == 0:
        return np.zeros(len(places), dtype=bool)
    at = np.clip(np.searchsorted(others, places), 1, len(others) - 1) if len(others) > 1 else np.zeros(len(places), dtype=int)
    near: Flags = np.minimum(np.abs(places - others[at]), np.abs(places - others[np.maximum(at - 1, 0)])) <= width
    return near
