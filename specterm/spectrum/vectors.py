"""Eigenvectors on one mesh, from brackets; values as Rayleigh quotients taken element by element."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from specterm import stopping
from specterm.arrays import Array, Counts, Values
from specterm.discrete.chain import BLOCK, Chain, chain_with_mass, count_below, element_coefficients, twisted_vectors
from specterm.discrete.elements import Condensed
from specterm.discrete.memory import refuse_above
from specterm.spectrum.isolate import Group, Ruler, isolate

SETTLED = 1e-12
"""Newton steps smaller than this share of the level end the iteration: so far below `CLOSE` that no neighbour is mixed in."""
FORETOLD = 0.01
"""Newton's method is at an end where quadratic convergence foretells a step of less than this share of the rounding."""
STRAY = 1e-9
"""A Rayleigh quotient this share of the level away from where Newton's method ended: a bad vector, solved again."""
PAIRED = 1e-6
"""On a ring, levels closer than this share of theirs are solved together: they come as pairs."""
LARGEST_BLOCK = 4_000_000
"""Elements times pairs of levels integrated at once."""
GROUP_SWEEPS = 12
"""So many inverse iterations are spent on a group at most."""
DENSE = 80
"""Up to so many vertices groups are solved with a dense matrix: beyond, sparse ones win more than their import costs."""


@dataclass(frozen=True)
class Solved:
    """Levels `first` ... on one mesh.

    `values` (n,), normalised `coefficients` (elements, functions, n), and `kinetic` (n,), the mean of
    the part of the form with derivatives. Values are measured from the origin of the potential.
    """

    condensed: Condensed
    first: int
    values: Array
    coefficients: Values
    kinetic: Array


@dataclass(frozen=True)
class Part:
    """Some neighbouring levels on their way into `Solved`."""

    first: int
    values: Array
    coefficients: Values
    kinetic: Array


def solve_levels(
    condensed: Condensed,
    first: int,
    last: int,
    low: float,
    high: float,
    ruler: Ruler,
    check: Callable[[], None] = lambda: None,
    groups: list[Group] | None = None,
) -> Solved:
    """Return levels number first ... last of the mesh.

    There must be at least last + 1 levels below `high` and at most `first` below `low`. Levels closer than `ruler` says are
    solved together. `check` is called now and then and may raise to stop the work. `groups` are brackets known beforehand.
    """

    def count(energies: Array) -> Counts:
        parts = []
        for start in range(0, len(energies), BLOCK):
            check()
            parts.append(count_below(condensed, energies[start : start + BLOCK]))
        return np.concatenate(parts)

    if groups is None:
        groups = isolate(count, first, last, low, high, ruler)
    single = condensed.mesh.phase is None
    loners = [g for g in groups if g.size == 1 and single]
    parts: list[Part] = []
    for start in range(0, len(loners), 64):
        check()
        some = loners[start : start + 64]
        energies, z = _newton(condensed, some, ruler, check)
        found = _quotients(condensed, [g.first for g in some], element_coefficients(condensed, z, energies))
        parts += [
            part if abs(part.values[0] - energy) <= STRAY * abs(energy - ruler.bottom) else _group(condensed, group, ruler)
            for part, energy, group in zip(found, energies, some, strict=True)
        ]
    for group in groups:
        if group.size > 1 or not single:
            check()
            parts.append(_group(condensed, group, ruler))
    if not parts:
        raise np.linalg.LinAlgError("no level in the bracket")
    parts = _merged(condensed, sorted(parts, key=lambda part: part.first), ruler)
    start = parts[0].first
    take = slice(first - start, last + 1 - start)
    values, kinetic = (np.concatenate([getattr(p, name) for p in parts])[take] for name in ("values", "kinetic"))
    if not len(values):
        raise np.linalg.LinAlgError("no level of the numbers asked for")
    return Solved(condensed, first, values, np.concatenate([p.coefficients for p in parts], axis=2)[:, :, take], kinetic)


