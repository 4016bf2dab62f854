"""A mesh: where the elements begin and end, and what holds at its two ends."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from specterm.arrays import Array, Flags


@dataclass(frozen=True)
class Edge:
    """What holds at one end of the mesh.

    `fixed`: psi = 0 there (a wall, or the place where a decaying state was cut). `power`: psi behaves as d**power in the
    first element, d the distance from the end (None for a regular end); then the factor is taken out of the polynomials.
    `alpha`: the coefficient between the momenta behaves as d**alpha there. `pull`: added to the form as pull |psi|^2 at the end
    (what a tail beyond the mesh adds).
    """

    fixed: bool
    power: float | None = None
    alpha: float = 0.0
    pull: float = 0.0


@dataclass(frozen=True)
class Mesh:
    """Element boundaries `places` of shape (elements + 1,), ascending, the polynomial order, and the two ends.

    `phase` is None for a mesh with two ends; on a ring the last place is the first one again and
    psi(right) = exp(i phase) psi(left), the phase in radians.
    """

    places: Array
    order: int
    left: Edge
    right: Edge
    phase: float | None = None

    @property
    def lengths(self) -> Array:
        """Return the lengths of the elements, shape (elements,)."""
        return np.diff(self.places)

    @property
    def unknowns(self) -> int:
        """Return the number of unknowns."""
        elements = len(self.places) - 1
        vertices = elements if self.phase is not None else elements + 1 - self.left.fixed - self.right.fixed
        return elements * (self.order - 1) + vertices

    def split(self, which: Flags) -> Mesh:
        """Return the mesh with the marked elements cut in two; an element with a power in it is cut nearer to its end."""
        index = np.flatnonzero(which)
        share = np.full(len(index), 0.5)
        if self.left.power is not None:
            share[index == 0] = 0.25
        if self.right.power is not None:
            share[index == len(self.places) - 2] = 0.75
        middles = self.places[index] + share * self.lengths[index]
        return replace(self, places=np.unique(np.concatenate([self.places, middles])))
