"""What the screen shows of a spectrum, as a value: the chosen level, the view, the weights. Pure steps from one to the next."""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any

from specterm.spectrum.result import Spectrum
from specterm.tui.choices import Choices
from specterm.views.canvas import GLYPHS
from specterm.views.scene import MODES

VIEWS = (*MODES, "momentum")
"""What the figure can show."""
COLUMNS = ("none", "slope", "shift")
"""What the table of levels can hold besides: nothing, derivatives by the parameter picked, shifts from the pin beside."""
DEFAULT_COUNT = 6
LARGEST_COUNT = 500


@dataclass(frozen=True, slots=True)
class Look:
    """`chosen` is a place in the spectrum, `count` the number of levels asked for (None: the engine's choice).

    `mode` is what the figure shows, `page` what stands in its place, `choices` what is chosen there,
    `column` the column of choice in the table, `parameter` the number that is nudged, in steps of its
    last digit times ten to the power `fineness`.
    """

    chosen: int = 0
    mode: str = "psi"
    glyphs: str = "braille"
    count: int | None = None
    state: str | None = None
    moments: bool = True
    page: str = "figure"
    column: str = "none"
    parameter: str | None = None
    fineness: int = 0
    choices: Choices = field(default_factory=Choices)

    def stepped(self, steps: int, spectrum: Spectrum | None) -> Look:
        """Return the look with the level `steps` higher in energy chosen, held at the ends."""
        if spectrum is None or not spectrum.levels:
            return self
        sign = -1 if spectrum.from_top else 1
        return replace(self, chosen=min(max(self.chosen + sign * steps, 0), len(spectrum.levels) - 1))

    def nearest(self, energy: float, spectrum: Spectrum | None) -> Look:
        """Return the look with the level nearest to an energy chosen."""
        if spectrum is None or not spectrum.levels:
            return self
        return replace(self, chosen=min(range(len(spectrum.levels)), key=lambda n: abs(spectrum.levels[n].value - energy)))

    def next_view(self) -> Look:
        """Return the look with the next view."""
        return replace(self, mode=_after(self.mode, VIEWS))

    def next_column(self) -> Look:
        """Return the look with the next column of choice."""
        return replace(self, column=_after(self.column, COLUMNS))

    def turned(self, page: str) -> Look:
        """Return the look with another page, from its first row on."""
        return replace(self, page=page, choices=replace(self.choices, scroll=0, aside=0))

    def chose(self, **changes: Any) -> Look:  # noqa: ANN401 - any of the choices
        """Return the look with other choices."""
        return replace(self, choices=replace(self.choices, **changes))

    def next_glyphs(self) -> Look:
        """Return the look with the next set of glyphs."""
        return replace(self, glyphs=_after(self.glyphs, GLYPHS))

    def next_state(self, states: tuple[str, ...], spectrum: Spectrum | None = None) -> Look:
        """Return the look with the next state weighed: none, each of `states`, the chosen level, none again."""
        levels = (f"level({spectrum.levels[self.chosen].index})",) if spectrum and spectrum.levels else ()
        choices: tuple[str | None, ...] = (None, *states, *levels)
        place = choices.index(self.state) + 1 if self.state in choices else 0
        return replace(self, state=choices[place % len(choices)])

    def counted(self, direction: int, spectrum: Spectrum | None) -> Look:
        """Return the look with more (1) or fewer (-1) levels asked for, by about a quarter."""
        now = self.count or (len(spectrum.levels) if spectrum and spectrum.levels else DEFAULT_COUNT)
        wanted = now + max(1, now // 4) if direction > 0 else now - max(1, now // 5)
        return replace(self, count=min(max(wanted, 1), LARGEST_COUNT))

    def fitted(self, spectrum: Spectrum | None, states: tuple[str, ...]) -> Look:
        """Return the look made to fit a new spectrum: the chosen level exists, the weighed state does too."""
        last = max(0, len(spectrum.levels) - 1) if spectrum else 0
        known = {*states, *(f"level({level.index})" for level in (spectrum.levels if spectrum else ()))}
        return replace(self, chosen=min(self.chosen, last), state=self.state if self.state in known else None)


def _after(now: str, choices: tuple[str, ...]) -> str:
    """Return the choice after `now`, the first after the last."""
    return choices[(choices.index(now) + 1) % len(choices)]


def usual_glyphs(environ: Mapping[str, str] | None = None) -> str:
    """Return the glyphs the locale suggests: braille in a UTF-8 one (or none), ascii elsewhere, block on a Linux console."""
    known = os.environ if environ is None else environ
    locale = (known.get("LC_ALL") or known.get("LC_CTYPE") or known.get("LANG") or "").lower()
    if locale and "utf-8" not in locale and "utf8" not in locale:
        return "ascii"
    return "block" if known.get("TERM") == "linux" else "braille"