def _merged(condensed: Condensed, parts: list[Part], ruler: Ruler) -> list[Part]:
    """Solve again, as one group, neighbours whose values came out closer than a count can tell apart."""
    runs: list[list[Part]] = []
    ring = condensed.mesh.phase is not None
    for part in parts:
        value = float(part.values[0])
        reach = max(3 * ruler.close(value), PAIRED * abs(value - ruler.bottom) if ring else 0.0)
        close = runs and value - runs[-1][-1].values[-1] <= reach
        if close:
            runs[-1].append(part)
        else:
            runs.append([part])
    whole = []
    for run in runs:
        if len(run) == 1:
            whole.append(run[0])
            continue
        values = np.concatenate([p.values for p in run])
        size = sum(len(p.values) for p in run)
        whole.append(_group(condensed, Group(run[0].first, size, float(values.min()), float(values.max())), ruler))
    return whole


def _newton(condensed: Condensed, groups: list[Group], ruler: Ruler, check: Callable[[], None]) -> tuple[Array, Array]:
    """Return energies and vertex vectors of single levels by Newton's method, kept inside shrinking brackets.

    A step must be small against the level and against its distance to where a continuum begins, and what is left of it must
    be rounding: it no longer falls, or the two steps before it, falling quadratically, foretell less than rounding. Every
    fifth step halves the bracket, so that the iteration ends whatever the start.
    """
    low, high = np.array([g.low for g in groups]), np.array([g.high for g in groups])
    numbers = np.array([g.first for g in groups])
    energies = (low + high) / 2
    slack = 1e-3 * SETTLED * np.abs(energies - ruler.bottom)
    before = foretold = np.full(len(groups), np.inf)
    for number in range(120):
        check()
        matrix, weight = chain_with_mass(condensed, energies)
        z, misfit, inertia = twisted_vectors(matrix, weight.diagonal)
        below = inertia + np.count_nonzero(condensed.poles[:, :, None] < energies, axis=(0, 1)) > numbers
        high, low = np.where(below, energies, high), np.where(below, low, energies)
        with np.errstate(all="ignore"):
            step = misfit / _quadratic(weight, z)
        trial = energies + step
        inside = (trial > low - slack) & (trial < high + slack) & np.isfinite(step)
        fine = np.minimum(SETTLED * np.abs(trial - ruler.bottom), 1e-4 * np.abs(ruler.top - trial))
        tiny = 4 * np.spacing(np.abs(energies))
        near = inside & (np.abs(step) <= np.maximum(fine, tiny))
        stalled = (np.abs(step) <= tiny) | (np.abs(step) >= 0.25 * before) | (foretold <= FORETOLD * tiny)
        settled = (near & stalled) | (high - low <= tiny)
        if settled.all():
            break
        halve = ~inside | ((number % 5 == 4) & ~near)
        with np.errstate(all="ignore"):
            foretold = np.where(halve | ~np.isfinite(before), np.inf, np.abs(step) * (step / before) ** 2)
        before = np.where(halve, np.inf, np.abs(step))
        energies = np.where(settled, energies, np.where(halve, (low + high) / 2, trial))
    return energies, z


def _quadratic(matrix: Chain, z: Array) -> Array:
    """Return z.T M z for each column of a tridiagonal M."""
    total: Array = (matrix.diagonal * z * z).sum(axis=0) + 2 * (matrix.side * z[1:] * z[:-1]).sum(axis=0)
    return total


def _quotients(condensed: Condensed, numbers: list[int], coefficients: Values) -> list[Part]:
    """Normalise single eigenfunctions and return the part each makes."""
    values, kinetic, coefficients = quotients(condensed, coefficients)
    return [
        Part(number, values[k : k + 1], coefficients[:, :, k : k + 1], kinetic[k : k + 1]) for k, number in enumerate(numbers)
    ]


