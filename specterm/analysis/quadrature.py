"""Integrals of functions that may be narrower than the elements of a spectrum: pieces are halved until each is resolved."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from specterm.arrays import Array, Values
from specterm.discrete.quadrature import gauss_legendre

POINTS = 20
MOST_PIECES = 200_000


def resolved_points(function: Callable[[Array], Values], places: Array, precision: float = 1e-13) -> tuple[Array, Array, float]:
    """Return points and weights on pieces between `places`, halved until `function` is a polynomial on each, and the rest.

    Shapes (n,) and (n,); the last number bounds the integral of |f|^2 that the rule may have missed, as a share of the whole.
    """
    t, w = gauss_legendre(POINTS)
    legendre = np.polynomial.legendre.legvander(t, POINTS - 1)[:, -4:]
    projector = w[:, None] * legendre * (2 * np.arange(POINTS - 4, POINTS) + 1) / 2
    missed = 1.0
    for _ in range(60):
        half = np.diff(places)[:, None] / 2
        x = places[:-1, None] + half * (1 + t)
        values = np.nan_to_num(function(x.ravel()).reshape(x.shape))
        norm = float((half * w * np.abs(values) ** 2).sum())
        tail = 2 * half[:, 0] * np.abs(values @ projector).max(axis=1) ** 2
        missed = float(tail.sum() / norm) if norm > 0 else 0.0
        rough = tail > precision**2 * norm
        if not rough.any() or len(places) > MOST_PIECES:
            break
        places = np.sort(np.concatenate([places, (places[:-1] + places[1:])[rough] / 2]))
    return x.ravel(), (half * w).ravel(), missed
