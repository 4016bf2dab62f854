"""States between measurements: a wave on pieces of the coordinate or of the wave number, and the way from one to the other."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from specterm.analysis.plane_waves import plane_sums
from specterm.analysis.prepared import Prepared
from specterm.analysis.quadrature import POINTS
from specterm.arrays import Array, Flags, Values
from specterm.discrete.quadrature import gauss_legendre, legendre_projector
from specterm.errors import PhysicsError
from specterm.spectrum.result import States

SEEN = 1e-5
"""A change of axis takes in ever more of the other one until less than this share of the norm is missing."""
TURNS = 18.0
"""Largest phase, in radians, that a plane wave may turn through on one piece; 20 points integrate it to rounding."""
MOST_PRODUCTS = 2e7
"""Points on one axis times points on the other, at most."""
ALIVE = 1e-20
"""Outermost pieces with less than this share of a wave are left out of a change of axis."""


@dataclass(frozen=True)
class Wave:
    """A state as `at`, from places (n,) on its `axis` ("x" or "k", the wave number) to values (n,).

    It lives on pieces from `lows` to `highs` (m,), ascending, on each of which it is smooth and resolved by 20 points. A sum of
    eigenstates has them and its amplitudes (levels,) as its `origin`.
    """

    axis: str
    at: Callable[[Array], Values]
    lows: Array
    highs: Array
    origin: tuple[States, Values] | None = None

    @cached_property
    def rule(self) -> tuple[Array, Array]:
        """Points and weights, each (20 m,)."""
        t, w = gauss_legendre(POINTS)
        half = (self.highs - self.lows)[:, None] / 2
        return (self.lows[:, None] + half * (1 + t)).ravel(), (half * w).ravel()

    @cached_property
    def values(self) -> Values:
        """The wave at the points of its rule."""
        return np.nan_to_num(self.at(self.rule[0]))

    @cached_property
    def shares(self) -> Array:
        """The probability on each piece, (m,)."""
        share: Array = (self.rule[1] * np.abs(self.values) ** 2).reshape(-1, POINTS).sum(axis=1)
        return share

    @property
    def norm(self) -> float:
        """The probability on all pieces, 1 but for what a change of axis left out."""
        return float(self.shares.sum())

    def alive(self) -> Wave:
        """Return the wave between the first and the last piece that hold anything to speak of."""
        held = np.flatnonzero(self.shares > ALIVE * self.norm)
        some = slice(held[0], held[-1] + 1) if len(held) else slice(None)
        return Wave(self.axis, self.at, self.lows[some], self.highs[some])

    def cut(self, places: Array) -> Wave:
        """Return the same wave with its pieces cut at the places."""
        piece = np.searchsorted(self.lows, places, side="right") - 1
        held = (piece >= 0) & (places > self.lows[np.clip(piece, 0, None)]) & (places < self.highs[np.clip(piece, 0, None)])
        new = np.unique(places[held])
        return Wave(self.axis, self.at, np.sort(np.append(self.lows, new)), np.sort(np.append(self.highs, new)))

    def finer(self, reach: float) -> Wave:
        """Return the same wave on pieces short enough for plane waves up to a wave number `reach`."""
        lengths = self.highs - self.lows
        parts = np.maximum(1, np.ceil(lengths * reach * 2 / TURNS)).astype(int)
        cuts = [low + length * np.arange(1, n) / n for low, length, n in zip(self.lows, lengths, parts, strict=True) if n > 1]
        return self.cut(np.concatenate(cuts)) if cuts else self

    def only(self, chosen: Flags) -> Wave:
        """Return the wave on the chosen pieces (m,) alone, normalised; PhysicsError where it is zero there."""
        lows, highs = self.lows[chosen], self.highs[chosen]
        size = float(np.sqrt(self.shares[chosen].sum()))
        if not size > 0:
            raise PhysicsError("this outcome has probability 0 in this state", mend="choose another outcome")
        at = self.at

        def inside(x: Array) -> Values:
            place = np.searchsorted(lows, x, side="right") - 1
            held = (place >= 0) & (x <= highs[np.clip(place, 0, None)])
            return np.where(held, np.nan_to_num(at(x)) / size, 0)

        return Wave(self.axis, inside, lows, highs)


def of_prepared(prepared: Prepared) -> Wave:
    """Return a prepared state as a wave over the coordinate."""
    points = prepared.x.reshape(-1, POINTS)
    t, _ = gauss_legendre(POINTS)
    half = (points[:, -1] - points[:, 0]) / (t[-1] - t[0])
    middle = (points[:, -1] + points[:, 0]) / 2
    lows = middle - half
    return Wave("x", prepared.wave, lows, np.append(lows[1:], middle[-1] + half[-1]))


def turned(wave: Wave, span: tuple[float, float] | None = None) -> Wave:
    """Return the wave over the other axis, (2 pi)^(-1/2) times the integral with exp(-+ i k x), as far as it lives.

    With a `span` only that part of the other axis is taken. Without one, the reach is doubled until all but 1e-5 of the norm
    is in, or a limit on the work is hit: `Wave.norm` says what is.
    """
    wave = wave.alive()
    extent = float(max(wave.highs[-1] - wave.lows[0], 1e-300))
    centre, reach = _extent(wave) if span is None else ((span[0] + span[1]) / 2, max(abs(span[0]), abs(span[1])))
    while True:
        fine = wave.finer(reach)
        low, high = span or (centre - reach, centre + reach)
        pieces = max(8, int(np.ceil((high - low) * extent / TURNS)))
        found = _transformed(fine, (low, high), pieces)
        if span is not None or wave.norm - found.norm < SEEN or len(fine.rule[0]) * pieces * POINTS > MOST_PRODUCTS / 4:
            return found
        reach *= 2


def _transformed(fine: Wave, span: tuple[float, float], pieces: int) -> Wave:
    """Return the wave over the other axis on even pieces of a span, as polynomials beside the wave of the middle place.

    A piece is so short that no place turns it through more than 4.5 radians either way: degree 19 leaves 1e-11.
    """
    sign = -1 if fine.axis == "x" else 1
    x, w = fine.rule
    middle = float(x[0] + x[-1]) / 2
    half = (span[1] - span[0]) / (2 * pieces)
    centres: Array = span[0] + half * (2 * np.arange(pieces, dtype=np.float64) + 1)
    t, _ = gauss_legendre(POINTS)
    values = plane_sums(x - middle, w * fine.values / np.sqrt(2 * np.pi), centres, half * t, sign)
    legendre = values @ legendre_projector(POINTS)

    def at(k: Array) -> Values:
        piece = np.clip(((k - span[0]) / (2 * half)).astype(int), 0, pieces - 1)
        near = np.polynomial.legendre.legvander((k - centres[piece]) / half, POINTS - 1)
        return np.einsum("kn,kn->k", near, legendre[piece]) * np.exp(sign * 1j * middle * k)

    edges = np.linspace(*span, pieces + 1)
    return Wave("k" if fine.axis == "x" else "x", at, edges[:-1], edges[1:])


def _extent(wave: Wave) -> tuple[float, float]:
    """Return where the wave sits on the other axis and how far it reaches there, from mean and spread of its slope."""
    x, w = wave.rule
    whole = float(wave.highs[-1] - wave.lows[0])
    step = np.maximum(1e-6 * np.repeat(wave.highs - wave.lows, POINTS), 1e-9 * whole)
    slope = (wave.at(x + step) - wave.at(x - step)) / (2 * step)
    flow = float((w * np.imag(wave.values.conj() * slope)).sum()) / wave.norm
    square = float((w * np.abs(slope) ** 2).sum()) / wave.norm
    reach = 6 * float(np.sqrt(max(0.0, square - flow**2))) + 10.0 / whole
    return (flow if wave.axis == "x" else -flow), reach