def quotients(condensed: Condensed, coefficients: Values) -> tuple[Array, Array, Values]:
    """Return the Rayleigh quotient of each function (n,), its part with derivatives (n,), and the functions normalised.

    `coefficients` has shape (elements, functions, n).
    """
    here = condensed.grid
    n = condensed.mesh.order + 1
    scale = np.sqrt((np.abs(coefficients[:, :2]) ** 2).sum(axis=(0, 1)) + (np.abs(coefficients[:, 2:]) ** 2).sum(axis=(0, 1)))
    coefficients = coefficients / scale
    density = np.abs(here.values[..., :n] @ coefficients) ** 2
    slopes = np.abs(here.slopes[..., :n] @ coefficients) ** 2
    mass = _integral(here.mass, density)
    kinetic = (_integral(here.kinetic, slopes) + _edges(condensed, coefficients)) / mass
    values = kinetic + _integral(here.potential, density) / mass
    return values, kinetic, coefficients / np.sqrt(mass)


def _integral(weights: Array, integrand: Array) -> Array:
    """Return the integrals of (elements, points, levels) under weights (elements, points), summed pairwise."""
    parts = np.einsum("eq,eqn->ne", weights, integrand)
    total: Array = np.ascontiguousarray(parts).sum(axis=1)
    return total


