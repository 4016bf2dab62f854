"""The reference element on (-1, 1): two vertex functions and a hierarchy of bubbles, orthonormal in L2."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np

from specterm.arrays import Array
from specterm.discrete.quadrature import gauss_legendre

SPARE = 4
"""How many bubbles beyond the order are kept to estimate what the order leaves out."""


def functions(order: int, t: Array) -> tuple[Array, Array]:
    """Return the functions and their derivatives at t, each of shape (points, order + 1 + SPARE).

    Columns: left vertex (1 - t)/2, right vertex (1 + t)/2, then bubbles (1 - t^2) P_k^(2,2)(t) of degree 2 ... order + SPARE,
    orthonormal in L2(-1, 1) (Jacobi polynomials; Abramowitz and Stegun, table 22.2). Tested to order 24.
    """
    count = order + SPARE - 1
    inner, outer = _jacobi(2, count, t), _jacobi(3, count, t)
    values, slopes = np.empty((len(t), count + 2)), np.empty((len(t), count + 2))
    values[:, 0], values[:, 1] = (1 - t) / 2, (1 + t) / 2
    slopes[:, 0], slopes[:, 1] = -0.5, 0.5
    for k in range(count):
        norm = math.sqrt((2 * k + 5) * (k + 3) * (k + 4) / (32.0 * (k + 1) * (k + 2)))
        steep = (k + 5) / 2 * outer[:, k - 1] if k else 0.0
        values[:, k + 2] = norm * (1 - t) * (1 + t) * inner[:, k]
        slopes[:, k + 2] = norm * ((1 - t) * (1 + t) * steep - 2 * t * inner[:, k])
    return values, slopes


def curvatures(order: int, t: Array) -> Array:
    """Return the second derivatives of `functions` at t, shape (points, order + 1 + SPARE). Tested to order 16."""
    count = order + SPARE - 1
    inner, outer, outermost = _jacobi(2, count, t), _jacobi(3, count, t), _jacobi(4, count, t)
    bends = np.zeros((len(t), count + 2))
    for k in range(count):
        norm = math.sqrt((2 * k + 5) * (k + 3) * (k + 4) / (32.0 * (k + 1) * (k + 2)))
        steep = (k + 5) / 2 * outer[:, k - 1] if k else 0.0
        bent = (k + 5) * (k + 6) / 4 * outermost[:, k - 2] if k > 1 else 0.0
        bends[:, k + 2] = norm * ((1 - t) * (1 + t) * bent - 4 * t * steep - 2 * inner[:, k])
    return bends


def _jacobi(a: int, count: int, t: Array) -> Array:
    """Return the Jacobi polynomials P_k^(a,a) for k < count at t, shape (points, count), by their three-term recurrence."""
    p = np.ones((len(t), max(count, 2)))
    p[:, 1] = (a + 1) * t
    for k in range(2, count):
        upper = (2 * k + 2 * a - 1) * (k + a) * t * p[:, k - 1] - (k + a - 1) * (k + a) * p[:, k - 2]
        p[:, k] = upper / (k * (k + 2 * a))
    return p


@lru_cache(maxsize=16)
def tabulated(order: int, points: int) -> tuple[Array, Array]:
    """Return `functions` at the Gauss-Legendre points."""
    return functions(order, gauss_legendre(points)[0])


@lru_cache(maxsize=16)
def end_slopes(order: int) -> Array:
    """Return the derivatives of the functions up to `order` at t = -1 and t = 1, shape (2, order + 1)."""
    return functions(order, np.array([-1.0, 1.0]))[1][:, : order + 1]
