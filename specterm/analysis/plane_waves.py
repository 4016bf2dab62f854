"""Sums over plane waves on a lattice of wave numbers, as matrix products."""

from __future__ import annotations

import numpy as np

from specterm.arrays import Array, Values

MOST_CELLS = 2_000_000
"""Complex numbers held at once."""


def plane_sums(x: Array, source: Values, coarse: Array, fine: Array, sign: int = -1) -> Values:
    """Return the sums over x of source exp(sign i k x) for k = coarse[a] + fine[b], shape (len(coarse), len(fine)).

    exp(i (c + f) x) is a product, so that only (coarse + fine) * n exponentials are taken; x is counted from its middle first.
    """
    middle = float(x[0] + x[-1]) / 2 if len(x) else 0.0
    total = np.zeros((len(coarse), len(fine)), dtype=complex)
    block = max(1, MOST_CELLS // (len(coarse) + len(fine)))
    for start in range(0, len(x), block):
        part = slice(start, start + block)
        d = x[part] - middle
        left = np.exp(sign * 1j * np.outer(coarse, d))
        right = source[part][:, None] * np.exp(sign * 1j * np.outer(d, fine))
        total += left @ right
    return total * np.exp(sign * 1j * middle * (coarse[:, None] + fine))
