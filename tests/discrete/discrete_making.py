"""Coefficients, meshes and full matrices made by hand for the tests of the discretisation."""

from functools import cache

import numpy as np
from scipy import linalg

from specterm.discrete.chain import count_below
from specterm.discrete.elements import Coefficients, condense, grid
from specterm.discrete.mesh import Edge, Mesh
from specterm.discrete.reduce import problem_of
from specterm.language import parse
from specterm.model import build

WALL, FREE = Edge(True), Edge(False)


@cache
def problem(text):
    """Return the problem of a sheet."""
    return problem_of(build(parse(text)))


def coefficients(potential, stiffness=np.ones_like, slope=np.zeros_like):
    """Return coefficients without rounding, V measured from 0."""
    return Coefficients(stiffness, slope, potential, np.zeros_like, np.zeros_like, 0.0)


def even(left, right, elements, order, left_edge=WALL, right_edge=WALL, phase=None):
    """Return a mesh of elements of one length."""
    return Mesh(np.linspace(left, right, elements + 1), order, left_edge, right_edge, phase)


def condensed(mesh, some):
    """Return the mesh condensed."""
    return condense(mesh, grid(mesh, some))


def assembled(mesh, some):
    """Return form and mass of all unknowns as full matrices, put together here element by element from the reference functions.

    Each element's functions are linear combinations (rows of `spread`) of the unknowns: vertices first, then bubbles.
    """
    here, n, elements = grid(mesh, some), mesh.order + 1, len(mesh.places) - 1
    values = np.broadcast_to(here.values, (elements, *here.values.shape[1:]))[..., :n]
    slopes = np.broadcast_to(here.slopes, (elements, *here.slopes.shape[1:]))[..., :n]
    form, mass = np.zeros((elements * n, elements * n)), np.zeros((elements * n, elements * n))
    for e in range(elements):
        block = slice(e * n, (e + 1) * n)
        form[block, block] = slopes[e].T @ np.diag(here.kinetic[e]) @ slopes[e]
        form[block, block] += values[e].T @ np.diag(here.potential[e]) @ values[e]
        mass[block, block] = values[e].T @ np.diag(here.mass[e]) @ values[e]
    form[1, 1] += here.edge[0]
    form[-n, -n] += here.edge[1]
    form[0, 0] += mesh.left.pull
    form[1 - n, 1 - n] += mesh.right.pull
    spread = _spread(mesh, n, elements)
    return spread.conj().T @ form @ spread, spread.conj().T @ mass @ spread


def _spread(mesh, n, elements):
    """Return the coefficients of every element's functions in terms of the free unknowns."""
    spread = np.zeros((elements * n, elements + 1 + elements * (n - 2)), dtype=complex)
    for e in range(elements):
        spread[e * n, e] = spread[e * n + 1, e + 1] = 1
        for k in range(n - 2):
            spread[e * n + 2 + k, elements + 1 + e * (n - 2) + k] = 1
    gone = []
    if mesh.phase is not None:
        spread[:, 0] += np.exp(1j * mesh.phase) * spread[:, elements]
        gone = [elements]
    else:
        gone = [0] * mesh.left.fixed + [elements] * mesh.right.fixed
    spread = np.delete(spread, gone, axis=1)
    return spread.real if mesh.phase in (None, 0.0) else spread


def dense_values(mesh, some):
    """Return all eigenvalues of the full matrices."""
    return linalg.eigh(*assembled(mesh, some), eigvals_only=True)


def bisected(mesh, some, count, low, high):
    """Return the lowest levels of a mesh by bisecting the count of levels below an energy, to 1e-15 of (high - low)."""
    small = condensed(mesh, some)
    left, right = np.full(count, low), np.full(count, high)
    for _ in range(60):
        middle = (left + right) / 2
        below = count_below(small, middle) > np.arange(count)
        left, right = np.where(below, left, middle), np.where(below, middle, right)
    return (left + right) / 2
