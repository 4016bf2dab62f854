"""Where the coordinate lives, and what holds at the ends."""

from __future__ import annotations

import math
from dataclasses import dataclass

WALL, FREE, OPEN, RING = "wall", "free", "open", "ring"


@dataclass(frozen=True)
class Domain:
    """The interval of the coordinate. Ends are "wall" (psi = 0), "free" (zero flux), "open" (infinite) or "ring" (both).

    `phase` is the Bloch phase in units of 2 pi, None where the sheet gives none. `left_slack` and `right_slack` bound how far
    rounding moved the ends.
    """

    coordinate: str
    left: float
    right: float
    left_end: str
    right_end: str
    phase: float | None = None
    left_slack: float = 0.0
    right_slack: float = 0.0

    @property
    def is_ring(self) -> bool:
        """Say whether the ends are joined."""
        return self.left_end == RING

    @property
    def is_finite(self) -> bool:
        """Say whether both ends are finite."""
        return math.isfinite(self.left) and math.isfinite(self.right)
