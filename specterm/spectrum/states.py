"""Eigenstates as functions: values and slopes anywhere, and on the engine's own points of integration."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from specterm.arrays import Array, Counts, Values
from specterm.discrete.mesh import Mesh
from specterm.discrete.quadrature import gauss_legendre
from specterm.discrete.reference import curvatures, functions
from specterm.model import Function
from specterm.model.regular import regular_slope
from specterm.spectrum.vectors import Solved
from specterm.stopping import check

AT_ONCE = 30_000
"""States are evaluated at so many places at once."""


@dataclass(frozen=True)
class ElementStates:
    """Eigenstates on a mesh of elements; `twist` is the slope of the phase put back into them, or None."""

    solved: Solved
    twist: Function | None

    @property
    def mesh(self) -> Mesh:
        """Return the mesh."""
        return self.solved.condensed.mesh

    @property
    def places(self) -> Array:
        """Return ascending places between which the states are smooth."""
        return self.mesh.places

    @property
    def count(self) -> int:
        """Return the number of states."""
        return self.solved.coefficients.shape[2]

    def evaluate(self, x: Array, derivative: int = 0) -> Values:
        """Return psi (derivative 0), d psi/dx (1) or the second derivative (2) of every state at x, shape (states, len(x)).

        0 outside the mesh. The second derivative is that of the polynomials on each element.
        """
        check()
        x = np.asarray(x, dtype=float)
        if len(x) > AT_ONCE:
            parts = [self.evaluate(x[k : k + AT_ONCE], derivative) for k in range(0, len(x), AT_ONCE)]
            return np.concatenate(parts, axis=1)
        places = self.places
        element = np.clip(np.searchsorted(places, x, side="right") - 1, 0, len(places) - 2)
        inside = (x >= places[0]) & (x <= places[-1])
        jet = self._powered(x, element, self._polynomials(x, element, derivative))
        if self.twist is not None:
            jet = self._turned(x, element, jet)
        return np.where(inside, jet[derivative] * self.signs[:, None], 0)

    def _polynomials(self, x: Array, element: Counts, highest: int) -> list[Values]:
        """Return the polynomials and their derivatives up to the highest asked for, each of shape (states, n)."""
        at = np.clip(2 * (x - self.places[element]) / self.mesh.lengths[element] - 1, -1, 1)
        scale = (2 / self.mesh.lengths[element])[:, None]
        tables = list(functions(self.mesh.order, at)) + ([curvatures(self.mesh.order, at)] if highest > 1 else [])
        taken = self.solved.coefficients[element]
        return [
            np.einsum("xf,xfn->nx", table[:, : self.mesh.order + 1] * scale**k, taken)
            for k, table in enumerate(tables[: highest + 1])
        ]

    def _powered(self, x: Array, element: Counts, jet: list[Values]) -> list[Values]:
        """Return psi and its derivatives: the polynomials times the power taken out at singular ends, by the product rule."""
        factor, growth, bend = self._factor(x, element)
        whole = [jet[0] * factor]
        if len(jet) > 1:
            whole.append(jet[1] * factor + growth * whole[0])
        if len(jet) > 2:
            whole.append(jet[2] * factor + 2 * growth * jet[1] * factor + bend * whole[0])
        return whole

    def _turned(self, x: Array, element: Counts, jet: list[Values]) -> list[Values]:
        """Return psi and its derivatives with the phase put back."""
        if self.twist is None:
            return jet
        turn = np.exp(1j * self._angle(x, element))
        rate = self.twist(x)
        whole = [jet[0] * turn]
        if len(jet) > 1:
            whole.append((jet[1] + 1j * rate * jet[0]) * turn)
        if len(jet) > 2:
            slope = regular_slope(self.twist)(x)
            whole.append((jet[2] + 2j * rate * jet[1] + (1j * slope - rate**2) * jet[0]) * turn)
        return whole

    def _factor(self, x: Array, element: Counts) -> tuple[Array, Array, Array]:
        """Return the power taken out of psi at each place, its logarithmic derivative, and its second one over itself."""
        factor, growth, bend = np.ones_like(x), np.zeros_like(x), np.zeros_like(x)
        lengths = self.mesh.lengths
        for end, number, place, sign in (
            (self.mesh.left, 0, self.places[0], 1.0),
            (self.mesh.right, len(lengths) - 1, self.places[-1], -1.0),
        ):
            if end.power is not None:
                here = element == number
                d = np.maximum(np.abs(x[here] - place), np.finfo(float).tiny)
                factor[here] = (d / lengths[number]) ** end.power
                with np.errstate(over="ignore"):
                    growth[here] = sign * end.power / d
                    bend[here] = end.power * (end.power - 1) / d / d if end.power != 1 else 0.0
        return factor, growth, bend

    @cached_property
    def _angles(self) -> Array:
        """The phase at the left end of each element, from the left end of the mesh."""
        twist = self.twist
        if twist is None:
            return np.zeros(len(self.places) - 1)
        t, w = gauss_legendre(20)
        half = self.mesh.lengths[:, None] / 2
        pieces = (half * w * twist((self.places[:-1, None] + half * (1 + t)).ravel()).reshape(len(half), -1)).sum(axis=1)
        angles: Array = np.concatenate([[0.0], np.cumsum(pieces)[:-1]])
        middle = np.interp((self.places[0] + self.places[-1]) / 2, self.places[:-1], angles)
        return angles - middle

    def _angle(self, x: Array, element: Counts) -> Array:
        """Return the phase at the places x."""
        if self.twist is None:
            return np.zeros_like(x)
        t, w = gauss_legendre(20)
        start = self.places[element]
        half = (x - start)[:, None] / 2
        parts = half * w * self.twist((start[:, None] + half * (1 + t)).ravel()).reshape(len(x), -1)
        angle: Array = self._angles[element] + parts.sum(axis=1)
        return angle

    @cached_property
    def _sampled(self) -> Values:
        """The states, up to factors of modulus one, at the mesh's points of integration: shape (points, states)."""
        here = self.solved.condensed.grid
        psi = here.values[..., : self.mesh.order + 1] @ self.solved.coefficients
        return (psi * here.factor[:, :, None]).reshape(-1, self.count)

    @cached_property
    def sampled(self) -> Values:
        """The states at the mesh's own points of integration, shape (points, states), without the phase that was taken out."""
        return self._sampled * self.signs

    @cached_property
    def signs(self) -> Values:
        """Factors of modulus one that make each state positive on its first lobe from the left."""
        psi = self._sampled
        size = np.abs(psi)
        first = np.argmax(size > 1e-6 * size.max(axis=0), axis=0)
        lead = psi[first, np.arange(self.count)]
        return np.abs(lead) / lead
