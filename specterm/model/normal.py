"""Normal ordering: derivatives moved to the right by the product rule, and the test whether a sum of terms vanishes."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from specterm.language.catalogue import refuse
from specterm.model.derivative import MOST_TERMS, derivative
from specterm.model.domain import Domain
from specterm.model.places import centres
from specterm.model.rounding import step
from specterm.model.scalar import Scalar
from specterm.model.term import NIL, Term, linear, multiply, spread
from specterm.model.walk import leaves_first
from specterm.stopping import check

FEW = 8
"""Every so many places of the sample are enough to see that most sums do not vanish."""
MOST_DERIVATIVES = 3_000
"""So many different functions are differentiated for one operator before it counts as having too many terms."""

Pairs = list[tuple[Scalar, Term]]
Normal = dict[int, Pairs]
"""For every power of D the coefficient, a sum of (number, function)."""


@dataclass(frozen=True)
class Ordering:
    """Normal orders and derivatives found so far, so that words with a common right end share the work."""

    normals: dict[tuple[Term, ...], Normal] = field(default_factory=dict)
    slopes: dict[Term, Term] = field(default_factory=dict)

    def word(self, slots: tuple[Term, ...]) -> Normal:
        """Return f0 D f1 ... D fn with all D on the right, built from its right end. Raises SheetError above 10,000 terms."""
        current: Normal = {0: [(Scalar(1.0), slots[-1])]}
        for k in range(len(slots) - 2, -1, -1):
            known = self.normals.get(slots[k:])
            current = self._lengthened(slots[k], current) if known is None else known
            self.normals[slots[k:]] = current
        return current

    def _lengthened(self, slot: Term, tail: Normal) -> Normal:
        """Return slot D tail."""
        moved: Normal = {}
        for power, pairs in tail.items():
            moved.setdefault(power + 1, []).extend(pairs)
            moved.setdefault(power, []).extend(self._derived(pairs))
        result = {k: [(c, multiply(slot, t)) for c, t in collect(pairs)] for k, pairs in moved.items()}
        if sum(map(len, result.values())) > MOST_TERMS:
            raise refuse("too-many-terms", None, limit=MOST_TERMS)
        return result

    def _derived(self, pairs: Pairs) -> Pairs:
        result: Pairs = []
        for c, t in pairs:
            if t not in self.slopes:
                if len(self.slopes) > MOST_DERIVATIVES:
                    raise refuse("too-many-terms", None, limit=MOST_TERMS)
                self.slopes[t] = derivative(t)
            result.extend(pair for pair in spread(c, self.slopes[t]) if pair[1] != NIL)
        return result


def normal_order(words: Iterable[tuple[Scalar, tuple[Term, ...]]], ordering: Ordering | None = None) -> Normal:
    """Return the sum of words f0 D f1 ... D fn with all D on the right, equal terms collected.

    Raises SheetError above 10,000 terms.
    """
    total: Normal = {}
    ordering = ordering or Ordering()
    for coefficient, slots in words:
        for power, pairs in ordering.word(slots).items():
            total.setdefault(power, []).extend((coefficient * c, t) for c, t in pairs)
    return {k: collected for k, pairs in total.items() if (collected := collect(pairs))}


def collect(pairs: Iterable[tuple[Scalar, Term]]) -> Pairs:
    """Return the sum with equal terms collected and constant factors in front."""
    parts = [pair for c, t in pairs for pair in spread(c, t)]
    term = linear(parts)
    if term == NIL:
        return []
    return spread(Scalar(1.0), term)


def vanishes(pairs: Sequence[tuple[Scalar, Term]], domain: Domain | None, tolerance: float = 1e-10) -> bool:
    """Say whether a sum of terms is zero: exactly, or to `tolerance` times the sum of |terms| on a sample where it has values.

    Formal derivatives of functions that jump take arbitrary fixed values, so they only vanish where they cancel. Places where
    all terms are zero or rounding tell nothing; a sum that is told nothing about does not vanish.
    """
    kept = collect(pairs)
    if not kept:
        return True
    if len(kept) == 1 and kept[0][1].kind == "constant":
        return False
    seen, small = _small(kept, sample(domain)[::FEW], tolerance)
    if seen and not small:
        return False
    seen, small = _small(kept, _telling_places(kept, domain), tolerance)
    return seen and small


def _small(kept: Pairs, x: NDArray[np.float64], tolerance: float) -> tuple[bool, bool]:
    """Say whether some of the places tells anything about a sum of terms, and whether it is zero at all of those."""
    total: Any = 0.0
    size: Any = 0.0
    noise: Any = 0.0
    with np.errstate(all="ignore"):
        for c, t in kept:
            values, bound = generic_values(t, x)
            total, size = total + c.value * values, size + abs(c.value) * np.abs(values)
            noise = noise + abs(c.value) * bound
        seen = np.isfinite(total) & np.isfinite(size) & (size > 4 * noise) & (size > 0)
        return bool(np.any(seen)), bool(np.all(np.abs(total)[seen] <= tolerance * size[seen] + noise[seen]))


def generic_values(root: Term, x: NDArray[np.float64]) -> tuple[NDArray[Any], NDArray[np.float64]]:
    """Return values at x and their rounding bound, edges replaced by arbitrary fixed functions."""
    values: dict[int, Any] = {}
    bounds: dict[int, Any] = {}
    with np.errstate(all="ignore"):
        for term in leaves_first(root):
            check()
            if term.kind == "edge":
                values[term.digest], bounds[term.digest] = _arbitrary(term, x), 0.0
                continue
            inputs, errors = [values[a.digest] for a in term.args], [bounds[a.digest] for a in term.args]
            values[term.digest], bounds[term.digest] = step(term, x, inputs, errors)
    shape = x.shape
    return np.broadcast_to(np.asarray(values[root.digest]), shape), np.broadcast_to(np.asarray(bounds[root.digest]), shape)


def _arbitrary(term: Term, x: NDArray[np.float64]) -> NDArray[Any]:
    generator = np.random.Generator(np.random.PCG64(term.digest % 2**64))
    values = generator.uniform(0.5, 2.0, x.shape)
    return values if term.real else values * np.exp(2j * np.pi * generator.uniform(size=x.shape))


def _telling_places(pairs: Pairs, domain: Domain | None) -> NDArray[np.float64]:
    """Return the usual sample, and places on every scale around the natural centres of the terms."""
    left, right = (-math.inf, math.inf) if domain is None else (domain.left, domain.right)
    marks = np.unique(np.concatenate([centres(term, left, right)[:16] for _, term in pairs[:40]]))[:64]
    steps = np.geomspace(1e-13, 1e3, 33) * 1.0123456789
    near = (marks[:, None] + np.concatenate([-steps, steps])).ravel()
    return np.concatenate([sample(domain), near[(near > left) & (near < right)]])


def sample(domain: Domain | None) -> NDArray[np.float64]:
    """Return places to compare functions at: irregular, inside the domain, over several scales where it is open."""
    steps = np.geomspace(1e-3, 50, 40) * 1.0123456789
    left, right = (-math.inf, math.inf) if domain is None else (domain.left, domain.right)
    if math.isfinite(left) and math.isfinite(right):
        return left + (right - left) * (np.arange(1, 62) * (math.sqrt(5) - 1) / 2 % 1)
    if math.isfinite(left):
        return left + steps
    if math.isfinite(right):
        return right - steps
    return np.concatenate([-steps[::-1] * 0.9876543, steps])
