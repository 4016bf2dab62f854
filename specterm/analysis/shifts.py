"""How far levels have moved between two spectra, each level followed by the overlap of its state."""

from __future__ import annotations

from dataclasses import dataclass

from specterm.analysis.overlap import matched
from specterm.spectrum import Spectrum


@dataclass(frozen=True)
class Shift:
    """How a level came to be: `before` is its number in the earlier spectrum, None where no state there is like it.

    `shift` is the level now less the level then, with a bound on its error; None where there is none.
    """

    before: int | None
    shift: float | None
    error: float | None


def shifts(earlier: Spectrum, now: Spectrum) -> tuple[Shift, ...]:
    """Return the shift of every level of `now`; levels are matched by the overlap of their states, not by their numbers."""
    if earlier.states is None or now.states is None:
        return tuple(Shift(None, None, None) for _ in now.levels)
    found = []
    for place, row in enumerate(matched(now, earlier)):
        if row is None:
            found.append(Shift(None, None, None))
            continue
        new, old = now.levels[place], earlier.levels[row]
        error = None if new.error is None or old.error is None else new.error + old.error
        found.append(Shift(old.index, new.value - old.value, error))
    return tuple(found)
