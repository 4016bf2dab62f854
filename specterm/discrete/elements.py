"""From coefficients and a mesh to element matrices, condensed onto the vertices.

The form  sum of integrals of K |psi'|^2 + V |psi|^2  is assembled element by element with Gauss rules of more points than the
polynomials need. The interior of each element is diagonalised once, so that the matrix left on the vertices is known in closed
form at every energy below the lowest interior eigenvalue (dynamic condensation; Wittrick and Williams, Q. J. Mech. Appl. Math.
24 (1971) 263, count the levels the same way).

Where psi behaves as d**s at an end, psi = (d/h)**s phi is put into the first element; by partial integration the form becomes K
phi'^2 + (V - s(s-1)K/d^2 - sK'/d) phi^2, both under the weight (d/h)**(2s), plus s K(h)/h phi(h)^2: no large terms cancel.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array
from specterm.discrete.memory import refuse_above
from specterm.discrete.mesh import Edge, Mesh
from specterm.discrete.quadrature import gauss_jacobi, gauss_legendre
from specterm.discrete.reference import SPARE, functions, tabulated
from specterm.stopping import check

Coefficient = Callable[[Array], Array]

AT_ONCE = 4096
"""So many elements are condensed before anybody is asked whether to go on."""
EXTRA_POINTS = 8
"""Gauss points beyond the order of the polynomials."""


@dataclass(frozen=True)
class Coefficients:
    """K, K' and V at places (n,), and bounds of the rounding in V and K; V is measured from `origin`."""

    stiffness: Coefficient
    slope: Coefficient
    potential: Coefficient
    noise_potential: Coefficient
    noise_stiffness: Coefficient
    origin: float


@dataclass(frozen=True)
class Grid:
    """Where the integrals are taken, and the coefficients there; shapes (elements, points) unless said.

    `x` places, `factor` the power taken out (1 in ordinary elements), `kinetic`, `potential` and `mass` the weights under
    phi_t^2, phi^2 and phi^2 (t runs from -1 to 1), quadrature weights and factors included; `edge` of shape (2,) is added to
    the outer vertex terms of the first and last element; `values` and `slopes` of shape (elements or 1, points, functions).
    """

    x: Array
    factor: Array
    kinetic: Array
    potential: Array
    mass: Array
    edge: Array
    values: Array
    slopes: Array


def grid(mesh: Mesh, coefficients: Coefficients) -> Grid:
    """Return the places of integration and the coefficients there; non-finite coefficients stay in the arrays."""
    points = mesh.order + EXTRA_POINTS
    t, w = gauss_legendre(points)
    h = mesh.lengths
    powered = mesh.left.power is not None or mesh.right.power is not None
    tables = 2 * (mesh.order + 1 + SPARE) if powered else 0
    refuse_above(8.0 * len(h) * points * (10 + tables), f"a mesh of {len(h)} elements")
    x = mesh.places[:-1, None] + (h / 2)[:, None] * (t + 1)
    right_half = t > 0
    x[:, right_half] = mesh.places[1:, None] - (h / 2)[:, None] * (1 - t[right_half])
    stiffness = coefficients.stiffness(x.ravel()).reshape(x.shape)
    potential = coefficients.potential(x.ravel()).reshape(x.shape)
    check()
    weight = (h / 2)[:, None] * w
    factor = np.ones_like(x)
    edge = np.zeros(2)
    values, slopes = tabulated(mesh.order, points)
    values, slopes = values[None], slopes[None]
    if powered:
        values, slopes = _repeated(values, len(h)), _repeated(slopes, len(h))
        for side, end in ((0, mesh.left), (-1, mesh.right)):
            if end.power is not None:
                parts = _powered(mesh, coefficients, side, end)
                x[side], weight[side], factor[side], stiffness[side], potential[side], edge[side] = parts[:6]
                values[side], slopes[side] = parts[6:]
    mass = weight * factor**2
    return Grid(x, factor, mass * stiffness * (2 / h[:, None]) ** 2, mass * potential, mass, edge, values, slopes)


def _repeated(table: Array, count: int) -> Array:
    """Return one table for each element, all alike."""
    whole = np.empty((count, *table.shape[1:]))
    for start in range(0, count, AT_ONCE):
        check()
        whole[start : start + AT_ONCE] = table
    return whole


def _powered(mesh: Mesh, coefficients: Coefficients, side: int, end: Edge) -> tuple[Array, ...]:
    """Return x, weights, factor, K, W, the edge term, values and slopes of an element with a power taken out."""
    power = end.power or 0.0
    beta = 2 * power + end.alpha - 1
    points = mesh.order + EXTRA_POINTS
    t, w = gauss_jacobi(points, beta)
    h = mesh.lengths[side]
    near, sign = (mesh.places[0], 1.0) if side == 0 else (mesh.places[-1], -1.0)
    d = h / 2 * (1 + t)
    x = near + sign * d
    d = np.abs(x - near)
    stiffness = coefficients.stiffness(x)
    slope = sign * coefficients.slope(x)
    potential = coefficients.potential(x) - power * (power - 1) * stiffness / d**2 - power * slope / d
    inner = near + sign * h
    edge = power * coefficients.stiffness(np.array([inner]))[0] / h
    values, slopes = functions(mesh.order, sign * t)
    weight = h / 2 * w / (1 + t) ** beta
    return x, weight, (d / h) ** power, stiffness, potential, edge, values, slopes


