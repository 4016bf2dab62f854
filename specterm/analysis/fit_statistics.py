"""What a least-squares fit knows: standard errors, correlations, and what the data cannot tell."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array, Flags

BLIND = 1e-8
"""Singular values of the scaled Jacobian below this share of the largest belong to what the data cannot tell."""
PART = 0.1
"""Numbers with this share of such a combination are named."""
TIED = 0.999
"""Correlations above this are told."""


@dataclass(frozen=True)
class Statistics:
    """`covariance` (numbers, numbers), inf on the diagonal where nothing is known, and what is to be said about it."""

    covariance: Array
    notes: tuple[str, ...]

    @property
    def errors(self) -> Array:
        """The standard errors, shape (numbers,)."""
        found: Array = np.sqrt(np.diag(self.covariance))
        return found

    @property
    def correlations(self) -> Array:
        """The correlations, (numbers, numbers); nan where nothing is known."""
        errors = np.where(np.isfinite(self.errors) & (self.errors > 0), self.errors, np.nan)
        found: Array = self.covariance / np.outer(errors, errors)
        return found


def statistics(jacobian: Array, names: Sequence[str], held: Flags) -> Statistics:
    """Return what weighted derivatives (lines, numbers) tell of the numbers; `held` are those at a bound.

    Columns are scaled to length one, so that the singular values do not depend on units.
    """
    count = len(names)
    covariance = np.zeros((count, count))
    covariance[np.diag_indices(count)] = np.inf
    notes = [f"`{name}` ended at its bound: it has no standard error" for name, at in zip(names, held, strict=True) if at]
    length = np.sqrt((jacobian**2).sum(axis=0))
    dead = (length == 0) & ~held
    notes += [f"the data cannot tell `{name}`: no line depends on it" for name, d in zip(names, dead, strict=True) if d]
    live = [int(j) for j in np.flatnonzero(~held & ~dead)]
    if not live:
        return Statistics(covariance, tuple(notes))
    _, singular, turned = np.linalg.svd(jacobian[:, live] / length[live], full_matrices=True)
    singular = np.concatenate([singular, np.zeros(len(live) - len(singular))])
    blind = singular <= BLIND * singular[0]
    notes += [_combination(turned[k], [names[j] for j in live]) for k in np.flatnonzero(blind)]
    known = turned[~blind]
    inner = (known.T / singular[~blind] ** 2) @ known / np.outer(length[live], length[live])
    unknown = (np.abs(turned[blind]) > np.sqrt(BLIND)).any(axis=0) if blind.any() else np.zeros(len(live), dtype=bool)
    covariance[np.ix_(live, live)] = inner
    lost = np.array(live)[unknown]
    covariance[lost, lost] = np.inf
    found = Statistics(covariance, ())
    return Statistics(covariance, (*notes, *_tied(found.correlations, names)))


def _combination(weights: Array, names: Sequence[str]) -> str:
    """Return what to say of a combination that the data cannot tell, in units of what each number alone could tell."""
    parts = [(abs(w), name) for w, name in zip(weights, names, strict=True) if abs(w) > PART]
    shown = [f"`{name}`" for _, name in sorted(parts, reverse=True)]
    if len(shown) == 1:
        return f"the data cannot tell {shown[0]}"
    return f"the data cannot tell {', '.join(shown[:-1])} and {shown[-1]} apart: only a combination of them"


def _tied(correlations: Array, names: Sequence[str]) -> list[str]:
    return [
        f"`{names[a]}` and `{names[b]}` are hardly told apart: their correlation is {correlations[a, b]:.6f}"
        for a in range(len(names))
        for b in range(a + 1, len(names))
        if abs(correlations[a, b]) > TIED
    ]
