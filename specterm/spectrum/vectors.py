"""Eigenvectors on one mesh, from brackets; values as Rayleigh quotients taken element by element."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specterm.discrete.chain import Chain, chain, count_below, element_coefficients, twisted_vectors
from specterm.discrete.elements import Condensed
from specterm.spectrum.isolate import Group, isolate

Array = NDArray[np.float64]
Values = NDArray[np.generic]

DENSE = 700
"""Up to so many vertices groups are solved with a dense matrix."""


@dataclass(frozen=True)
class Solved:
    """Levels `first` ... on one mesh: `values` (n,), normalised `coefficients` (elements, functions, n), and `kinetic` (n,), the mean of
    the part of the form with derivatives. Values are measured from the origin of the potential.
    """

    condensed: Condensed
    first: int
    values: Array
    coefficients: Values
    kinetic: Array


def solve_levels(condensed: Condensed, first: int, last: int, low: float, high: float) -> Solved:
    """Return levels number first ... last of the mesh; there must be at least last + 1 below `high` and none below `low`."""
    groups = isolate(lambda energies: count_below(condensed, energies), first, last, low, high)
    single = condensed.mesh.phase is None
    loners = [g for g in groups if g.size == 1 and single]
    parts: list[tuple[int, Array, Values, Array]] = []
    for start in range(0, len(loners), 64):
        some = loners[start : start + 64]
        energies, z = _newton(condensed, some)
        coefficients = element_coefficients(condensed, z, energies)
        parts += _quotients(condensed, [g.first for g in some], coefficients)
    for group in groups:
        if group.size > 1 or not single:
            parts.append(_group(condensed, group))
    parts.sort(key=lambda part: part[0])
    values = np.concatenate([p[1] for p in parts])
    start = parts[0][0]
    take = slice(first - start, last + 1 - start)
    coefficients = np.concatenate([p[2] for p in parts], axis=2)[:, :, take]
    return Solved(condensed, first, values[take], coefficients, np.concatenate([p[3] for p in parts])[take])


def _newton(condensed: Condensed, groups: list[Group]) -> tuple[Array, Array]:
    """Return energies and vertex vectors of single levels: Newton's method on the vertex matrix, kept inside each bracket."""
    low, high = np.array([g.low for g in groups]), np.array([g.high for g in groups])
    numbers = np.array([g.first for g in groups])
    energies = (low + high) / 2
    for _ in range(60):
        z, misfit = twisted_vectors(chain(condensed, energies))
        weight = chain(condensed, energies, mass=True)
        with np.errstate(all="ignore"):
            step = misfit / _quadratic(weight, z)
        trial = energies + step
        inside = (trial > low) & (trial < high) & np.isfinite(step)
        size = np.abs(np.where(inside, step, high - low))
        settled = inside & (size <= 1e-8 * (trial - low.min()))
        if settled.all():
            return trial, z
        if not inside.all():
            below = count_below(condensed, energies) > numbers
            high, low = np.where(below, energies, high), np.where(below, low, energies)
        energies = np.where(inside, trial, (low + high) / 2)
    return energies, z


def _quadratic(matrix: Chain, z: Array) -> Array:
    """Return z.T M z for each column of a tridiagonal M."""
    total: Array = (matrix.diagonal * z * z).sum(axis=0) + 2 * (matrix.side * z[1:] * z[:-1]).sum(axis=0)
    return total


def _quotients(condensed: Condensed, numbers: list[int], coefficients: Values) -> list[tuple[int, Array, Values, Array]]:
    """Normalise single eigenfunctions and return (number, value, coefficients, kinetic) of each."""
    here = condensed.grid
    n = condensed.mesh.order + 1
    scale = np.sqrt((np.abs(coefficients[:, :2]) ** 2).sum(axis=(0, 1)) + (np.abs(coefficients[:, 2:]) ** 2).sum(axis=(0, 1)))
    coefficients = coefficients / scale
    density = np.abs(here.values[..., :n] @ coefficients) ** 2
    slopes = np.abs(here.slopes[..., :n] @ coefficients) ** 2
    mass = np.einsum("eq,eqn->n", here.mass, density)
    kinetic = (np.einsum("eq,eqn->n", here.kinetic, slopes) + _edges(condensed, coefficients)) / mass
    values = kinetic + np.einsum("eq,eqn->n", here.potential, density) / mass
    coefficients = coefficients / np.sqrt(mass)
    return [(number, values[k : k + 1], coefficients[:, :, k : k + 1], kinetic[k : k + 1]) for k, number in enumerate(numbers)]


