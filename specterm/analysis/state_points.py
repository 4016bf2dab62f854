"""Eigenstates and their derivatives at points that integrate their products piece by piece, singular ends included."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Protocol

import numpy as np

from specterm.arrays import Array, Counts, Values
from specterm.discrete.quadrature import gauss_jacobi, gauss_legendre
from specterm.discrete.reference import functions

if TYPE_CHECKING:
    from specterm.discrete.mesh import Edge, Mesh
    from specterm.spectrum.result import States
    from specterm.spectrum.states import ElementStates

POINTS = 20
"""Gauss points on each piece."""
FLATTEST = -0.999
"""Least power of the distance from a singular end that a rule of its own integrates."""


@dataclass(frozen=True)
class Pieces:
    """Pieces of the elements of a mesh: which element, and from where to where in it (-1 to 1); shapes (pieces,)."""

    element: Counts
    low: Array
    high: Array

    def halved(self, which: Array) -> Pieces:
        """Return the two halves of each marked piece, the left ones first."""
        element, low, high = self.element[which], self.low[which], self.high[which]
        middle = (low + high) / 2
        join = np.concatenate
        return Pieces(join([element, element]), join([low, middle]), join([middle, high]))


@dataclass(frozen=True)
class StatePoints:
    """Points `x` and weights `w`, both (pieces, POINTS), and the waves there: `jets` (orders, levels, pieces, POINTS).

    Where a power d**s of the distance d from a singular end has been taken out, the jets are those of the other factor, times
    the power, and `centrifugal` holds s(s - 1)/d**2 and `drift` the signed s/d; both are 0 elsewhere. `edges` are the places
    where the power ends, with s/h for the length h of its element and the number of its piece, `edge_waves` (levels, edges) the
    waves there.
    `spare` (orders, functions, pieces, POINTS) are functions the basis does not hold, None where there is no such basis.
    """

    x: Array
    w: Array
    jets: Values
    centrifugal: Array
    drift: Array
    edges: tuple[tuple[float, float, int], ...] = ()
    edge_waves: Values | None = None
    spare: Array | None = None


class Sampler(Protocol):
    """Where the waves of a spectrum can be looked at."""

    def whole(self) -> Pieces:
        """Return the whole mesh, one piece an element."""

    def points(self, pieces: Pieces, highest: int, *, spare: bool = False) -> StatePoints:
        """Return points on pieces, with derivatives up to the order `highest`."""


@dataclass(frozen=True)
class ElementSampler:
    """Waves on spectral elements, without the phase that a first-order term gave them."""

    states: ElementStates

    @property
    def mesh(self) -> Mesh:
        """The mesh of the states."""
        return self.states.mesh

    def whole(self) -> Pieces:
        """Return the whole mesh, one piece an element."""
        count = len(self.mesh.lengths)
        return Pieces(np.arange(count), np.full(count, -1.0), np.ones(count))

    def points(self, pieces: Pieces, highest: int, *, spare: bool = False) -> StatePoints:
        """Return points on pieces; only first derivatives are asked for here (`highest` is 1)."""
        mesh = self.mesh
        t, w = self._rule(pieces)
        h = mesh.lengths[pieces.element][:, None]
        x = mesh.places[pieces.element][:, None] + h / 2 * (1 + t)
        right = mesh.places[pieces.element + 1][:, None] - h / 2 * (1 - t)
        x = np.where(t > 0, right, x)
        factor, centrifugal, drift = self._powers(pieces, t, h)
        values, slopes = (table.reshape(*t.shape, -1) for table in functions(mesh.order, t.ravel()))
        slopes = slopes * (2 / h)[..., None]
        n = mesh.order + 1
        taken = self.states.solved.coefficients[pieces.element]
        jets = np.array([np.moveaxis(table[..., :n] @ taken, 2, 0) * factor for table in (values, slopes)][: highest + 1])
        beyond = np.array([np.moveaxis(a[..., n:], 2, 0) * factor for a in (values, slopes)]) if spare else None
        edges, waves = self._edges(pieces)
        return StatePoints(x, w * h / 2, jets, centrifugal, drift, edges, waves, beyond)

    def _ends(self) -> tuple[tuple[int, Edge, float], ...]:
        """Return the elements with a power taken out: number, edge, and 1 or -1 for the side of the singular end."""
        last = len(self.mesh.lengths) - 1
        both = ((0, self.mesh.left, 1.0), (last, self.mesh.right, -1.0))
        return tuple(end for end in both if end[1].power is not None)

    def _rule(self, pieces: Pieces) -> tuple[Array, Array]:
        """Return places in the elements and weights, both (pieces, POINTS); at singular ends for d**(2s - 2 + alpha)."""
        u, w = gauss_legendre(POINTS)
        half = ((pieces.high - pieces.low) / 2)[:, None]
        t, weight = pieces.low[:, None] + half * (1 + u), half * w
        for number, edge, sign in self._ends():
            touching = (pieces.element == number) & ((pieces.low if sign > 0 else pieces.high) == -sign)
            power = edge.power or 0.0
            steep = 2 * power - 2 + edge.alpha if power else edge.alpha - 1
            steep = steep if steep > FLATTEST else max(2 * power + edge.alpha - 1, FLATTEST)
            v, special = gauss_jacobi(POINTS, steep)
            special = special / (1 + v) ** steep
            t[touching] = sign * (half[touching] * (1 + v) - 1)
            weight[touching] = half[touching] * special
        return t, weight

    def _powers(self, pieces: Pieces, t: Array, h: Array) -> tuple[Array, Array, Array]:
        """Return the power taken out, s(s - 1)/d^2 and the signed s/d at each point."""
        factor, centrifugal, drift = np.ones_like(t), np.zeros_like(t), np.zeros_like(t)
        for number, edge, sign in self._ends():
            here = pieces.element == number
            s, d = edge.power or 0.0, h[here] / 2 * (1 + sign * t[here])
            factor[here] *= (d / h[here]) ** s
            centrifugal[here] += s * (s - 1) / d**2
            drift[here] += sign * s / d
        return factor, centrifugal, drift

    def _edges(self, pieces: Pieces) -> tuple[tuple[tuple[float, float, int], ...], Values | None]:
        """Return the inner ends of powered elements that pieces reach, with s/h and the piece, and the waves there."""
        edges, waves = [], []
        for number, edge, sign in self._ends():
            reach = (pieces.element == number) & ((pieces.high if sign > 0 else pieces.low) == sign)
            if reach.any():
                place = float(self.mesh.places[number + (1 if sign > 0 else 0)])
                edges.append((place, (edge.power or 0.0) / float(self.mesh.lengths[number]), int(np.argmax(reach))))
                waves.append(self.states.solved.coefficients[number, 1 if sign > 0 else 0])
        return tuple(edges), np.array(waves).T if waves else None


@dataclass(frozen=True)
class WaveSampler:
    """Waves that give their derivatives themselves, such as sums of exp(i k x)."""

    states: States

    def whole(self) -> Pieces:
        """Return the whole interval, a piece between each two places of the states."""
        count = len(self.states.places) - 1
        return Pieces(np.arange(count), np.full(count, -1.0), np.ones(count))

    def points(self, pieces: Pieces, highest: int, *, spare: bool = False) -> StatePoints:  # noqa: ARG002 - no basis to ask
        """Return points on pieces, with derivatives up to the order `highest`."""
        u, w = gauss_legendre(POINTS)
        places = self.states.places
        h = np.diff(places)[pieces.element][:, None]
        half = ((pieces.high - pieces.low) / 2)[:, None]
        t = pieces.low[:, None] + half * (1 + u)
        x = places[pieces.element][:, None] + h / 2 * (1 + t)
        jets = np.array([self.states.evaluate(x.ravel(), k).reshape(-1, *x.shape) for k in range(highest + 1)])
        none = np.zeros_like(x)
        return StatePoints(x, half * w * h / 2, jets, none, none)
