"""The functions under the Rayleigh quotient of one model, at points of another, with the wave carried between them."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from math import comb

import numpy as np

from specterm.analysis.carried import Carry, carry
from specterm.analysis.displaced import Shape
from specterm.analysis.state_points import StatePoints
from specterm.arrays import Array, Values
from specterm.model import Function
from specterm.model.regular import regular_slope


@dataclass(frozen=True)
class Samples:
    """`parts` (orders, orders, pieces, POINTS): what stands between conj(D^a f) and D^b f.

    `mass` (pieces, POINTS): what stands under |f|^2 in the norm; `edges` (edges,): what stands under |f|^2 at the inner ends of
    singular elements, weight included.
    """

    parts: Values
    mass: Array
    edges: Array

    def __add__(self, other: Samples) -> Samples:
        return Samples(self.parts + other.parts, self.mass + other.mass, self.edges + other.edges)

    def __sub__(self, other: Samples) -> Samples:
        return Samples(self.parts - other.parts, self.mass - other.mass, self.edges - other.edges)

    def __mul__(self, factor: float) -> Samples:
        return Samples(self.parts * factor, self.mass * factor, self.edges * factor)

    @property
    def finite(self) -> bool:
        """Say whether every number is finite."""
        return bool(np.isfinite(self.parts).all() and np.isfinite(self.edges).all())


@dataclass(frozen=True)
class Moved:
    """A shape and the way waves are carried to it; functions are measured from `origin`."""

    shape: Shape
    carry: Carry
    origin: float

    @cached_property
    def _slope(self) -> Function | None:
        """The slope of the function between the momenta, between jumps; None where it is constant."""
        between = dict(self.shape.terms).get((1, 1))
        return None if between is None or between.constant is not None else regular_slope(between)

    def at(self, points: StatePoints) -> Samples:
        """Return the functions at the points, the map and the gauge worked in."""
        orders = len(points.jets)
        x, slope = self.carry(points.x)
        twist = 1j * self.carry.turn
        parts = np.zeros((orders, orders, *x.shape), dtype=complex if twist else float)
        with np.errstate(all="ignore"):
            for (j, k), function in self.shape.terms:
                values = np.reshape(function(x.ravel()), x.shape)
                values = (values - self.origin if j == k == 0 else values) * slope ** float(1 - j - k)
                if np.iscomplexobj(values):
                    parts = parts.astype(complex)
                for a in range(j + 1):
                    for b in range(k + 1):
                        share = comb(j, a) * comb(k, b) * np.conj(twist) ** (j - a) * twist ** (k - b)
                        if share != 0:
                            parts[a, b] += (share if twist else 1.0) * values
            self._take_power(points, x, slope, parts)
        return Samples(parts, slope, self._edges(points))

    def noise(self, points: StatePoints) -> Samples:
        """Return bounds on the rounding of the functions at the points, where each stands."""
        orders = len(points.jets)
        x, slope = self.carry(points.x)
        parts = np.zeros((orders, orders, *x.shape))
        for (j, k), function in self.shape.terms:
            bound = np.reshape(function.rounding(x.ravel()), x.shape) * slope ** float(1 - j - k)
            parts[j, k] += np.nan_to_num(bound, nan=0.0, posinf=0.0)
        return Samples(parts, np.zeros_like(x), np.zeros(len(points.edges)))

    def _take_power(self, points: StatePoints, x: Array, slope: Array, parts: Values) -> None:
        """Take from the potential what the power in the wave makes of the momenta: s(s - 1) K/d^2 + s K'/d."""
        here = points.drift != 0
        if here.any():
            stiffness = dict(self.shape.terms)[(1, 1)]
            lost = points.centrifugal[here] * stiffness(x[here]) / slope[here]
            if self._slope is not None:
                lost = lost + points.drift[here] * self._slope(x[here])
            parts[0, 0][here] -= lost

    def _edges(self, points: StatePoints) -> Array:
        if not points.edges:
            return np.zeros(0)
        places, weights = np.array([edge[:2] for edge in points.edges]).T
        x, slope = self.carry(places)
        inside: Array = weights * dict(self.shape.terms)[(1, 1)](x) / slope
        return inside


def moved(base: Shape, other: Shape, hull: tuple[float, float], origin: float) -> Moved | str:
    """Return a shape ready to be sampled at the points of the base, or why it cannot be."""
    way = carry(base, other, hull)
    if isinstance(way, str):
        return way
    if other.highest > base.highest:
        return "it changes the order of the operator"
    return Moved(other, way, origin)
