"""Lines as a spectrum: each broadened to a Lorentz or Gauss curve, summed, with the strongest labelled."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specterm.views.cells import Rows
from specterm.views.line_chart import chart
from specterm.views.plot import Curve, Label

LABELLED = 6


@dataclass(frozen=True)
class Stick:
    """One line: where, how strong, and a short name."""

    energy: float
    intensity: float
    name: str


def broadened(sticks: Sequence[Stick], energies: NDArray[np.float64], width: float, shape: str) -> NDArray[np.float64]:
    """Return the sum of the lines at the energies, each a curve of area `intensity` and full width at half maximum `width`."""
    places = np.array([stick.energy for stick in sticks])[:, None]
    sizes = np.array([stick.intensity for stick in sticks])[:, None]
    with np.errstate(over="ignore", under="ignore"):
        away = (energies - places) / (width / 2)
        if shape == "gauss":
            curves = np.exp(-np.log(2) * away**2) * 2 * np.sqrt(np.log(2) / np.pi) / width
        else:
            curves = 2 / np.pi / width / (1 + away**2)
    total: NDArray[np.float64] = (sizes * curves).sum(axis=0)
    return total


def default_width(sticks: Sequence[Stick]) -> float:
    """Return a broadening that keeps the lines apart: a sixtieth of their range."""
    places = [stick.energy for stick in sticks]
    reach = max(places, default=1.0) - min(places, default=0.0)
    return reach / 60 if reach > 0 else max(1e-3 * abs(max(places, default=1.0)), 1e-300)


def line_spectrum(
    sticks: Sequence[Stick], width: int, height: int, *, broadening: float | None = None, shape: str = "lorentz",
    unit: str = "", glyphs: str = "braille",
) -> Rows:  # fmt: skip
    """Return the spectrum in `height` rows of `width` columns; no rows where there is nothing to draw."""
    seen = [stick for stick in sticks if stick.intensity > 0]
    if not seen or width <= 0 or height <= 0:
        return ()
    wide = broadening or default_width(seen)
    places = np.array([stick.energy for stick in seen])
    low, high = float(places.min()) - 6 * wide, float(places.max()) + 6 * wide
    near = (places[:, None] + wide * np.array([-2, -1, -0.5, -0.2, 0, 0.2, 0.5, 1, 2])).ravel()
    energies = np.unique(np.concatenate([np.linspace(low, high, 8 * width), near]))
    total = broadened(seen, energies, wide, shape)
    strongest = sorted(seen, key=lambda stick: -stick.intensity)[:LABELLED]
    top = float(total.max())
    labels: list[Label] = []
    for stick in strongest:
        place = min(1.0, float(np.interp(stick.energy, energies, total)) / top + 0.08)
        label = Label(stick.energy, place, stick.name, "chosen")
        if not any(_overlap(label, one, (high - low) / width, 1.08 / height) for one in labels):
            labels.append(label)
    across = f"energy ({unit})" if unit else "energy"
    curve = Curve(energies, total / top, "chosen")
    return chart([curve], width, height, glyphs=glyphs, xlabel=across, xlim=(low, high), ylim=(0.0, 1.08), labels=labels)


def _overlap(one: Label, other: Label, column: float, row: float) -> bool:
    """Say whether two labels would stand on each other, given the size of a column and of a row."""
    wide = (max(len(one.text), len(other.text)) + 1) * column
    return abs(one.x - other.x) < wide and abs(one.y - other.y) < 1.5 * row
