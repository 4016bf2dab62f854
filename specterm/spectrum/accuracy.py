"""How far a value can be off: what the polynomials leave out, what the cut of the domain did, what rounding did."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specterm.discrete.elements import residual_share
from specterm.discrete.meshing import unseen
from specterm.discrete.reference import end_slopes
from specterm.spectrum.setting import Setting
from specterm.spectrum.vectors import Solved

Array = NDArray[np.float64]

SAFETY = 4.0
"""Factor on the hierarchical estimate: what lies beyond the spare bubbles, and the coupling between elements, which it leaves out."""
EPS = float(np.finfo(float).eps)
NOISE = 12 * EPS
"""Rounding of a Rayleigh quotient relative to its parts; three times the largest seen over the reference cases."""


@dataclass(frozen=True)
class Accuracy:
    """Parts of the error of each level: `share` (elements, levels) by element, `cut` (2, levels) by end, `noise` (levels,)."""

    share: Array
    cut: Array
    noise: Array

    @property
    def total(self) -> Array:
        """Return the error estimate of each level, shape (levels,)."""
        total: Array = SAFETY * self.share.sum(axis=0) + 2 * self.cut.sum(axis=0) + self.noise
        return total


def accuracy(ready: Setting, solved: Solved) -> Accuracy:
    """Estimate the error of every level solved."""
    share = residual_share(solved.condensed, solved.coefficients, solved.values) + _unseen_share(ready, solved)
    return Accuracy(share, _cut(ready, solved), _noise(ready, solved))


def _unseen_share(ready: Setting, solved: Solved) -> Array:
    """Return by how much each value may be off because the Gauss rule did not see the coefficients whole: (elements, levels)."""
    here = solved.condensed.grid
    n = solved.condensed.mesh.order + 1
    density = np.einsum("eq,eqn->en", here.mass, np.abs(here.values[..., :n] @ solved.coefficients) ** 2)
    slopes = np.einsum("eq,eqn->en", here.mass, np.abs(here.slopes[..., :n] @ solved.coefficients) ** 2)
    potential, stiffness = unseen(solved.condensed.mesh, here, ready.coefficients)
    share: Array = potential[:, None] * density + stiffness[:, None] * slopes
    return share


def _cut(ready: Setting, solved: Solved) -> Array:
    """Return by how much each value would sink if psi were not held at zero where an open end was cut.

    The value moves with the wall as dE/dX = -K psi'(X)^2 (Hadamard's formula); beyond the cut psi' falls at least as exp(-kappa x).
    """
    problem, look, origin = ready.problem, ready.look, ready.floor
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
        here = problem.potential(np.array([place]))[0]
        height = min(here, float(np.min(look.potential[beyond], initial=np.inf))) - origin
        with np.errstate(all="ignore"):
            kappa = np.sqrt(np.maximum(height - solved.values, 0) / stiffness)
            cut[row] = np.where(kappa > 0, stiffness * slope**2 / (2 * kappa), np.inf)
            cut[row] = np.where(slope == 0, 0.0, cut[row])
    return cut


def _noise(ready: Setting, solved: Solved) -> Array:
    """Return a bound on the rounding in each value: of the quotient itself, and of K and V as evaluated."""
    problem, origin = ready.problem, ready.floor
    here = solved.condensed.grid
    n = solved.condensed.mesh.order + 1
    density = here.mass[:, :, None] * np.abs(here.values[..., :n] @ solved.coefficients) ** 2
    slopes = here.kinetic[:, :, None] * np.abs(here.slopes[..., :n] @ solved.coefficients) ** 2
    with np.errstate(all="ignore"):
        potential = problem.noise_potential(here.x.ravel()).reshape(here.x.shape)
        stiffness = problem.noise_stiffness(here.x.ravel()).reshape(here.x.shape) / problem.stiffness(here.x.ravel()).reshape(here.x.shape)
        size = np.abs(here.potential / here.mass)
    height = np.einsum("eq,eqn->n", NOISE * size + potential, density)
    motion = np.einsum("eq,eqn->n", NOISE + stiffness, slopes)
    return height + motion + EPS * np.abs(solved.values + origin)
