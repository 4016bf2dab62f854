"""The matrix left on the vertices at an energy: levels below it, and vectors near it.

On a mesh with two ends the matrix is tridiagonal, on a ring it has one more coupling between last and first vertex, eliminated
last. All functions take many energies at once.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array, Counts, Values
from specterm.discrete.elements import Condensed
from specterm.discrete.mesh import Mesh
from specterm.stopping import check

BLOCK = 512
"""Energies counted at once, to bound the memory taken."""
ROWS = 30_000
"""Vertices eliminated before anybody is asked whether to go on."""
LARGEST_BLOCK = 1_000_000
"""Elements times energies counted at once, also to hear a stop in time."""


@dataclass(frozen=True)
class Chain:
    """Diagonal (vertices, energies), couplings to the next vertex (vertices - 1, energies), and on a ring the `corner`.

    `corner` (energies,) is the coupling of the last vertex to the first, complex with a Bloch phase; None with two ends.
    """

    diagonal: Array
    side: Array
    corner: Values | None


def chain(condensed: Condensed, energies: Array) -> Chain:
    """Return the vertex matrix at the energies."""
    inverse, pairs = _inverse(condensed, energies), _pairs(condensed)
    terms: Array = -(pairs @ inverse)
    for row, (a, b) in enumerate(((0, 0), (1, 1), (0, 1))):
        terms[:, row] += condensed.stiff[:, a, b, None] - condensed.heavy[:, a, b, None] * energies
    return _joined(condensed.mesh, terms)


def chain_with_mass(condensed: Condensed, energies: Array) -> tuple[Chain, Chain]:
    """Return the vertex matrix at the energies, and minus its derivative with respect to them: the condensed mass."""
    inverse, pairs = _inverse(condensed, energies), _pairs(condensed)
    terms: Array = -(pairs @ inverse)
    heavy: Array = pairs @ (inverse * inverse)
    for row, (a, b) in enumerate(((0, 0), (1, 1), (0, 1))):
        terms[:, row] += condensed.stiff[:, a, b, None] - condensed.heavy[:, a, b, None] * energies
        heavy[:, row] += condensed.heavy[:, a, b, None]
    return _joined(condensed.mesh, terms), _joined(condensed.mesh, heavy)


def _gaps(condensed: Condensed, energies: Array) -> Array:
    """Return pole - energy, (elements, bubbles, energies); where they coincide, one rounding instead of zero."""
    gaps: Array = condensed.poles[:, :, None] - energies
    if not gaps.all():
        gaps = np.where(gaps == 0, np.spacing(np.abs(condensed.poles))[:, :, None], gaps)
    return gaps


def _inverse(condensed: Condensed, energies: Array) -> Array:
    """Return 1/(pole - energy), shape (elements, bubbles, energies)."""
    gaps = _gaps(condensed, energies)
    inverse: Array = np.divide(1.0, gaps, out=gaps)
    return inverse


def _pairs(condensed: Condensed) -> Array:
    """Return products of couplings, (elements, 3, bubbles), for left-left, right-right and left-right."""
    left, right = condensed.coupling[:, 0], condensed.coupling[:, 1]
    return np.stack([left * left, right * right, left * right], axis=1)


def _joined(mesh: Mesh, terms: Array) -> Chain:
    """Return the chain of element terms (elements, 3, energies)."""
    elements = terms.shape[0]
    diagonal = np.zeros((elements + 1, terms.shape[2]))
    diagonal[:-1] += terms[:, 0]
    diagonal[1:] += terms[:, 1]
    side = terms[:, 2]
    if mesh.phase is not None:
        diagonal[0] += diagonal[-1]
        turn = np.exp(1j * mesh.phase)
        corner = side[-1] * (turn.real if abs(turn.imag) < 1e-15 else turn)
        return Chain(diagonal[:-1], side[:-1], corner)
    first, last = int(mesh.left.fixed), elements + 1 - int(mesh.right.fixed)
    return Chain(diagonal[first:last], side[first : last - 1], None)


def count_below(condensed: Condensed, energies: Array) -> Counts:
    """Return the number of levels of the mesh below each energy, by the inertia of the shifted matrix (Sylvester)."""
    block = max(4, min(BLOCK, LARGEST_BLOCK // len(condensed.poles)))
    if len(energies) > block:
        return np.concatenate([count_below(condensed, energies[k : k + block]) for k in range(0, len(energies), block)])
    check()
    matrix = chain(condensed, energies)
    below = np.count_nonzero(condensed.poles[:, :, None] < energies, axis=(0, 1))
    if matrix.corner is None:
        return below + _negative(matrix.diagonal, matrix.side)
    return below + _negative_ring(matrix)


def _negative(diagonal: Array, side: Array) -> Counts:
    """Return the number of negative pivots of tridiagonal matrices, all columns at once."""
    return np.count_nonzero(_pivots(diagonal, side * side, -(np.finfo(float).tiny ** 0.5)) < 0, axis=0)


def _pivots(diagonal: Array, squares: Array, tiny: float) -> Array:
    """Return the pivots of tridiagonal matrices in order, (vertices, columns), exact zeros replaced by `tiny`.

    `squares` are those of the elements beside the diagonal. Zeros are so rare that they are looked for afterwards.
    """
    pivots = diagonal.copy()
    ratio = np.empty(diagonal.shape[1:])
    with np.errstate(all="ignore"):
        for start in range(0, len(pivots), ROWS):
            check()
            some = slice(start, start + ROWS)
            for before, after, square in zip(pivots[some], pivots[1:][some], squares[some], strict=False):
                np.divide(square, before, out=ratio)
                np.subtract(after, ratio, out=after)
    if pivots.all():
        return pivots
    pivots = diagonal.copy()
    with np.errstate(over="ignore"):
        for row in range(len(diagonal) - 1):
            if row % ROWS == 0:
                check()
            pivots[row][pivots[row] == 0] = tiny
            pivots[row + 1] -= squares[row] / pivots[row]
    return pivots


def _negative_ring(matrix: Chain) -> Counts:
    """Return the number of negative pivots with the first vertex eliminated last."""
    if len(matrix.diagonal) == 1 and matrix.corner is not None:
        closed = matrix.diagonal[0] + 2 * np.real(matrix.corner)
        return (closed < 0).astype(np.int64)
    count, last, _ = eliminate_ring(matrix)
    return count + (last < 0)


def eliminate_ring(matrix: Chain) -> tuple[Counts, Array, list[tuple[Array, Values]]]:
    """Eliminate all vertices but the first: return negative pivots, what is left of the first, (pivot, link) of each."""
    tiny = np.finfo(float).tiny ** 0.5
    vertices = len(matrix.diagonal)
    count = np.zeros(matrix.diagonal.shape[1], dtype=np.int64)
    last = matrix.diagonal[0].astype(float).copy()
    steps = []
    pivot = matrix.diagonal[1].copy()
    link = matrix.side[0].astype(complex)
    for row in range(1, vertices):
        if row % ROWS == 0:
            check()
        final = row == vertices - 1
        if final:
            link = link + matrix.corner
        pivot = np.where(pivot == 0, -tiny, pivot)
        count += pivot < 0
        last -= np.abs(link) ** 2 / pivot
        steps.append((pivot, link))
        if not final:
            ratio = matrix.side[row] / pivot
            pivot = matrix.diagonal[row + 1] - matrix.side[row] * ratio
            link = -ratio * link
    return count, last, steps


def twisted_vectors(matrix: Chain, weight: Array) -> tuple[Array, Array, Counts]:
    """Return the vectors z that solve the tridiagonal systems but for one row, the misfit of that row, and the inertia.

    Shapes (vertices, energies) and (energies,): T z = misfit e_r with z_r = 1 and |misfit|/weight_r least over r, the twisted
    factorisation (Parlett and Dhillon, Linear Algebra Appl. 267 (1997) 247). `weight`, shaped like the diagonal, is the
    diagonal of the mass: without it long elements would always win. The inertia (energies,) is the number of negative pivots.
    """
    diagonal, side = matrix.diagonal, matrix.side
    vertices, columns = diagonal.shape
    tiny = np.finfo(float).tiny ** 0.5
    both = np.concatenate([diagonal, diagonal[::-1]], axis=1)
    both = _pivots(both, np.concatenate([side, side[::-1]], axis=1) ** 2, tiny)
    down, up = both[:, :columns], both[::-1, columns:]
    gamma = down + up - diagonal
    twist = np.argmin(np.abs(gamma) / weight, axis=0)
    take = np.arange(columns)
    with np.errstate(over="ignore", invalid="ignore"):
        upward, downward = -side / np.where(down[:-1] == 0, tiny, down[:-1]), -side / np.where(up[1:] == 0, tiny, up[1:])
    rows = np.arange(vertices - 1)[:, None]
    factors = np.concatenate([downward, upward[::-1]], axis=1)
    keep = np.concatenate([rows >= twist, (rows < twist)[::-1]], axis=1)
    runs = np.zeros_like(both)
    runs[np.concatenate([twist, vertices - 1 - twist]), np.arange(2 * columns)] = 1.0
    for start in range(0, len(runs), ROWS):
        check()
        some = slice(start, start + ROWS)
        for factor, kept, before, after in zip(factors[some], keep[some], runs[some], runs[1:][some], strict=False):
            np.multiply(factor, before, out=after, where=kept)
    z = np.where(np.arange(vertices)[:, None] >= twist, runs[:, :columns], runs[::-1, columns:])
    return z, gamma[twist, take], np.count_nonzero(down < 0, axis=0)


def full_vertices(condensed: Condensed, z: Values) -> Values:
    """Return vertex values at both ends of each element, (elements, 2, levels), from those of the free vertices."""
    mesh = condensed.mesh
    elements = len(mesh.places) - 1
    if mesh.phase is not None:
        turn = np.exp(1j * mesh.phase)
        last = z[:1] * (turn.real if abs(turn.imag) < 1e-15 else turn)
        whole = np.concatenate([z, last])
    else:
        whole = np.zeros((elements + 1, z.shape[1]), dtype=z.dtype)
        whole[int(mesh.left.fixed) : elements + 1 - int(mesh.right.fixed)] = z
    return np.stack([whole[:-1], whole[1:]], axis=1)


def element_coefficients(condensed: Condensed, z: Values, energies: Array) -> Values:
    """Return the eigenfunctions' coefficients of the reference functions, (elements, functions, levels), not normalised."""
    ends = full_vertices(condensed, z)
    gaps = _gaps(condensed, energies)
    interior = -(np.swapaxes(condensed.coupling, 1, 2) @ ends) / gaps
    return condensed.basis @ np.concatenate([ends, interior], axis=1)
