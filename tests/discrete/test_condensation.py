"""The condensed matrix says the same as all unknowns together: eigenvalues, counts, vectors. From scipy.linalg."""

import numpy as np
import pytest
from discrete_making import FREE, WALL, assembled, coefficients, condensed, dense_values, even

from specterm.discrete.chain import chain, chain_with_mass, count_below, element_coefficients, twisted_vectors
from specterm.discrete.mesh import Edge, Mesh

PLACES = np.array([0.0, 0.3, 0.5, 1.1, 2.0, 3.2, 3.3])
CASES = {
    "walls": Mesh(PLACES, 6, WALL, WALL),
    "free": Mesh(PLACES, 6, FREE, FREE),
    "wall and free": Mesh(PLACES, 6, WALL, FREE),
    "free and wall": Mesh(PLACES, 6, FREE, WALL),
    "pulled": Mesh(PLACES, 6, Edge(False, pull=-0.6), Edge(False, pull=0.4)),
    "powers": Mesh(PLACES, 6, Edge(False, 0.7), Edge(False, 2.3)),
    "ring": Mesh(PLACES, 6, FREE, FREE, 0.0),
    "antiperiodic": Mesh(PLACES, 6, FREE, FREE, np.pi),
    "phase": Mesh(PLACES, 6, FREE, FREE, 1.234),
    "negative phase": Mesh(PLACES, 6, FREE, FREE, -2.9),
    "two on a ring": Mesh(np.array([0.0, 1.3, 3.3]), 9, FREE, FREE, 0.4),
    "one between walls": Mesh(np.array([0.0, 3.3]), 12, WALL, WALL),
    "one on a ring": Mesh(np.array([0.0, 3.3]), 12, FREE, FREE, 0.9),
}


def bumpy():
    """Return coefficients without symmetry."""
    return coefficients(
        lambda x: 3 * np.sin(2 * x) + x**2, lambda x: 1 + 0.3 * np.cos(x + 0.2), lambda x: -0.3 * np.sin(x + 0.2)
    )


@pytest.fixture(params=CASES, ids=str)
def mesh(request):
    """Return a mesh with one kind of ends."""
    return CASES[request.param]


def test_unknowns(mesh):
    """The mesh says how many unknowns its full matrix has."""
    assert mesh.unknowns == len(assembled(mesh, bumpy())[0])


