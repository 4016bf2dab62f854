"""Integrals of functions that may be narrower than the elements of a spectrum: pieces are halved until each is resolved."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array, Values
from specterm.discrete.quadrature import gauss_legendre
from specterm.errors import PhysicsError

POINTS = 20
MOST_PIECES = 200_000
LARGEST = 1e140


@dataclass(frozen=True)
class Rule:
    """Points `x` and weights `w` (n,) between ascending `places`; `missed` bounds the share of each function's norm unseen."""

    x: Array
    w: Array
    places: Array
    missed: Array


def resolve(
    functions: Callable[[Array], Values], places: Array, precision: float | Sequence[float] = 1e-13, most: int = MOST_PIECES
) -> Rule:
    """Return a Gauss rule of 20 points a piece between `places`, halved until every function is a polynomial on each piece.

    `functions` maps places (n,) to values (n,) or (functions, n); `precision` is how small the highest Legendre coefficients
    must be beside the norm of each, one number or one for each function. At most about `most` pieces are made.
    """
    t, w = gauss_legendre(POINTS)
    legendre = np.polynomial.legendre.legvander(t, POINTS - 1)[:, -4:]
    projector = w[:, None] * legendre * (2 * np.arange(POINTS - 4, POINTS) + 1) / 2
    finer = places
    for _ in range(60):
        places = finer
        half = np.diff(places)[:, None] / 2
        x = places[:-1, None] + half * (1 + t)
        values = np.nan_to_num(np.atleast_2d(functions(x.ravel())))
        if np.abs(values).max(initial=0.0) > LARGEST:
            raise PhysicsError(
                f"values above {LARGEST:g} are too large to be squared and integrated", mend="divide by a large number"
            )
        values = values.reshape(len(values), *x.shape)
        norm = np.einsum("eq,feq->f", half * w, np.abs(values) ** 2)
        tail = 2 * half[:, 0] * np.abs(values @ projector).max(axis=2) ** 2
        rough = (tail > (np.asarray(precision) ** 2 * norm)[:, None]).any(axis=0)
        if not rough.any() or len(places) > most:
            break
        finer = np.unique(np.concatenate([places, (places[:-1] + places[1:])[rough] / 2]))
    missed = tail.sum(axis=1) / np.where(norm > 0, norm, 1.0)
    return Rule(x.ravel(), (half * w).ravel(), places, missed)


def points_between(places: Array) -> tuple[Array, Array]:
    """Return points and weights (n,) of a Gauss rule of 20 points between ascending places."""
    t, w = gauss_legendre(POINTS)
    half = np.diff(places)[:, None] / 2
    return (places[:-1, None] + half * (1 + t)).ravel(), (half * w).ravel()


def resolved_points(function: Callable[[Array], Values], places: Array, precision: float = 1e-13) -> tuple[Array, Array, float]:
    """Return points and weights on pieces between `places`, halved until `function` is a polynomial on each, and the rest.

    Shapes (n,) and (n,); the last number bounds the integral of |f|^2 that the rule may have missed, as a share of the whole.
    """
    rule = resolve(function, places, precision)
    return rule.x, rule.w, float(rule.missed[0])
