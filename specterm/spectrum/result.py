"""What the engine hands over: levels with errors and kinds, and the eigenstates behind them."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Protocol

import numpy as np

from specterm.arrays import Array, Values


@dataclass(frozen=True, slots=True)
class Level:
    """One level. `value` and `error` in the sheet's unit of energy.

    `error` estimates |value - true value| (None where no true value exists: kind "box"); `nodes` and `parity` ("even" or
    "odd") are None where they mean nothing; `width` is for resonances.
    """

    index: int
    value: float
    error: float | None
    kind: str
    nodes: int | None = None
    parity: str | None = None
    width: float | None = None


class States(Protocol):
    """Eigenstates as functions, normalised; real where they can be, and positive on the first lobe from the left."""

    @property
    def places(self) -> Array:
        """Return ascending places between which the states are smooth."""

    def evaluate(self, x: Array, derivative: int = 0) -> Values:
        """Return psi or its first or second derivative for every state at x, shape (states, n); 0 off the mesh."""


@dataclass(frozen=True)
class Spectrum:
    """The levels of an operator with what is known about them.

    `states.evaluate(x)` has shape (levels, n): every eigenstate at the places x. `bound` is None where the number of bound
    levels is infinite or the spectrum is discrete anyway; `threshold` is None without a continuum. `counted` is the independent
    count of the levels up to the highest one returned, `complete` says that it agrees. `left` and `right` are the ends of the
    part of the domain computed on, `unknowns` the number of unknowns, `basis` says in words how it was discretised, `seconds`
    is the wall time spent.
    """

    levels: tuple[Level, ...]
    states: States | None
    bound: int | None
    threshold: float | None
    complete: bool
    left: float
    right: float
    basis: str
    unknowns: int
    tolerance: float
    seconds: float = 0.0
    notes: tuple[str, ...] = ()
    from_top: bool = False
    values: Array = field(default_factory=lambda: np.empty(0))
    vector_error: Array = field(default_factory=lambda: np.empty(0))
