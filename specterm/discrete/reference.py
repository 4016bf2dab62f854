"""The reference element on (-1, 1): two vertex functions and a hierarchy of bubbles, orthonormal in L2."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from specterm.discrete.quadrature import gauss_legendre

Array = NDArray[np.float64]

SPARE = 4
"""How many bubbles beyond the order are kept to estimate what the order leaves out."""


@dataclass(frozen=True)
class Reference:
    """Polynomials up to degree `order` (+ `SPARE`), as coefficients of Legendre polynomials.

    Columns: left vertex, right vertex, then bubbles of degree 2 ... order + SPARE. `coefficients` has shape
    (degrees, functions); `slopes` holds the derivatives the same way. Bubbles are orthonormal in L2(-1, 1).
    """

    order: int
    coefficients: Array
    slopes: Array

    def values(self, t: Array) -> Array:
        """Return the functions at t, shape t.shape + (functions,)."""
        return np.polynomial.legendre.legvander(t, self.coefficients.shape[0] - 1) @ self.coefficients

    def derivatives(self, t: Array) -> Array:
        """Return d/dt of the functions at t, shape t.shape + (functions,)."""
        return np.polynomial.legendre.legvander(t, self.coefficients.shape[0] - 1) @ self.slopes


@lru_cache(maxsize=16)
def reference(order: int) -> Reference:
    """Return the reference element of an order from 2 to 24."""
    top = order + SPARE
    t, w = gauss_legendre(top + 2)
    legendre = np.polynomial.legendre.legvander(t, top)
    raw = (1 - t**2)[:, None] * legendre[:, : top - 1]
    orthogonal, triangle = np.linalg.qr(np.sqrt(w)[:, None] * raw)
    bubbles = orthogonal * np.sign(np.diag(triangle)) / np.sqrt(w)[:, None]
    vertices = np.stack([(1 - t) / 2, (1 + t) / 2], axis=1)
    norms = (2 * np.arange(top + 1) + 1) / 2
    coefficients = norms[:, None] * (legendre.T @ (w[:, None] * np.hstack([vertices, bubbles])))
    slopes = np.zeros_like(coefficients)
    slopes[:-1] = np.polynomial.legendre.legder(coefficients)
    return Reference(order, coefficients, slopes)


@lru_cache(maxsize=16)
def tabulated(order: int, points: int) -> tuple[Array, Array]:
    """Return values and slopes of the reference functions at the Gauss-Legendre points, shapes (points, functions)."""
    t, _ = gauss_legendre(points)
    element = reference(order)
    return element.values(t), element.derivatives(t)
