"""A pin with its spectrum: what stands beside the present one."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from specterm.session.pins import Pin
from specterm.tui.pages.page import Stop, Tell
from specterm.tui.solving import Outcome
from specterm.views.scene import Behind

if TYPE_CHECKING:
    from specterm.analysis.shifts import Shift

Floats = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Pinned:
    """A pin and the outcome of its sheet."""

    pin: Pin
    outcome: Outcome

    def behind(self, chosen: int | None, found: tuple[Shift, ...] | None) -> Behind | None:
        """Return what is drawn faintly: the potential, and the state that the chosen level was."""
        origin, spectrum = self.outcome.origin, self.outcome.spectrum
        if origin is None:
            return None
        left, right = (spectrum.left, spectrum.right) if spectrum else (-np.inf, np.inf)

        def potential(x: Floats) -> Floats:
            inside = (x >= left) & (x <= right)
            values = np.full(len(x), np.nan)
            values[inside] = origin.potential(x[inside])
            return values

        row = self._row(chosen, found)
        if row is None or spectrum is None:
            return Behind(potential)
        states: Any = spectrum.states
        return Behind(potential, spectrum.levels[row].value, lambda x: states.evaluate(x)[row])

    def _row(self, chosen: int | None, found: tuple[Shift, ...] | None) -> int | None:
        """Return the place in the pinned spectrum of what the chosen level was."""
        spectrum = self.outcome.spectrum
        if chosen is None or not found or chosen >= len(found) or spectrum is None:
            return None
        before = found[chosen].before
        return next((row for row, level in enumerate(spectrum.levels) if level.index == before), None)


@dataclass(frozen=True)
class Moved:
    """Asks how the levels have moved since a pin."""

    pinned: Pinned

    def answer(self, outcome: Outcome, _: Stop, __: Tell) -> tuple[Shift, ...]:
        """Return the shifts."""
        from specterm.analysis.shifts import shifts  # noqa: PLC0415 - heavy

        earlier, now = self.pinned.outcome.spectrum, outcome.spectrum
        return shifts(earlier, now) if earlier is not None and now is not None else ()