@dataclass(frozen=True)
class Condensed:
    """Element matrices with diagonal interiors.

    `poles` (elements, bubbles): interior eigenvalues; `coupling` (elements, 2, bubbles); `stiff` and `heavy` (elements, 2, 2):
    the vertex parts of form and mass; `basis` (elements, functions, functions): columns are the new functions (two vertex
    functions without mass overlap with the interior, then interior eigenfunctions) in terms of the reference functions.
    """

    mesh: Mesh
    grid: Grid
    poles: Array
    coupling: Array
    stiff: Array
    heavy: Array
    basis: Array


def gentlest(condensed: Condensed) -> float:
    """Return the least K (pi/width)^2: the kinetic energy of the longest wave the mesh can hold."""
    mesh, here = condensed.mesh, condensed.grid
    stiffness = float(np.min(here.kinetic / here.mass * (mesh.lengths[:, None] / 2) ** 2))
    return stiffness * float(np.pi / (mesh.places[-1] - mesh.places[0])) ** 2


def condense(mesh: Mesh, here: Grid) -> Condensed:
    """Assemble the element matrices and diagonalise the interiors, some elements at a time where they are many."""
    count = len(mesh.lengths)
    parts = _some_condensed(mesh, here, slice(0, min(count, AT_ONCE)))
    if count > AT_ONCE:
        whole = [np.empty((count, *part.shape[1:])) for part in parts]
        for start in range(0, count, AT_ONCE):
            check()
            some = slice(start, min(start + AT_ONCE, count))
            for array, part in zip(whole, _some_condensed(mesh, here, some) if start else parts, strict=True):
                array[some] = part
        parts = (whole[0], whole[1], whole[2], whole[3], whole[4])
    return Condensed(mesh, here, *parts)


Parts = tuple[Array, Array, Array, Array, Array]
"""Poles, coupling, stiff, heavy and basis of some elements, as in `Condensed`."""


def _some_condensed(mesh: Mesh, here: Grid, some: slice) -> Parts:
    """Return the condensed matrices of some neighbouring elements."""
    n = mesh.order + 1
    own = some if len(here.values) > 1 else slice(None)
    values, slopes = here.values[own, ..., :n], here.slopes[own, ..., :n]
    form = _gram(slopes, here.kinetic[some]) + _gram(values, here.potential[some])
    mass = _gram(values, here.mass[some])
    if some.start == 0:
        form[0, 1, 1] += here.edge[0]
        form[0, 0, 0] += mesh.left.pull
    if some.stop == len(mesh.lengths):
        form[-1, 0, 0] += here.edge[1]
        form[-1, 1, 1] += mesh.right.pull
    return _diagonalise(mesh, mesh.lengths[some], form, mass)


def _gram(functions: Array, weights: Array) -> Array:
    """Return the integrals of f_i f_j under the weights: (elements, functions, functions)."""
    return np.swapaxes(functions, -1, -2) @ (weights[:, :, None] * functions)


def _diagonalise(mesh: Mesh, lengths: Array, form: Array, mass: Array) -> Parts:
    """Return the condensed form: whiten each interior, diagonalise it, take its mass overlap off the vertex functions.

    The bubbles are orthonormal in L2(-1, 1): the mass of an interior is half the length times the unit matrix, but for the
    factors of powered ends.
    """
    if mesh.left.power is None and mesh.right.power is None:
        scale = np.sqrt(2 / lengths)[:, None, None]
        poles, modes = np.linalg.eigh(scale**2 * form[:, 2:, 2:])
        interior = scale * modes
    else:
        white = np.linalg.inv(np.linalg.cholesky(mass[:, 2:, 2:]))
        inner = white @ form[:, 2:, 2:] @ np.swapaxes(white, 1, 2)
        poles, modes = np.linalg.eigh((inner + np.swapaxes(inner, 1, 2)) / 2)
        interior = np.swapaxes(white, 1, 2) @ modes
    overlap = mass[:, :2, 2:] @ interior
    pull = form[:, :2, 2:] @ interior
    coupling = pull - overlap * poles[:, None, :]
    turned = np.swapaxes(overlap, 1, 2)
    cross = pull @ turned
    stiff = form[:, :2, :2] - cross - np.swapaxes(cross, 1, 2) + (overlap * poles[:, None, :]) @ turned
    heavy = mass[:, :2, :2] - overlap @ turned
    basis = np.zeros(form.shape)
    basis[:, 0, 0] = basis[:, 1, 1] = 1.0
    basis[:, 2:, :2] = -interior @ turned
    basis[:, 2:, 2:] = interior
    return poles, coupling, stiff, heavy, basis


def residual_share(condensed: Condensed, coefficients: Array, values: Array) -> Array:
    """Return how far each value would sink if every element had `SPARE` more bubbles: shape (elements, levels).

    Second-order estimate from the residual against the spare bubbles, one element at a time (hierarchical error estimate;
    Bank and Smith, SIAM J. Numer. Anal. 30 (1993) 921). `coefficients` has shape (elements, functions, levels).
    """
    n = condensed.mesh.order + 1
    here = condensed.grid
    spare, spare_slopes = here.values[..., n : n + SPARE], here.slopes[..., n : n + SPARE]
    psi, slope = here.values[..., :n] @ coefficients, here.slopes[..., :n] @ coefficients
    flat = here.potential[:, :, None] - values * here.mass[:, :, None]
    residual = np.swapaxes(spare_slopes, -1, -2) @ (here.kinetic[:, :, None] * slope) + np.swapaxes(spare, -1, -2) @ (
        flat * psi
    )
    own = np.einsum("eqm,eq->em", spare_slopes**2, here.kinetic, optimize=False)
    share = np.abs(residual) ** 2 / np.maximum(own, np.finfo(float).tiny)[:, :, None]
    total: Array = share.sum(axis=1)
    return total