def _matrix_integral(functions: Values, weights: Array) -> Values:
    """Return the integrals of conj(f_i) f_j (elements, points, levels) under weights, summed pairwise over the elements."""
    block = max(64, LARGEST_BLOCK // functions.shape[2] ** 2)
    if len(functions) > block:
        starts = range(0, len(functions), block)
        return np.sum([_matrix_integral(functions[k : k + block], weights[k : k + block]) for k in starts], axis=0)
    stopping.check()
    parts = np.swapaxes(functions.conj(), 1, 2) @ (weights[:, :, None] * functions)
    return np.ascontiguousarray(np.moveaxis(parts, 0, -1)).sum(axis=-1)


def _edges(condensed: Condensed, coefficients: Values) -> Array:
    """Return the boundary terms of powered end elements for each level."""
    edge = condensed.grid.edge
    total: Array = edge[0] * np.abs(coefficients[0, 1]) ** 2 + edge[1] * np.abs(coefficients[-1, 0]) ** 2
    return total


def _group(condensed: Condensed, group: Group, ruler: Ruler) -> Part:
    """Return the levels of one group by inverse iteration on a block and small Rayleigh-Ritz problems.

    The first takes the interiors of the elements at the group's energy; the second at each level's own.
    """
    z, energy = _block(condensed, group, ruler)
    energies = np.full(z.shape[1], energy)
    for _ in range(2):
        coefficients = element_coefficients(condensed, z, energies)
        values, mix, kinetic = _ritz(condensed, coefficients, energy)
        z, energies = z @ mix, energy + values
    own = np.real(np.einsum("ki,kl,li->i", mix.conj(), kinetic, mix))
    return Part(group.first, energies, coefficients @ mix, own)


def _ritz(condensed: Condensed, coefficients: Values, energy: float) -> tuple[Array, Values, Values]:
    """Return values measured from `energy`, the mixture that makes the levels, and the form's part with derivatives."""
    here = condensed.grid
    n = condensed.mesh.order + 1
    psi, slope = here.values[..., :n] @ coefficients, here.slopes[..., :n] @ coefficients
    mass = _matrix_integral(psi, here.mass)
    kinetic = _matrix_integral(slope, here.kinetic)
    for side, column, edge in ((0, 1, here.edge[0]), (-1, 0, here.edge[1])):
        kinetic = kinetic + edge * np.outer(coefficients[side, column].conj(), coefficients[side, column])
    form = kinetic + _matrix_integral(psi, here.potential)
    white = np.linalg.inv(np.linalg.cholesky(mass)).conj().T
    inner = white.conj().T @ (form - energy * mass) @ white
    values, mix = np.linalg.eigh((inner + inner.conj().T) / 2)
    return values, white @ mix, kinetic


def _block(condensed: Condensed, group: Group, ruler: Ruler) -> tuple[Values, float]:
    """Return vertex vectors (vertices, size) spanning the group's space, and the energy they belong to.

    Inverse iteration with a block; for a single level the energy follows its Rayleigh quotient, kept inside a bracket that
    counts shrink.
    """
    low, high = group.low, group.high
    energy = (low + high) / 2
    slack = 1e-3 * SETTLED * abs(energy - ruler.bottom)
    vertices = _vertices(condensed)
    refuse_above(64.0 * vertices * group.size, f"telling {group.size} levels apart")
    start = np.random.default_rng(20).standard_normal((vertices, group.size))
    z: Values = start
    near, settled_ritz = False, np.zeros(group.size)
    for sweep in range(80):
        stopping.check()
        if sweep == 0 or group.size == 1:
            matrix, weight = chain_with_mass(condensed, np.array([energy]))
            solve, heavy, form = _solver(matrix), _matrix(weight), _matrix(matrix)
        z, _ = np.linalg.qr(solve(heavy @ z))
        ritz = np.linalg.eigvals(np.linalg.solve(z.conj().T @ (heavy @ z), z.conj().T @ (form @ z))).real
        step = float(np.mean(ritz))
        if group.size > 1:
            ritz, before_ritz = np.sort(ritz), settled_ritz
            if sweep >= 3 and (np.abs(ritz - before_ritz).max() <= 4 * np.spacing(abs(energy)) or sweep >= GROUP_SWEEPS):
                break
            settled_ritz = ritz
            continue
        near, before = abs(step) <= max(SETTLED * abs(energy - ruler.bottom), 4 * np.spacing(abs(energy))), near
        if sweep >= 1 and near and before:
            break
        below = count_below(condensed, np.array([energy]))[0] > group.first
        low, high = (low, energy) if below else (energy, high)
        inside = low - slack < energy + step < high + slack
        energy = energy + step if inside and sweep % 5 != 4 else (low + high) / 2
    return z, energy


def _vertices(condensed: Condensed) -> int:
    """Return the number of free vertices."""
    mesh = condensed.mesh
    return len(mesh.places) - (1 if mesh.phase is not None else int(mesh.left.fixed) + int(mesh.right.fixed))


def _matrix(matrix: Chain):  # type: ignore[no-untyped-def]  # noqa: ANN202 - dense array or scipy.sparse array, same operators
    """Return the one matrix of a chain with a single column: dense up to `DENSE` vertices, sparse above."""
    diagonal, side = matrix.diagonal[:, 0], matrix.side[:, 0]
    corner = None if matrix.corner is None else matrix.corner[0]
    if len(diagonal) <= DENSE:
        kind = complex if corner is not None and np.iscomplexobj(corner) else float
        dense = (np.diag(diagonal) + np.diag(side, 1) + np.diag(side, -1)).astype(kind)
        if corner is not None:
            dense[-1, 0] += corner
            dense[0, -1] += np.conj(corner)
        return dense
    from scipy.sparse import diags_array  # noqa: PLC0415 - only large groups need it

    bands, offsets = [side, diagonal, side], [-1, 0, 1]
    if corner is not None:
        bands, offsets = (
            [*bands, np.array([corner]), np.array([np.conj(corner)])],
            [*offsets, 1 - len(diagonal), len(diagonal) - 1],
        )
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
    from scipy.sparse.linalg import splu  # noqa: PLC0415 - as above

    try:
        return splu(whole).solve
    except RuntimeError:
        from scipy.sparse import eye_array  # noqa: PLC0415 - as above

        shake = np.finfo(float).eps * np.abs(whole.data).max()
        try:
            return splu(whole + shake * eye_array(whole.shape[0], format="csc")).solve
        except RuntimeError as error:
            raise np.linalg.LinAlgError(str(error)) from None
