"""A function that is constant from boundary to boundary: a column of a `layers` block."""

from __future__ import annotations

import struct
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from specterm.model.arrays import Values


@dataclass(frozen=True)
class Pieces:
    """`values[k]` between boundary k-1 and boundary k; at a boundary the value to its right; outside, the outermost value.

    `boundaries` has shape (n,), increasing, `values` shape (n + 1,), `slack` shape (n + 1,): how far rounding moved each value.
    `name` is the column's.
    """

    name: str
    boundaries: NDArray[np.float64]
    values: NDArray[np.float64]
    slack: NDArray[np.float64]

    @cached_property
    def digest(self) -> int:
        """A number that is the same for the same function."""
        packed = self.boundaries.tobytes() + self.values.tobytes() + struct.pack("<q", len(self.values))
        return int.from_bytes(packed, "little") % (2**127 - 1)

    def index(self, x: NDArray[np.float64]) -> NDArray[np.intp]:
        """Return the number of the layer each place is in."""
        return np.searchsorted(self.boundaries, x, side="right")

    def values_at(self, x: NDArray[np.float64]) -> Values:
        """Return the values at the places x (nan at nan)."""
        return np.where(np.isnan(x), np.nan, self.values[self.index(x)])

    def rounding(self, x: NDArray[np.float64]) -> Values:
        """Return how far rounding moved the value at each place."""
        return self.slack[self.index(x)]
