"""Gauss rules from the eigenvalues of their Jacobi matrices (Golub and Welsch, Math. Comp. 23 (1969) 221)."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np

from specterm.arrays import Array


@lru_cache(maxsize=64)
def gauss_legendre(points: int) -> tuple[Array, Array]:
    """Return nodes and weights on (-1, 1), each of shape (points,); exact to degree 2 points - 1."""
    nodes, weights = np.polynomial.legendre.leggauss(points)
    return nodes, weights


@lru_cache(maxsize=16)
def legendre_projector(points: int) -> Array:
    """Return the matrix (points, points) from values at the Gauss-Legendre points to Legendre coefficients."""
    t, w = gauss_legendre(points)
    projector: Array = w[:, None] * np.polynomial.legendre.legvander(t, points - 1) * (2 * np.arange(points) + 1) / 2
    return projector


@lru_cache(maxsize=64)
def gauss_jacobi(points: int, beta: float) -> tuple[Array, Array]:
    """Return nodes and weights on (-1, 1) for the weight (1 + t)**beta, beta > -1; tested for beta to 60 against moments."""
    n = np.arange(points, dtype=float)
    diagonal = np.empty(points)
    diagonal[0] = beta / (beta + 2)
    m = n[1:]
    diagonal[1:] = beta**2 / ((2 * m + beta) * (2 * m + beta + 2))
    side = 4 * m**2 * (m + beta) ** 2 / ((2 * m + beta) ** 2 * (2 * m + beta + 1) * np.maximum(2 * m + beta - 1, 1e-300))
    if points > 1:
        side[0] = 4 * (1 + beta) / ((2 + beta) ** 2 * (3 + beta))
    nodes, vectors = np.linalg.eigh(np.diag(diagonal) + np.diag(np.sqrt(side), 1) + np.diag(np.sqrt(side), -1))
    total = math.exp((beta + 1) * math.log(2.0) - math.log(beta + 1))
    return nodes, total * vectors[0] ** 2
