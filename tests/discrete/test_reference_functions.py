"""The reference element: what its functions are declared to be, for every order."""

import numpy as np
import pytest
from numpy.polynomial import legendre

from specterm.discrete.quadrature import gauss_legendre
from specterm.discrete.reference import SPARE, end_slopes, functions, tabulated

ORDERS = [2, 3, 6, 12, 24]


@pytest.fixture(params=ORDERS)
def order(request):
    """Return a polynomial order."""
    return request.param


def test_values_at_the_ends(order):
    """At t = -1 only the left vertex function is 1 and all others are 0, at t = 1 only the right one."""
    values, _ = functions(order, np.array([-1.0, 1.0]))
    expected = np.zeros((2, order + 1 + SPARE))
    expected[0, 0] = expected[1, 1] = 1
    np.testing.assert_array_equal(values, expected)


def test_bubbles_orthonormal(order):
    """Bubbles, the spare ones too, have the unit matrix as their Gram matrix in L2(-1, 1)."""
    t, w = gauss_legendre(order + SPARE + 2)
    bubbles = functions(order, t)[0][:, 2:]
    np.testing.assert_allclose(bubbles.T @ (w[:, None] * bubbles), np.eye(order + SPARE - 1), rtol=0, atol=2e-13)


def test_degrees(order):
    """Function number k >= 2 is a polynomial of degree exactly k."""
    t, w = gauss_legendre(order + SPARE + 2)
    values, _ = functions(order, t)
    degrees = np.arange(values.shape[0])
    parts = (legendre.legvander(t, len(t) - 1) * w[:, None]).T @ values * (2 * degrees[:, None] + 1) / 2
    for k in range(2, values.shape[1]):
        assert np.abs(parts[k + 1 :, k]).max() < 1e-12
        assert abs(parts[k, k]) > 1e-3


def test_slopes_against_legendre(order):
    """Derivatives are those of the Legendre series through the values."""
    t, _ = gauss_legendre(order + SPARE + 2)
    values, slopes = functions(order, t)
    series = legendre.legfit(t, values, order + SPARE)
    np.testing.assert_allclose(legendre.legval(t, legendre.legder(series)).T, slopes, rtol=0, atol=1e-10 * order**2)


def test_slopes_against_differences():
    """Derivatives agree with central differences."""
    t, h = np.linspace(-0.98, 0.98, 41), 1e-5
    ahead, behind = functions(6, t + h)[0], functions(6, t - h)[0]
    np.testing.assert_allclose(functions(6, t)[1], (ahead - behind) / (2 * h), rtol=0, atol=1e-6)


def test_complete(order):
    """Every polynomial up to the order is a combination of the functions."""
    t, _ = gauss_legendre(order + SPARE + 2)
    basis = functions(order, t)[0][:, : order + 1]
    target = legendre.legvander(t, order)
    fitted = basis @ np.linalg.lstsq(basis, target, rcond=None)[0]
    np.testing.assert_allclose(fitted, target, rtol=0, atol=1e-12)


def test_tables(order):
    """The tabulated functions and end slopes are the functions at those places."""
    t, _ = gauss_legendre(order + 8)
    for table, direct in zip(tabulated(order, order + 8), functions(order, t), strict=True):
        np.testing.assert_array_equal(table, direct)
    np.testing.assert_array_equal(end_slopes(order), functions(order, np.array([-1.0, 1.0]))[1][:, : order + 1])
