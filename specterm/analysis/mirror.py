"""Mirror symmetry about the middle of where the states live: that of the operator to rounding, and that of single states."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specterm.arrays import Array
from specterm.model import Model
from specterm.spectrum import Spectrum

PLACES = 401
CLEAR = 0.9
"""A state with this share of one parity has that parity."""
BEYOND = 4.0
"""Values of a function at mirrored places are the same within so many times their rounding."""


def parities(model: Model, spectrum: Spectrum, rows: Sequence[int]) -> list[int] | None:
    """Return +1 or -1 for states (places among the levels) of a mirror-symmetric operator; None where one has no parity.

    Unlike `Level.parity` this is told from the states, so that levels in any order have it, those on rings included.
    """
    states, domain = spectrum.states, model.domain
    if states is None or len(states.places) < 2 or domain.left_end != domain.right_end or domain.phase:
        return None
    left, right = float(states.places[0]), float(states.places[-1])
    finite = np.isfinite([domain.left, domain.right]).all()
    middle, reach = ((domain.left + domain.right) / 2 if finite else (left + right) / 2), (right - left) / 2
    steps = reach * (np.arange(PLACES) + 0.5) / PLACES
    if not _even(model, middle, steps):
        return None
    up, down = states.evaluate(middle + steps)[list(rows)], states.evaluate(middle - steps)[list(rows)]
    size = (np.abs(up) ** 2 + np.abs(down) ** 2).sum(axis=1) / 2
    share = (up.conj() * down).sum(axis=1).real / size
    return [int(np.sign(one)) for one in share] if (np.abs(share) > CLEAR).all() else None


def _even(model: Model, middle: float, steps: Array) -> bool:
    """Say whether every term of the form is what it was after x - middle has changed its sign."""
    right, left = middle + steps, middle - steps
    with np.errstate(all="ignore"):
        for (j, k), function in model.operator.form().terms:
            room = BEYOND * (function.rounding(right) + function.rounding(left))
            off = np.abs(function(right) - (-1) ** (j + k) * function(left))
            if not (off <= room).all():
                return False
    return True
