"""How far a value can be off: what the polynomials leave out, what the cut of the domain did, what rounding did."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array
from specterm.discrete.elements import gentlest, residual_share
from specterm.discrete.meshing import unseen
from specterm.discrete.quadrature import gauss_jacobi
from specterm.discrete.reference import end_slopes, functions
from specterm.spectrum.setting import Setting
from specterm.spectrum.vectors import Solved

SAFETY = 4.0
"""Factor on the hierarchical estimate, for what it leaves out: higher degrees, and the coupling between elements."""
LIFTED = 10.0
"""Further factor on the rounding of levels far above a deep narrow well, whose state must be kept out of theirs."""
POWERED = 30.0
"""Further factor in an element with a power taken out: what is left there may not be smooth, and higher degrees help slowly."""
EPS = float(np.finfo(float).eps)
NOISE = 12 * EPS
"""Rounding of a Rayleigh quotient relative to its parts; three times the largest seen over the reference cases."""


@dataclass(frozen=True)
class Accuracy:
    """Parts of the error of each level.

    `residual` and `unseen` (elements, levels) are by element, `cut` (2, levels) by end, `noise` (levels,).
    `residual` and `cut` go with the square of the error of the state, `unseen` and `noise` with the coefficients.
    """

    residual: Array
    unseen: Array
    cut: Array
    noise: Array

    @property
    def share(self) -> Array:
        """Return what each element adds to the error of each level, shape (elements, levels)."""
        return self.residual + self.unseen

    @property
    def total(self) -> Array:
        """Return the error estimate of each level, shape (levels,)."""
        total: Array = SAFETY * self.share.sum(axis=0) + 2 * self.cut.sum(axis=0) + self.noise
        return total


def accuracy(ready: Setting, solved: Solved, check: Callable[[], None] = lambda: None) -> Accuracy:
    """Estimate the error of every level solved, in blocks of levels to bound the memory; `check` may raise to stop the work."""
    blocks = []
    for start in range(0, len(solved.values), 64):
        check()
        blocks.append(_block(ready, _part(solved, slice(start, start + 64))))
    joined = (np.concatenate([getattr(b, name) for b in blocks], axis=-1) for name in ("residual", "unseen", "cut", "noise"))
    return Accuracy(*joined)


def _part(solved: Solved, some: slice) -> Solved:
    """Return some of the levels."""
    return Solved(solved.condensed, solved.first, solved.values[some], solved.coefficients[:, :, some], solved.kinetic[some])


def _block(ready: Setting, solved: Solved) -> Accuracy:
    residual = residual_share(solved.condensed, solved.coefficients, solved.values)
    mesh = solved.condensed.mesh
    for side, end in ((0, mesh.left), (-1, mesh.right)):
        if end.power is not None:
            residual[side] *= POWERED
    return Accuracy(residual, _unseen_share(ready, solved), _cut(ready, solved), _noise(ready, solved))


def _unseen_share(ready: Setting, solved: Solved) -> Array:
    """Return how far each value may be off as the Gauss rule did not see the coefficients whole: (elements, levels)."""
    here = solved.condensed.grid
    n = solved.condensed.mesh.order + 1
    density = np.einsum("eq,eqn->en", here.mass, np.abs(here.values[..., :n] @ solved.coefficients) ** 2)
    slopes = np.einsum("eq,eqn->en", here.mass, np.abs(here.slopes[..., :n] @ solved.coefficients) ** 2)
    potential, stiffness = unseen(solved.condensed.mesh, here, ready.coefficients)
    share: Array = potential[:, None] * density + stiffness[:, None] * slopes
    for side, end in ((0, solved.condensed.mesh.left), (-1, solved.condensed.mesh.right)):
        if end.power is not None and end.alpha % 1:
            size = np.abs(solved.values) + float(np.abs(here.potential[side] / here.mass[side]).max())
            share[side] += size * np.abs(_own_mass(solved, side, end.power) - density[side])
    return share


def _own_mass(solved: Solved, side: int, power: float) -> Array:
    """Return the integral of |psi|^2 over a powered end element by the rule made for it: (levels,).

    The element's rule is made for K; where K goes with a broken power of the distance it misses some of the mass.
    """
    mesh = solved.condensed.mesh
    points = solved.condensed.grid.x.shape[1]
    t, w = gauss_jacobi(points, 2 * power)
    values, _ = functions(mesh.order, t if side == 0 else -t)
    psi = np.abs(values[:, : mesh.order + 1] @ solved.coefficients[side]) ** 2
    return mesh.lengths[side] / 2 * 0.25**power * (w @ psi)


def _cut(ready: Setting, solved: Solved) -> Array:
    """Return by how much each value would sink if psi were not held at zero where an open end was cut.

    The value moves with the wall as dE/dX = -K psi'(X)^2 (Hadamard's formula); beyond the cut psi' falls at least as exp(-kappa
    x).
    """
    problem, look, origin = ready.problem, ready.outer, ready.floor
    mesh = solved.condensed.mesh
    cut = np.zeros((2, len(solved.values)))
    slopes = end_slopes(mesh.order)
    ends = ((0, mesh.left, mesh.places[0], problem.left), (-1, mesh.right, mesh.places[-1], problem.right))
    for row, (element, edge, place, true_end) in enumerate(ends):
        if not edge.fixed or place == true_end or problem.ring:
            continue
        slope = np.abs(slopes[row] @ solved.coefficients[element]) * 2 / mesh.lengths[element]
        stiffness = problem.stiffness(np.array([place]))[0]
        beyond = look.x < place if row == 0 else look.x > place
        here = problem.effective(np.array([place]))[0]
        height = min(here, float(np.min(look.potential[beyond], initial=np.inf))) - origin
        with np.errstate(all="ignore"):
            kappa = np.sqrt(np.maximum(height - solved.values, 0) / stiffness)
            cut[row] = np.where(kappa > 0, stiffness * slope**2 / (2 * kappa), np.inf)
            cut[row] = np.where(slope == 0, 0.0, cut[row])
    return cut


def _noise(ready: Setting, solved: Solved) -> Array:
    """Return a bound on the rounding in each value: of the quotient, of K and V, of the places of ends and jumps."""
    problem = ready.problem
    here = solved.condensed.grid
    n = solved.condensed.mesh.order + 1
    density = here.mass[:, :, None] * np.abs(here.values[..., :n] @ solved.coefficients) ** 2
    slopes = here.kinetic[:, :, None] * np.abs(here.slopes[..., :n] @ solved.coefficients) ** 2
    with np.errstate(all="ignore"):
        potential = problem.noise_potential(here.x.ravel()).reshape(here.x.shape)
        stiffness = problem.noise_stiffness(here.x.ravel()) / problem.stiffness(here.x.ravel())
        size = np.abs(here.potential / here.mass)
    lifted = np.where(solved.kinetic < 1e-3 * np.abs(solved.values), LIFTED, 1.0)
    height = lifted * np.einsum("eq,eqn->n", NOISE * size + potential, density)
    motion = np.einsum("eq,eqn->n", NOISE + stiffness.reshape(here.x.shape), slopes)
    gentle = gentlest(solved.condensed)
    least = EPS * np.abs(solved.values + ready.floor) + 1e-3 * EPS * max(np.abs(solved.values).max(initial=0.0), gentle)
    return height + motion + least + _misplaced(ready, solved, density, slopes) + _mispowered(ready, solved, slopes)


def _misplaced(ready: Setting, solved: Solved, density: Array, slopes: Array) -> Array:
    """Return what the rounding of the places of finite ends and jumps does: dE/da = K psi'^2 + (E - V) psi^2 on either side."""
    here, mesh = solved.condensed.grid, solved.condensed.mesh
    places = np.concatenate([ready.problem.edges, [e for e in (ready.problem.left, ready.problem.right) if np.isfinite(e)]])
    flat = np.abs(here.potential / here.mass)[:, :, None] + np.abs(solved.values)
    weight = here.mass[:, :, None] / here.factor[:, :, None] ** 2
    flux = (slopes + flat * density) / weight
    total = np.zeros(len(solved.values))
    for place in places:
        vertex = int(np.searchsorted(mesh.places, place))
        if vertex < len(mesh.places) and mesh.places[vertex] == place:
            beside = [flux[e, q] for e, q in ((vertex - 1, -1), (vertex, 0)) if 0 <= e < len(flux)]
            total += 2 * EPS * abs(place) * np.max(beside, axis=0)
    return total


def _mispowered(ready: Setting, solved: Solved, slopes: Array) -> Array:
    """Return what the rounding of an inverse square's strength does, which Gauss rules see too little of: dE/dc = <K/d^2>."""
    mesh, here = solved.condensed.mesh, solved.condensed.grid
    total = np.zeros(slopes.shape[2])
    for side, vertex, end, place in ((0, 0, mesh.left, mesh.places[0]), (-1, 1, mesh.right, mesh.places[-1])):
        spread = 2 * (end.power or 0.0) + end.alpha - 1
        if end.power is not None and spread > 1e-9:
            stiffness = float(np.abs(here.kinetic[side] / here.mass[side]).max()) * (mesh.lengths[side] / 2) ** 2
            rounding = 4 * EPS if place == 0 else 256 * EPS
            nearest = here.x[side, :1]
            seen = float(ready.problem.noise_potential(nearest)[0]) * float((nearest[0] - place) ** 2)
            seen /= float(ready.problem.stiffness(nearest)[0])
            strength = max(rounding * max(0.25, abs(end.power * (end.power - 1))), seen)
            share = stiffness * np.abs(solved.coefficients[side, vertex]) ** 2 / (mesh.lengths[side] * spread)
            total += strength * share
    return total
