"""The level figure as a chart with framed axes, for export as plain text."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from specterm.views.canvas import Canvas
from specterm.views.cells import Rows, plain
from specterm.views.level_figure import Painter, title
from specterm.views.plot import Curve, Label, chart
from specterm.views.scene import Scene


def export(scene: Scene, width: int, height: int, *, mode: str = "psi", glyphs: str = "braille") -> Rows:
    """Return potential, levels and waves as a chart of `height` rows and `width` columns; `mode` is one of MODES."""
    painter = Painter(scene, Canvas(width, height, glyphs), mode)
    low, high = scene.energies
    scale = (high - low) / max(1, painter.canvas.rows - 1)
    curves = [Curve(scene.x, scene.potential, "potential")]
    labels = []
    ends = np.array([scene.x[0], scene.x[-1]])
    if scene.threshold is not None:
        curves.append(Curve(ends, np.full(2, scene.threshold), "threshold"))

    def raised(wave: NDArray[Any], base: float, reach: float) -> NDArray[np.float64]:
        return base + scale * reach * painter.shape_of(wave)[0]

    for place, level in enumerate(scene.levels):
        style = "chosen" if place == scene.chosen else "other"
        if mode == "levels":
            curves.append(Curve(scene.x, np.where(painter.allowed(level.value), level.value, np.nan), style))
        else:
            curves.append(Curve(scene.x, raised(scene.waves[place], level.value, painter.reach(place)), style))
        labels.append(Label(float(scene.x[-1]), level.value, str(level.index), style))
    if scene.prepared is not None:
        curves.append(Curve(scene.x, raised(scene.prepared[2], scene.prepared[1], painter.usual), "weight"))
    axes = scene.axes
    return chart(
        curves, width, height, glyphs=glyphs, xlim=scene.window, ylim=scene.energies, labels=labels,
        title=plain([title(scene, mode)]), xlabel=_named(axes.coordinate, axes.length),
        ylabel=_named("energy", axes.energy),
    )


def _named(name: str, unit: str) -> str:
    """Return an axis title."""
    return f"{name} ({unit})" if unit else name
