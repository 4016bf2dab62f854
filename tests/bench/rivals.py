"""What the engine is timed against: dense solves tuned by hand for one problem each, and 3-point differences.

All give bare values for coefficients written as numpy functions: no choice of mesh, no errors, no count.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.polynomial import legendre
from scipy import linalg, special

COUNT = 10


def sinc(potential: Callable, left: float, right: float, points: int) -> np.ndarray:
    """Return levels of -f'' + V f on a grid of sinc functions."""
    x, h = np.linspace(left, right, points, retstep=True)
    n = np.arange(points)
    steps = n[:, None] - n[None, :]
    with np.errstate(divide="ignore"):
        kinetic = 2.0 * (-1.0) ** steps / steps**2
    np.fill_diagonal(kinetic, np.pi**2 / 3)
    kinetic /= h * h
    kinetic[n, n] += potential(x)
    return np.linalg.eigh(kinetic)[0][:COUNT]


def waves(strength: float, size: int) -> np.ndarray:
    """Return levels of -f'' + strength cos(x) f on a ring of 2 pi in exponentials."""
    n = np.arange(-size, size + 1.0)
    matrix = np.diag(n * n) + strength / 2 * (np.diag(np.ones(2 * size), 1) + np.diag(np.ones(2 * size), -1))
    return np.linalg.eigh(matrix)[0][:COUNT]


def laguerre(scale: float, points: int) -> np.ndarray:
    """Return levels of -f'' - 2/r f on the mesh of Laguerre's zeros (Baye and Heenen, J. Phys. A 19 (1986) 2041)."""
    x = special.roots_laguerre(points)[0]
    n = np.arange(points)
    with np.errstate(divide="ignore"):
        matrix = (-1.0) ** (n[:, None] - n) * (x[:, None] + x) / (np.sqrt(np.outer(x, x)) * (x[:, None] - x) ** 2)
    np.fill_diagonal(matrix, (4 + (4 * points + 2) * x - x * x) / (12 * x * x))
    matrix /= scale**2
    matrix[n, n] -= 2 / (scale * x)
    return np.linalg.eigh(matrix)[0][:COUNT]


def pieces(corners: list[float], stiff: list[float], height: list[float], degrees: list[int]) -> np.ndarray:
    """Return levels of -(K f')' + V f with constants on pieces, psi = 0 at both ends: one high polynomial a piece, dense."""
    total = len(degrees) + 1 + sum(degrees) - len(degrees)
    form, mass = np.zeros((total, total)), np.zeros((total, total))
    free = len(degrees) + 1
    for k, degree in enumerate(degrees):
        h = corners[k + 1] - corners[k]
        slopes, values = _hierarchy(degree)
        rows = np.concatenate([[k, k + 1], np.arange(free, free + degree - 1)])
        free += degree - 1
        place = np.ix_(rows, rows)
        form[place] += stiff[k] * 2 / h * slopes + height[k] * h / 2 * values
        mass[place] += h / 2 * values
    keep = np.delete(np.arange(total), [0, len(degrees)])
    return linalg.eigh(form[np.ix_(keep, keep)], mass[np.ix_(keep, keep)])[0][:COUNT]


def _hierarchy(degree: int) -> tuple[np.ndarray, np.ndarray]:
    """Return integrals of slopes and values of two vertex functions and integrated Legendre polynomials on (-1, 1)."""
    t, w = legendre.leggauss(degree + 2)
    p = legendre.legvander(t, degree)
    n = np.arange(2, degree + 1)
    values = np.column_stack([(1 - t) / 2, (1 + t) / 2, (p[:, 2:] - p[:, :-2]) / np.sqrt(4 * n - 2)])
    slopes = np.column_stack([np.full_like(t, -0.5), np.full_like(t, 0.5), p[:, 1:-1] * np.sqrt((2 * n - 1) / 2)])
    return slopes.T @ (w[:, None] * slopes), values.T @ (w[:, None] * values)


def differences(stiff: Callable, potential: Callable, left: float, right: float, steps: int) -> np.ndarray:
    """Return levels of -(K f')' + V f between walls by 3-point differences on `steps` equal steps (V averaged over a jump)."""
    x, h = np.linspace(left, right, steps + 1, retstep=True)
    k = stiff((x[:-1] + x[1:]) / 2) / h**2
    inner = x[1:-1]
    v = (potential(inner - h / 1000) + potential(inner + h / 1000)) / 2
    return linalg.eigh_tridiagonal(k[:-1] + k[1:] + v, -k[1:-1], eigvals_only=True, select="i", select_range=(0, COUNT - 1))


def ring_differences(strength: float, steps: int) -> np.ndarray:
    """Return levels of -f'' + strength cos(x) f on a ring of 2 pi: even and odd states on half of it."""
    h = np.pi / steps
    x = h * np.arange(steps + 1)
    diagonal, side = 2 / h**2 + strength * np.cos(x), np.full(steps, -1 / h**2)
    even_side = side.copy()
    even_side[[0, -1]] *= np.sqrt(2)
    half = {"eigvals_only": True, "select": "i", "select_range": (0, COUNT // 2)}
    even = linalg.eigh_tridiagonal(diagonal, even_side, **half)
    odd = linalg.eigh_tridiagonal(diagonal[1:-1], side[1:-1], **half)
    return np.sort(np.concatenate([even, odd]))[:COUNT]
