"""Element matrices against exact integrals, recomputed here, and against the exact matrix of a free element."""

import numpy as np
import pytest
from discrete_making import FREE, WALL, assembled, coefficients, condensed, even
from numpy.polynomial import Polynomial

from specterm.discrete.chain import chain, chain_with_mass
from specterm.discrete.elements import grid
from specterm.discrete.mesh import Edge, Mesh


def test_constant_coefficients():
    """With K = 3 and V = 5 an element's vertex block is 3/h [[1,-1],[-1,1]] + 5 h/6 [[2,1],[1,2]]."""
    h, mesh = 0.7, even(1.0, 1.7, 1, 5, FREE, FREE)
    form, mass = assembled(mesh, coefficients(lambda x: np.full_like(x, 5.0), lambda x: np.full_like(x, 3.0)))
    tent = h / 6 * np.array([[2, 1], [1, 2]])
    np.testing.assert_allclose(form[:2, :2], 3 / h * np.array([[1, -1], [-1, 1]]) + 5 * tent, rtol=1e-14)
    np.testing.assert_allclose(mass[:2, :2], tent, rtol=1e-14)


def test_polynomial_coefficients():
    """With polynomial K and V the rule leaves no error: integrals of vertex functions agree with exact antiderivatives."""
    K, V = Polynomial([2.0, 0.5, 0.25, 1.0]), Polynomial([-1.0, 3.0, 0.0, -2.0, 0.5])
    mesh = Mesh(np.array([0.25, 1.5]), 6, FREE, FREE)
    form, _ = assembled(mesh, coefficients(V, K, K.deriv()))
    a, b = mesh.places
    hats = Polynomial([b, -1.0]) / (b - a), Polynomial([-a, 1.0]) / (b - a)
    for i, f in enumerate(hats):
        for j, g in enumerate(hats):
            whole = (K * f.deriv() * g.deriv() + V * f * g).integ()
            assert form[i, j] == pytest.approx(whole(b) - whole(a), rel=1e-13)


def test_places_measured_from_the_nearer_end():
    """Points in the right half of an element near 0 keep their distance to its right end to full precision."""
    mesh = Mesh(np.array([-1.0, 0.0]), 12, WALL, WALL)
    here = grid(mesh, coefficients(np.zeros_like))
    t, _ = np.polynomial.legendre.leggauss(20)
    np.testing.assert_allclose(here.x[0, -1], -0.5 * (1 - t[-1]), rtol=1e-15)
    assert here.mass.sum() == pytest.approx(1.0, rel=1e-14)


@pytest.mark.parametrize("energy", [0.1, 1.0, 4.0])
def test_free_element_condensed(energy):
    """Condensed at an energy k^2, a free element is k [[cot kh, -1/sin kh], [-1/sin kh, cot kh]] (solution of -f'' = k^2 f)."""
    k, h = np.sqrt(energy), 1.0
    made = chain(condensed(even(0.0, h, 1, 12, FREE, FREE), coefficients(np.zeros_like)), np.array([energy]))
    np.testing.assert_allclose(made.diagonal[:, 0], k / np.tan(k * h), rtol=1e-12)
    np.testing.assert_allclose(made.side[:, 0], -k / np.sin(k * h), rtol=1e-12)


def test_vertex_functions_without_mass_overlap():
    """In the condensed basis interiors have mass 1 and no mass overlap with the vertex functions, and are diagonal."""
    mesh = even(-1.0, 2.0, 3, 8, FREE, FREE)
    small = condensed(mesh, coefficients(lambda x: x**2))
    here = small.grid
    psi = here.values[..., :9] @ small.basis
    mass = np.einsum("eqi,eq,eqj->eij", psi, here.mass, psi)
    expected = np.tile(np.eye(9), (3, 1, 1))
    expected[:, :2, :2] = small.heavy
    np.testing.assert_allclose(mass, expected, rtol=0, atol=1e-13)
    slope = here.slopes[..., :9] @ small.basis
    form = np.einsum("eqi,eq,eqj->eij", slope, here.kinetic, slope) + np.einsum("eqi,eq,eqj->eij", psi, here.potential, psi)
    np.testing.assert_allclose(form[:, 2:, 2:], [np.diag(p) for p in small.poles], rtol=0, atol=1e-10)
    np.testing.assert_allclose(form[:, :2, 2:], small.coupling, rtol=0, atol=1e-10)
    np.testing.assert_allclose(form[:, :2, :2], small.stiff, rtol=0, atol=1e-10)


def test_condensed_mass_is_minus_the_derivative():
    """The condensed mass is minus the derivative of the condensed matrix with respect to the energy."""
    small = condensed(even(0.0, 3.0, 4, 8), coefficients(lambda x: x))
    h = 1e-5
    matrix, heavy = chain_with_mass(small, np.array([2.0]))
    ahead, behind = chain(small, np.array([2.0 + h])), chain(small, np.array([2.0 - h]))
    np.testing.assert_allclose(heavy.diagonal, (behind.diagonal - ahead.diagonal) / (2 * h), rtol=1e-7)
    np.testing.assert_allclose(heavy.side, (behind.side - ahead.side) / (2 * h), rtol=1e-7)
    np.testing.assert_array_equal(matrix.diagonal, chain(small, np.array([2.0])).diagonal)


def test_pull_adds_at_the_end():
    """A pull q at a free end turns zero slope into psi' = -q psi: the level of a free element is k tan(k) = q."""
    q = 0.8
    mesh = Mesh(np.array([0.0, 0.4, 1.0]), 10, FREE, Edge(False, pull=q))
    k = np.sqrt(np.linalg.eigvals(np.linalg.solve(*assembled(mesh, coefficients(np.zeros_like))[::-1])).real.min())
    assert k * np.tan(k) == pytest.approx(q, rel=1e-11)
