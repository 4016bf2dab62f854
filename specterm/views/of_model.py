"""From a model and its spectrum to what the views take: names, units, potential; and the level figure as text."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specterm.analysis import Weights, potential_curve
from specterm.model import Model
from specterm.spectrum.result import Spectrum
from specterm.views.cells import plain
from specterm.views.level_export import export
from specterm.views.level_figure import draw
from specterm.views.level_table import Weighing
from specterm.views.scene import Axes, Prepared, Source, scene, source
from specterm.views.status import Units


def axes_of(model: Model) -> Axes:
    """Return names, units and ends for the figure."""
    domain, units = model.domain, model.units
    ends = (float(domain.left), float(domain.right))
    return Axes(domain.coordinate, model.coordinate_unit, units.energy, *ends, domain.left_end, domain.right_end)


def units_of(model: Model) -> Units:
    """Return the names of the units for tables and lines; momenta are shown in hbar over the unit of length."""
    units = model.units
    length = model.coordinate_unit
    momentum = f"hbar/{length}" if length else "hbar" if units.energy else ""
    return Units(units.energy, length, momentum, model.domain.coordinate)


def source_of(model: Model, spectrum: Spectrum | None) -> Source:
    """Return the source of a model's figures."""

    def potential(x: NDArray[np.float64]) -> NDArray[np.float64]:
        return potential_curve(model, x)

    return source(spectrum, potential, axes_of(model))


def weighing_of(weights: Weights) -> Weighing:
    """Return projection weights as the table takes them."""
    return Weighing(
        weights.state,
        {weight.index: weight.weight for weight in weights.weights},
        {weight.index: weight.error for weight in weights.weights},
        weights.captured,
    )


def prepared_of(weights: Weights) -> Prepared:
    """Return a prepared state as the figure takes it: at its mean energy."""
    return Prepared(weights.state, weights.mean, weights.wave)


def figure_text(
    model: Model,
    spectrum: Spectrum,
    width: int,
    height: int,
    *,
    only: tuple[int, ...] | None = None,
    weights: Weights | None = None,
    mode: str = "psi",
    glyphs: str = "braille",
) -> str:
    """Return the level figure as plain text of at most `height` lines of `width` columns, for print and export.

    `only` keeps levels with these indices, the first of them strong; `weights` adds its prepared state. Sizes from 24 x 10 on
    have framed axes, smaller ones the screen's figure.
    """
    places = [place for place, level in enumerate(spectrum.levels) if only and level.index == only[0]]
    prepared = prepared_of(weights) if weights else None
    chosen = places[0] if places else None
    view = scene(source_of(model, spectrum), chosen, samples=8 * max(40, width), only=only, prepared=prepared, zoom=False)
    framed = width >= 24 and height >= 10
    return plain((export if framed else draw)(view, width, height, mode=mode, glyphs=glyphs))