def test_count_below_is_the_inertia(mesh):
    """At many energies the count equals the number of eigenvalues of the full matrices below."""
    levels = dense_values(mesh, bumpy())
    low, high = levels[0] - 5, levels[len(levels) * 2 // 3]
    energies = np.linspace(low, high, 1501)
    far = np.abs(energies[:, None] - levels).min(axis=1) > 1e-9 * (high - low)
    expected = (levels[None, :] < energies[:, None]).sum(axis=1)
    np.testing.assert_array_equal(count_below(condensed(mesh, bumpy()), energies)[far], expected[far])


def test_count_steps_at_every_eigenvalue(mesh):
    """The count rises exactly at the eigenvalues of the full matrices: within 1e-11 of the largest considered."""
    levels = dense_values(mesh, bumpy())[:20]
    slip = 1e-11 * np.abs(levels).max()
    small = condensed(mesh, bumpy())
    expected = (
        (levels[None, :] < (levels - slip)[:, None]).sum(axis=1),
        (levels[None, :] < (levels + slip)[:, None]).sum(axis=1),
    )
    np.testing.assert_array_equal(count_below(small, levels - slip), expected[0])
    np.testing.assert_array_equal(count_below(small, levels + slip)[:-1], expected[1][:-1])


def test_degenerate_levels_of_a_free_ring():
    """On a free ring of length 2 pi the levels n^2 come in pairs: counts between them are 1, 3, 5, ..."""
    small = condensed(even(0.0, 2 * np.pi, 5, 14, FREE, FREE, 0.0), coefficients(np.zeros_like))
    np.testing.assert_array_equal(count_below(small, np.arange(6.0) ** 2 - 1e-6), [0, 1, 3, 5, 7, 9])


def test_energies_at_interior_levels():
    """An energy exactly at a level of an element's interior is counted, without a warning, to within that level."""
    mesh = CASES["walls"]
    small, levels = condensed(mesh, bumpy()), dense_values(mesh, bumpy())
    poles = np.sort(small.poles[:, :2].ravel())
    slip = 1e-10 * np.abs(poles).max()
    counts = count_below(small, poles)
    assert (counts >= (levels < poles[:, None] - slip).sum(axis=1)).all()
    assert (counts <= (levels < poles[:, None] + slip).sum(axis=1)).all()


def test_more_energies_than_one_block():
    """Counts do not depend on how many energies are asked for at once."""
    small = condensed(CASES["walls"], bumpy())
    energies = np.linspace(0.0, 60.0, 1100)
    np.testing.assert_array_equal(count_below(small, energies)[::97], count_below(small, energies[::97]))


@pytest.mark.parametrize("name", [name for name in CASES if CASES[name].phase is None and "one" not in name])
def test_twisted_vectors(name):
    """T z = misfit e_r with z_r = 1, and the inertia is the number of negative eigenvalues of T."""
    small = condensed(CASES[name], bumpy())
    energies = np.concatenate([np.linspace(-3.0, 40.0, 41), dense_values(CASES[name], bumpy())[:5]])
    matrix, weight = chain_with_mass(small, energies)
    z, misfit, inertia = twisted_vectors(matrix, weight.diagonal)
    for k in range(len(energies)):
        tridiagonal = np.diag(matrix.diagonal[:, k]) + np.diag(matrix.side[:, k], 1) + np.diag(matrix.side[:, k], -1)
        rest = tridiagonal @ z[:, k]
        (row,) = np.flatnonzero(z[:, k] == 1)
        rest[row] -= misfit[k]
        assert np.abs(rest).max() <= 1e-13 * np.abs(tridiagonal).max() * np.abs(z[:, k]).max()
        assert inertia[k] == (np.linalg.eigvalsh(tridiagonal) < 0).sum() or k >= 41


@pytest.mark.parametrize("name", ["walls", "free", "powers", "wall and free"])
def test_vectors_of_all_unknowns(name):
    """At a level the vertex vector, spread over the elements, solves the full eigenproblem in every element's functions."""
    mesh, some = CASES[name], bumpy()
    small, levels = condensed(mesh, some), dense_values(mesh, bumpy())[:6]
    matrix, weight = chain_with_mass(small, levels)
    z, _, _ = twisted_vectors(matrix, weight.diagonal)
    full = element_coefficients(small, z, levels)
    form, mass = assembled(mesh, some)
    vertices = np.concatenate([full[:, 0], full[-1:, 1]])[mesh.left.fixed : len(full) + 1 - mesh.right.fixed]
    vector = np.concatenate([vertices, full[:, 2:].reshape(-1, len(levels))])
    rest = form @ vector - mass @ vector * levels
    assert np.abs(rest).max() <= 1e-10 * np.abs(form).max() * np.abs(vector).max()


def test_vectors_around_a_ring():
    """On a ring with a phase the last vertex is exp(i phase) times the first."""
    mesh = CASES["phase"]
    z = np.arange(1.0, 7.0)[:, None] + 0j
    ends = element_coefficients(condensed(mesh, bumpy()), z, np.array([0.5]))[:, :2, 0]
    assert ends[-1, 1] == pytest.approx(np.exp(1j * mesh.phase) * ends[0, 0], rel=1e-14)


def test_corner_of_a_ring_is_real_where_it_can_be():
    """Without a phase, or with half a turn, the matrix of a ring is real."""
    for name, phased in (("ring", False), ("antiperiodic", False), ("phase", True)):
        corner = chain(condensed(CASES[name], bumpy()), np.array([1.0])).corner
        assert np.iscomplexobj(corner) is phased