def _edges(condensed: Condensed, coefficients: Values) -> Array:
    """Return the boundary terms of powered end elements for each level."""
    edge = condensed.grid.edge
    total: Array = edge[0] * np.abs(coefficients[0, 1]) ** 2 + edge[1] * np.abs(coefficients[-1, 0]) ** 2
    return total


def _group(condensed: Condensed, group: Group) -> tuple[int, Array, Values, Array]:
    """Return the levels of one group by inverse iteration on a block and a small Rayleigh-Ritz problem."""
    z, energy = _block(condensed, group)
    coefficients = element_coefficients(condensed, z, np.full(z.shape[1], energy))
    here = condensed.grid
    n = condensed.mesh.order + 1
    psi, slope = here.values[..., :n] @ coefficients, here.slopes[..., :n] @ coefficients
    mass = np.einsum("eqi,eq,eqj->ij", psi.conj(), here.mass, psi)
    kinetic = np.einsum("eqi,eq,eqj->ij", slope.conj(), here.kinetic, slope)
    for side, column, edge in ((0, 1, here.edge[0]), (-1, 0, here.edge[1])):
        kinetic = kinetic + edge * np.outer(coefficients[side, column].conj(), coefficients[side, column])
    form = kinetic + np.einsum("eqi,eq,eqj->ij", psi.conj(), here.potential, psi)
    white = np.linalg.inv(np.linalg.cholesky(mass)).conj().T
    inner = white.conj().T @ (form - energy * mass) @ white
    values, mix = np.linalg.eigh((inner + inner.conj().T) / 2)
    mix = white @ mix
    own = np.real(np.einsum("ki,kl,li->i", mix.conj(), kinetic, mix))
    return group.first, energy + values, coefficients @ mix, own


def _block(condensed: Condensed, group: Group) -> tuple[Values, float]:
    """Return vertex vectors (vertices, size) spanning the group's space, and the energy they belong to."""
    energy = (group.low + group.high) / 2
    rng = np.random.default_rng(20)
    z: Values = np.empty((0, 0))
    for sweep in range(8):
        matrix, weight = (chain(condensed, np.array([energy]), mass=m) for m in (False, True))
        solve, heavy = _solver(matrix), _matrix(weight)
        if sweep == 0:
            z = solve(heavy @ rng.standard_normal((heavy.shape[0], group.size)))
        z, _ = np.linalg.qr(solve(heavy @ z))
        ritz = np.linalg.eigvals(np.linalg.solve(z.conj().T @ (heavy @ z), z.conj().T @ (_matrix(matrix) @ z))).real
        step = float(np.mean(ritz))
        settled = abs(step) <= 1e-9 * (group.high - group.low) or abs(step) <= 4 * np.spacing(abs(energy))
        if sweep >= 2 and (group.size > 1 or settled):
            break
        if group.size == 1 and group.low < energy + step < group.high:
            energy += step
    return z, energy


def _matrix(matrix: Chain):  # type: ignore[no-untyped-def]  # noqa: ANN202 - dense array or scipy.sparse array, same operators
    """Return the one matrix of a chain with a single column: dense up to `DENSE` vertices, sparse above."""
    diagonal, side = matrix.diagonal[:, 0], matrix.side[:, 0]
    corner = None if matrix.corner is None else matrix.corner[0]
    if len(diagonal) <= DENSE:
        kind = complex if np.iscomplexobj(corner) else float
        dense = (np.diag(diagonal) + np.diag(side, 1) + np.diag(side, -1)).astype(kind)
        if corner is not None:
            dense[-1, 0] += np.conj(corner)
            dense[0, -1] += corner
        return dense
    from scipy.sparse import diags_array

    bands, offsets = [side, diagonal, side], [-1, 0, 1]
    if corner is not None:
        bands, offsets = [*bands, np.array([np.conj(corner)]), np.array([corner])], [*offsets, 1 - len(diagonal), len(diagonal) - 1]
    return diags_array(bands, offsets=offsets, shape=(len(diagonal), len(diagonal))).tocsc()


def _solver(matrix: Chain):  # type: ignore[no-untyped-def]  # noqa: ANN202 - a callable on arrays, from numpy or scipy.sparse
    """Return a function that solves with the one matrix of a chain; an exactly singular one is moved by a rounding error."""
    whole = _matrix(matrix)
    if isinstance(whole, np.ndarray):
        shake = np.finfo(float).eps * np.abs(whole).max() * np.eye(len(whole))

        def solve(right: Values) -> Values:
            try:
                return np.linalg.solve(whole, right)
            except np.linalg.LinAlgError:
                return np.linalg.solve(whole + shake, right)

        return solve
    from scipy.sparse.linalg import splu

    return splu(whole).solve
