"""Gauss rules and Legendre coefficients. Exact values are elementary integrals, recomputed here."""

import numpy as np
import pytest
from scipy import special

from specterm.discrete.quadrature import gauss_jacobi, gauss_legendre, legendre_projector

BETAS = [-0.9, -0.5, 0.0, 0.3, 1.0, 2.6, 12.0, 60.0]


@pytest.mark.parametrize("points", [1, 2, 7, 20, 32])
def test_legendre_moments(points):
    """The rule of n points integrates t^k exactly up to k = 2n - 1, and t^(2n) no more."""
    t, w = gauss_legendre(points)
    assert t.shape == w.shape == (points,)
    for k in range(2 * points):
        exact = 0.0 if k % 2 else 2 / (k + 1)
        assert (w * t**k).sum() == pytest.approx(exact, rel=0, abs=2e-14)
    if points < 8:
        assert abs((w * t ** (2 * points)).sum() - 2 / (2 * points + 1)) > 1e-6


@pytest.mark.parametrize("beta", BETAS)
@pytest.mark.parametrize("points", [2, 20, 32])
def test_jacobi_moments(points, beta):
    """The rule for the weight (1+t)^beta integrates (1+t)^k exactly up to k = 2n - 1."""
    t, w = gauss_jacobi(points, beta)
    for k in range(2 * points):
        exact = 2.0 ** (beta + k + 1) / (beta + k + 1)
        assert (w * (1 + t) ** k).sum() == pytest.approx(exact, rel=3e-12)


@pytest.mark.parametrize("beta", BETAS)
def test_jacobi_nodes(beta):
    """Nodes and weights are those of scipy.special.roots_jacobi (an outside implementation)."""
    t, w = gauss_jacobi(20, beta)
    nodes, weights = special.roots_jacobi(20, 0.0, beta)
    np.testing.assert_allclose(t, nodes, rtol=0, atol=1e-13)
    np.testing.assert_allclose(w, weights, rtol=1e-9, atol=1e-15 * weights.max())


def test_jacobi_without_weight_is_legendre():
    """Beta 0 gives the Gauss-Legendre rule."""
    np.testing.assert_allclose(gauss_jacobi(15, 0.0), gauss_legendre(15), rtol=0, atol=1e-14)


@pytest.mark.parametrize("points", [4, 14, 20])
def test_projector(points):
    """Values of P_k at the Gauss points have the Legendre coefficients of P_k: 1 at k, 0 elsewhere."""
    t, _ = gauss_legendre(points)
    values = np.polynomial.legendre.legvander(t, points - 1)
    np.testing.assert_allclose(legendre_projector(points).T @ values, np.eye(points), rtol=0, atol=1e-13)
