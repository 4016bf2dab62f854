"""Curves against time: survival probability, and the mean of an observable between its spreads."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specterm.views.cells import Rows
from specterm.views.line_chart import chart
from specterm.views.plot import Curve

Floats = NDArray[np.float64]


def survival_curve(
    times: Floats, survival: Floats, width: int, height: int, *, unit: str = "", glyphs: str = "braille",
    at: float | None = None,
) -> Rows:  # fmt: skip
    """Return the survival probability against time, with an upright line `at` a time; no rows for fewer than two times."""
    if len(times) < 2:
        return ()
    order = np.argsort(times)
    curves = [*_upright(at, (0.0, 1.0)), Curve(times[order], survival[order], "chosen")]
    return chart(
        curves, width, height, glyphs=glyphs, title="survival probability",
        xlabel=f"time ({unit})" if unit else "time", ylim=(0.0, 1.0),
    )  # fmt: skip


def mean_curve(
    times: Floats, mean: Floats, spread: Floats, name: str, width: int, height: int, *, unit: str = "", glyphs: str = "braille",
    at: float | None = None,
) -> Rows:  # fmt: skip
    """Return a mean against time, strong, between mean - spread and mean + spread; no rows for fewer than two times.

    An upright line stands `at` a time, where one is given.
    """
    if len(times) < 2:
        return ()
    order = np.argsort(times)
    t, m, s = times[order], mean[order], spread[order]
    known = np.where(np.isfinite(s), s, 0.0)
    ends = (float(np.min(m - known)), float(np.max(m + known)))
    curves = [*_upright(at, ends), Curve(t, m - s, "other"), Curve(t, m + s, "other"), Curve(t, m, "chosen")]
    return chart(
        curves, width, height, glyphs=glyphs, title=f"<{name}> and its spread", xlabel=f"time ({unit})" if unit else "time"
    )


def density_curve(
    x: Floats, density: Floats, name: str, width: int, height: int, *, glyphs: str = "braille", title: str = "density"
) -> Rows:
    """Return a density against the coordinate."""
    return chart([Curve(x, density, "chosen")], width, height, glyphs=glyphs, xlabel=name, title=title)


def _upright(at: float | None, ends: tuple[float, float]) -> list[Curve]:
    """Return an upright line at a time, or nothing."""
    return [] if at is None else [Curve(np.array([at, at]), np.array(ends), "weight")]
