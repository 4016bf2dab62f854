"""The one-coordinate problem the engine solves: real coefficients, ends, and hints where to look."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from specterm.arrays import Array
from specterm.model import Function

Coefficient = Callable[[Array], Array]


@dataclass(frozen=True)
class Problem:
    """The form  integral of K |psi'|^2 + V |psi|^2  on (left, right), with K > 0.

    A first-order term has been taken into V and the phase of psi (`twist`, d theta/dx with psi = exp(i theta) phi, phi real;
    None where there is none). Ends are "wall", "free", "open" or "ring"; `phase` is the whole phase of phi around the ring in
    radians, `bloch` says that the sheet gives one. `effective` is what V becomes where lengths are measured by the local
    wave, V + K''/4 - K'^2/(16 K) (Liouville's normal form): it rules the far ends. `noise_stiffness` and `noise_potential`
    bound the rounding of K and V as evaluated. `edges` are places where a coefficient or a derivative of it jumps, `centres`
    places around which it may vary on any scale. `sign` is -1 where the operator was turned over because it has a highest
    level instead of a lowest one.
    """

    stiffness: Coefficient
    slope: Coefficient
    potential: Coefficient
    effective: Coefficient
    noise_stiffness: Coefficient
    noise_potential: Coefficient
    left: float
    right: float
    left_end: str
    right_end: str
    edges: Array
    centres: Array
    knots: int = 0
    phase: float | None = None
    twist: Function | None = None
    sign: int = 1
    bloch: bool = False

    @property
    def ring(self) -> bool:
        """Say whether the two ends are one place."""
        return self.left_end == "ring"
