"""First elements with the power of psi taken out, against closed forms. s = 1/2 is the borderline of the inverse square."""

import numpy as np
import pytest
from discrete_making import WALL, bisected, coefficients, dense_values
from scipy import optimize, special

from specterm.discrete.mesh import Edge, Mesh

POWERS = [0.5, 0.7, 1.0, 2.3]


def bessel_zeros(order, count):
    """Return the first positive zeros of J_order (scipy.special.jv, bracketed here)."""
    x = np.linspace(0.5, 4 * (count + 3) + order, 4000)
    values = special.jv(order, x)
    starts = np.flatnonzero(values[1:] * values[:-1] < 0)[:count]
    return np.array([optimize.brentq(lambda z: special.jv(order, z), x[k], x[k + 1], xtol=1e-15) for k in starts])


@pytest.mark.parametrize("mirrored", [False, True], ids=["left end", "right end"])
@pytest.mark.parametrize("s", POWERS)
def test_disc(s, mirrored):
    """-f'' + s(s-1)/d^2 f on (0, 1): f = sqrt(d) J_(s-1/2)(k d), levels squares of Bessel zeros (DLMF 10.13.4)."""
    places, edges = np.array([0.0, 0.3, 0.6, 1.0]), (Edge(False, s), WALL)
    if mirrored:
        places, edges = -places[::-1], edges[::-1]
    mesh = Mesh(places, 14, *edges)
    found = bisected(mesh, coefficients(lambda x: s * (s - 1) / x**2), 3, 0.0, 300.0)
    np.testing.assert_allclose(found, bessel_zeros(s - 0.5, 3) ** 2, rtol=2e-12)


@pytest.mark.parametrize("s", POWERS)
def test_oscillator(s):
    """-f'' + (x^2 + s(s-1)/x^2) f on (0, inf): E = 4 n + 2 s + 1 (closed form, recomputed here)."""
    mesh = Mesh(np.concatenate([[0.0], np.linspace(0.7, 9.0, 14)]), 14, Edge(False, s), WALL)
    found = bisected(mesh, coefficients(lambda x: x**2 + s * (s - 1) / x**2), 4, -10.0, 40.0)
    np.testing.assert_allclose(found, 4 * np.arange(4) + 2 * s + 1, rtol=1e-12)


@pytest.mark.parametrize("s", POWERS)
def test_coulomb(s):
    """-f'' + (s(s-1)/x^2 - 2/x) f on (0, inf): E = -1/(n + s)^2 (closed form, recomputed here)."""
    mesh = Mesh(np.concatenate([[0.0], np.geomspace(0.5, 120.0, 22)]), 14, Edge(False, s), WALL)
    found = bisected(mesh, coefficients(lambda x: s * (s - 1) / x**2 - 2 / x), 2, -10.0, 0.0)
    np.testing.assert_allclose(found, -1 / (np.arange(2) + s) ** 2, rtol=1e-11)


@pytest.mark.parametrize("nu", [0.0, 1.0, 2.5])
def test_vanishing_stiffness(nu):
    """-(x f')' + nu^2/(4x) f on (0, 1): f = J_nu(2 sqrt(E x)), E = (zero/2)^2 (DLMF 10.13.2), psi ~ x^(nu/2), K ~ x."""
    mesh = Mesh(np.array([0.0, 0.3, 0.6, 1.0]), 14, Edge(False, nu / 2, 1.0), WALL)
    some = coefficients(lambda x: nu**2 / (4 * x), lambda x: x, np.ones_like)
    np.testing.assert_allclose(bisected(mesh, some, 3, -1.0, 100.0), (bessel_zeros(nu, 3) / 2) ** 2, rtol=2e-12)


def test_legendre_between_two_singular_ends():
    """-((1-x^2) f')' + m^2/(1-x^2) f on (-1, 1): E = l(l+1), l >= m (DLMF 14.2.2), powers m/2 at both ends."""
    m = 3
    end = Edge(False, m / 2, 1.0)
    some = coefficients(lambda x: m**2 / ((1 - x) * (1 + x)), lambda x: (1 - x) * (1 + x), lambda x: -2 * x)
    found = dense_values(Mesh(np.array([-1.0, -0.4, 0.3, 1.0]), 14, end, end), some)[:5]
    np.testing.assert_allclose(found, [(m + n) * (m + n + 1) for n in range(5)], rtol=1e-12)


def test_without_the_power_the_same_mesh_is_poor():
    """With s = 0.7 and no power taken out the first level is off by more than 1e-3: the factor is what makes it exact."""
    mesh = Mesh(np.array([0.0, 0.3, 0.6, 1.0]), 14, WALL, WALL)
    found = bisected(mesh, coefficients(lambda x: -0.21 / x**2), 1, -10.0, 60.0)[0]
    assert abs(found - bessel_zeros(0.2, 1)[0] ** 2) > 1e-3


def test_split_nearer_to_a_singular_end():
    """An element with a power in it is cut at a quarter of its length from the end, an ordinary one in the middle."""
    mesh = Mesh(np.array([0.0, 1.0, 2.0, 3.0]), 6, Edge(False, 0.5), Edge(False, 0.5))
    np.testing.assert_array_equal(mesh.split(np.ones(3, dtype=bool)).places, [0, 0.25, 1, 1.5, 2, 2.75, 3])
    plain = Mesh(np.array([0.0, 1.0, 2.0]), 6, WALL, WALL).split(np.array([False, True]))
    np.testing.assert_array_equal(plain.places, [0, 1, 1.5, 2])
