"""Derivatives of Rayleigh quotients of eigenstates, integrated on pieces until they no longer change."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from specterm.analysis.samples import Samples
from specterm.analysis.state_points import Pieces, Sampler, StatePoints
from specterm.arrays import Array, Counts, Values
from specterm.spectrum.accuracy import SAFETY

AGREE = 1e-12
"""A piece is done when its halves agree with it to this share of the whole."""
ROUNDS = 60
NARROWEST = 2.0**-40
"""Pieces are not halved below this share of their element."""
MOST_PIECES = 20_000
ROUGH = 3.0
"""By how much the error of a state may bend more than the state."""
STIFF = 6.0
"""Further factor on the error of a state in an element with a power taken out."""

Slopes = Callable[[StatePoints], Sequence[tuple[Samples, Samples]]]
"""For points, the derivative of the samples with respect to each number and the doubt about it."""


@dataclass
class Totals:
    """Sums over pieces, each (numbers, pairs): integrals, of the moduli, what was missed, what is doubted.

    `steep` are the squares of the norm of what the derivative makes of the state, an estimate.
    """

    value: Values
    size: Array
    missed: Array
    doubt: Array
    steep: Array


@dataclass(frozen=True)
class Carried:
    """The states of a spectrum as `sampler` gives them; `values` (levels,) are measured from the origin of the samples.

    `pairs` (pairs, 2) are the rows and columns wanted: first every level with itself, then those within groups.
    """

    sampler: Sampler
    values: Array
    pairs: Counts
    highest: int

    def mean_size(self, points: StatePoints) -> Callable[[Samples], float]:
        """Return what measures samples: the integral of the moduli over the average of the states."""
        spread = [np.sqrt((np.abs(jet) ** 2).mean(axis=0)) for jet in points.jets]
        weights = np.array([[points.w * a * b for b in spread] for a in spread])
        edge = (np.abs(points.edge_waves) ** 2).mean(axis=0) if points.edge_waves is not None else np.zeros(0)
        reach = float(np.abs(self.values).max(initial=0.0))

        def size(samples: Samples) -> float:
            inner = float((weights * np.abs(samples.parts)).sum()) + float((edge * np.abs(samples.edges)).sum())
            return inner + reach * float((weights[0, 0] * np.abs(samples.mass)).sum())

        return size

    def integrate(self, slopes: Slopes, count: int) -> Totals:
        """Return the integrals for `count` numbers, on pieces halved until each agrees with its halves."""
        shape = (count, len(self.pairs))
        total = Totals(np.zeros(shape, dtype=complex), np.zeros(shape), np.zeros(shape), np.zeros(shape), np.zeros(shape))
        pieces = self.sampler.whole()
        whole = self._on(pieces, slopes)
        scale = whole[1].sum(axis=2)
        for number in range(ROUNDS):
            halves = pieces.halved(np.ones(len(pieces.low), dtype=bool))
            finer = self._on(halves, slopes)
            off = np.abs(whole[0] - _joined(finer[0]))
            rough = (off > AGREE * scale[:, :, None]).any(axis=(0, 1))
            rough &= pieces.high - pieces.low > NARROWEST
            if number == ROUNDS - 1 or 2 * rough.sum() > MOST_PIECES:
                rough[:] = False
            done = np.concatenate([~rough, ~rough])
            total.value += finer[0][:, :, done].sum(axis=2)
            total.size += finer[1][:, :, done].sum(axis=2)
            total.doubt += finer[2][:, :, done].sum(axis=2)
            total.steep += finer[3][:, :, done].sum(axis=2)
            total.missed += off[:, :, ~rough].sum(axis=2)
            if not rough.any():
                break
            again = np.concatenate([rough, rough])
            pieces = Pieces(halves.element[again], halves.low[again], halves.high[again])
            whole = tuple(part[:, :, again] for part in finer)  # type: ignore[assignment]
        return total

    def _on(self, pieces: Pieces, slopes: Slopes) -> tuple[Values, Array, Array, Array]:
        """Return integrals, of moduli, of doubts and of squares on each piece, each (numbers, pairs, pieces)."""
        points = self.sampler.points(pieces, self.highest)
        shape = (len(self.pairs), len(pieces.low))
        results = []
        for slope, doubt in slopes(points):
            value, size = np.zeros(shape, dtype=complex), np.zeros(shape)
            unsure = np.zeros(shape)
            for a, b, density in self._densities(points):
                part, mass = slope.parts[a, b], slope.mass if a == b == 0 else 0.0
                under = part - self.level_values[:, None, None] * mass if a == b == 0 else part
                value += (density * under).sum(axis=2)
                size += (np.abs(density) * np.abs(under)).sum(axis=2)
                unsure += (np.abs(density) * np.abs(doubt.parts[a, b])).sum(axis=2)
            self._add_edges(points, slope, (value, size))
            results.append((value, size, unsure, self._steepness(points, slope)))
        parts = zip(*results, strict=True)
        value, size, unsure, steep = (np.array(part) for part in parts)
        return value, size, unsure, steep

    @property
    def level_values(self) -> Array:
        """The value each pair is measured from, shape (pairs,)."""
        found: Array = self.values[self.pairs].mean(axis=1)
        return found

    def _densities(self, points: StatePoints) -> list[tuple[int, int, Values]]:
        """Return w conj(D^a f) D^b g for each pair (pairs, pieces, POINTS), by a and b."""
        bra, ket = points.jets[:, self.pairs[:, 0]].conj(), points.jets[:, self.pairs[:, 1]]
        orders = range(len(points.jets))
        return [(a, b, points.w * bra[a] * ket[b]) for a in orders for b in orders]

    def _add_edges(self, points: StatePoints, slope: Samples, sums: tuple[Values, Array]) -> None:
        """Add the terms at the inner ends of singular elements to the piece that reaches them."""
        if points.edge_waves is None:
            return
        bra, ket = points.edge_waves[self.pairs[:, 0]].conj(), points.edge_waves[self.pairs[:, 1]]
        for number, (_, _, piece) in enumerate(points.edges):
            share = bra[:, number] * ket[:, number] * slope.edges[number]
            sums[0][:, piece] += share
            sums[1][:, piece] += np.abs(share)

    def _steepness(self, points: StatePoints, slope: Samples) -> Array:
        """Return the integrals of |dV f|^2 and, for derivatives, of |dK f'|^2 by the wave number, on each piece."""
        own = points.jets[:, self.pairs[:, 1]]
        flat = slope.parts[0, 0] - self.level_values[:, None, None] * slope.mass
        total: Array = (points.w * np.abs(flat * own[0]) ** 2).sum(axis=2)
        for k in range(1, len(own)):
            size = (points.w * np.abs(own[k - 1]) ** 2).sum(axis=(1, 2))
            rate = (points.w * np.abs(own[k]) ** 2).sum(axis=(1, 2)) / np.maximum(size, np.finfo(float).tiny)
            strength = np.abs(slope.parts[k, k]) * np.sqrt(rate.max(initial=0.0)) ** k
            total = total + ROUGH**2 * (points.w * np.abs(strength * own[k]) ** 2).sum(axis=2)
        return total

    def left_out(self, slopes: Slopes, sample: Samples, points: StatePoints) -> Array:
        """Return what functions the basis does not hold would change, (numbers, levels): 0 where the basis is complete.

        To first order in both: the residual of the state against them, and that of the derivative (hierarchical estimate).
        """
        found = list(slopes(points))
        levels = len(self.values)
        if points.spare is None:
            return np.zeros((len(found), levels))
        own = np.einsum("mpq,mpq,pq,pq->mp", points.spare[1], points.spare[1], points.w, np.abs(sample.parts[1, 1]))
        miss = self._against(points, sample)
        factor = np.where((points.drift != 0).any(axis=1), STIFF, 1.0)
        share = np.abs(miss) * factor / np.maximum(own, np.finfo(float).tiny)
        return np.array(
            [2 * SAFETY * (share * np.abs(self._against(points, slope))).sum(axis=(1, 2)) for slope, _ in found]
        )

    def _against(self, points: StatePoints, samples: Samples) -> Values:
        """Return the form between each spare function and each level, (levels, functions, pieces)."""
        assert points.spare is not None
        levels = len(self.values)
        total = np.zeros((levels, points.spare.shape[1], points.spare.shape[2]), dtype=complex)
        for a in range(len(points.jets)):
            for b in range(len(points.jets)):
                part = np.broadcast_to(samples.parts[a, b], (levels, *samples.mass.shape))
                if a == b == 0:
                    part = part - self.values[:, None, None] * samples.mass
                total += np.einsum("mpq,npq->nmp", points.spare[a], points.w * part * points.jets[b])
        return total


def _joined(halves: Values) -> Values:
    """Return the sums of the two halves of each piece."""
    count = halves.shape[-1] // 2
    joined: Values = halves[..., :count] + halves[..., count:]
    return joined
