"""Line charts with ticks through plotext, behind one narrow door: figures that leave the screen as text.

plotext draws a curve far outside its limits point by point and fails on infinite numbers and equal limits, so nothing unclean
reaches it: curves are thinned and clipped to the view here, gaps are NaN, limits are finite and differ, and every chart has a
figure of its own with an explicit size.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from specterm.views.cells import Row, Rows, fit_row
from specterm.views.ticks import Ticks, ticks

Floats = NDArray[np.float64]
_MARKERS = {"braille": "braille", "block": "hd", "ascii": "*"}
_ASCII = str.maketrans("│─┌┐└┘┤┬├┴┼", "|-+++++++++")
_Limits = tuple[float, float]
_Plotext: TypeAlias = Any
_COLOUR = re.compile(r"\x1b\[([0-9;]*)m")
SMALLEST = (12, 5)
"""Columns and rows below which there is no room for a chart."""


@dataclass(frozen=True)
class Curve:
    """A polyline x (n,), y (n,), x ascending, with the name of its style."""

    x: Floats
    y: Floats
    style: str = "plain"


@dataclass(frozen=True)
class Label:
    """A short text at a place of the chart."""

    x: float
    y: float
    text: str
    style: str = "plain"


def chart(
    curves: Sequence[Curve],
    width: int,
    height: int,
    *,
    glyphs: str = "braille",
    title: str = "",
    xlabel: str = "",
    ylabel: str = "",
    xlim: tuple[float, float] | None = None,
    ylim: tuple[float, float] | None = None,
    labels: Sequence[Label] = (),
) -> Rows:
    """Return a chart in exactly `height` rows of `width` columns; limits not given come from the finite points of the curves.

    NaN and infinite points are gaps. A size below 12 x 5 has no room for a chart and gives blank rows.
    """
    if width < SMALLEST[0] or height < SMALLEST[1]:
        return blank(width, height)
    xlim = limits([curve.x for curve in curves]) if xlim is None else limits([np.array(xlim)])
    ylim = limits([curve.y for curve in curves]) if ylim is None else limits([np.array(ylim)])
    styles: list[str] = []
    figure = _figure(width, height)
    for curve in curves:
        x, y = clipped(*thinned(curve.x, curve.y, xlim, 2 * width), xlim, ylim)
        if np.isfinite(x).any():
            figure.plot(x.tolist(), y.tolist(), marker=_MARKERS[glyphs], color=_colour(styles, curve.style))
    for label in labels:
        if xlim[0] <= label.x <= xlim[1] and ylim[0] <= label.y <= ylim[1]:
            figure.text(label.text, x=label.x, y=label.y, color=_colour(styles, label.style))
    _surround(figure, xlim, ylim, (width, height), (title, xlabel, ylabel))
    rows = _parse(figure.build(), styles, ascii_only=glyphs == "ascii")
    return tuple(fit_row(row, width) for row in (*rows, *blank(width, height))[:height])


def blank(width: int, height: int) -> Rows:
    """Return blank rows."""
    return (((" " * width, "plain"),) if width > 0 else (),) * max(0, height)


def _figure(width: int, height: int) -> _Plotext:
    """Return a private figure that ignores the size of the real terminal."""
    from plotext._figure import _figure_class  # noqa: PLC0415 - twenty milliseconds nobody pays who draws no chart

    figure = _figure_class()
    figure._limit_size(False, False)
    figure._set_size(width, height)
    figure.theme("clear")
    return figure


def _surround(figure: _Plotext, xlim: _Limits, ylim: _Limits, size: tuple[int, int], words: tuple[str, str, str]) -> None:
    """Set limits, ticks and titles."""
    figure.xlim(*xlim)
    figure.ylim(*ylim)
    across = ticks(*xlim, max(1, size[0] // 12))
    up = ticks(*ylim, max(1, size[1] // 4))
    for setter, marks in ((figure.xticks, inside(across, xlim)), (figure.yticks, inside(up, ylim))):
        setter(list(marks.places), list(marks.labels))
    title, xlabel, ylabel = words
    figure.title(title)
    figure.xlabel(noted(xlabel, across))
    figure.ylabel(noted(ylabel, up))


def inside(marks: Ticks, ends: _Limits) -> Ticks:
    """Return the ticks that lie inside the ends."""
    kept = [n for n, place in enumerate(marks.places) if ends[0] <= place <= ends[1]]
    return Ticks(tuple(marks.places[n] for n in kept), tuple(marks.labels[n] for n in kept), marks.note)


def noted(label: str, marks: Ticks) -> str:
    """Return an axis title with the note of its ticks."""
    return f"{label} [{marks.note}]" if marks.note and label else label


def _colour(styles: list[str], style: str) -> int:
    """Return the colour number that stands for a style on its way through plotext."""
    if style not in styles:
        styles.append(style)
    return styles.index(style) + 1


def _parse(text: str, styles: Sequence[str], *, ascii_only: bool) -> list[Row]:
    """Return plotext's coloured text as rows; its colour numbers become style names again."""
    rows = []
    for line in (text.translate(_ASCII) if ascii_only else text).rstrip("\n").split("\n"):
        pieces = _COLOUR.split(line)
        row: list[tuple[str, str]] = []
        style = "axis"
        for number, piece in enumerate(pieces):
            if number % 2:
                code = piece.rsplit(";", 1)
                style = styles[int(code[1]) - 1] if piece.startswith("38;5;") and 0 < int(code[1]) <= len(styles) else "axis"
            elif piece:
                row.append((piece, style))
        rows.append(tuple(row))
    return rows


def limits(data: Sequence[Floats]) -> _Limits:
    """Return two finite limits, low < high, that hold the finite numbers of `data`."""
    finite = [array[np.isfinite(array) & (np.abs(array) < 1e150)] for array in data]
    low = min((float(array.min()) for array in finite if len(array)), default=0.0)
    high = max((float(array.max()) for array in finite if len(array)), default=1.0)
    if high - low > 1e-13 * max(abs(low), abs(high)) and high - low > 1e-290:
        return low, high
    half = max(abs(low), abs(high)) * 1e-6 or 0.5
    half = half if half > 1e-290 else 0.5
    return low - half, high + half


def thinned(x: Floats, y: Floats, xlim: _Limits, columns: int) -> tuple[Floats, Floats]:
    """Return the curve with at most the lowest and the highest point of each of `columns` columns, in order, gaps kept."""
    if len(x) <= columns:
        return x, y
    with np.errstate(over="ignore", invalid="ignore"):
        place = np.clip(np.nan_to_num((x - xlim[0]) / (xlim[1] - xlim[0]) * columns, nan=0.0), -1, columns).astype(np.int64)
    kept: list[int] = []
    for group in np.split(np.arange(len(x)), np.flatnonzero(np.diff(place)) + 1):
        known = group[np.isfinite(y[group])]
        if len(known) < len(group):
            kept.append(int(group[~np.isfinite(y[group])][0]))
        if len(known):
            kept += {int(known[np.argmin(y[known])]), int(known[np.argmax(y[known])])}
    order = np.array(sorted(kept))
    return x[order], y[order]


def clipped(x: Floats, y: Floats, xlim: _Limits, ylim: _Limits) -> tuple[Floats, Floats]:
    """Return the polyline cut to the rectangle of the limits, NaN between the pieces; points that are not finite are gaps."""
    pieces: list[tuple[float, float]] = []
    whole = np.isfinite(x) & np.isfinite(y)
    if len(x) == 1 and whole[0]:
        inside = xlim[0] <= x[0] <= xlim[1] and ylim[0] <= y[0] <= ylim[1]
        return (x, y) if inside else (np.array([np.nan]), np.array([np.nan]))
    for first in range(len(x) - 1):
        if not (whole[first] and whole[first + 1]):
            continue
        piece = _segment((float(x[first]), float(y[first])), (float(x[first + 1]), float(y[first + 1])), xlim, ylim)
        if piece is None:
            continue
        if pieces and pieces[-1] == piece[0]:
            pieces.append(piece[1])
        else:
            pieces += [(np.nan, np.nan), *piece] if pieces else [*piece]
    return np.array([piece[0] for piece in pieces]), np.array([piece[1] for piece in pieces])


def _segment(
    start: _Limits, stop: _Limits, xlim: _Limits, ylim: _Limits
) -> tuple[_Limits, _Limits] | None:
    """Return the part of one segment inside the rectangle, by its parameter interval, or None."""
    low, high = 0.0, 1.0
    for here, there, (least, most) in ((start[0], stop[0], xlim), (start[1], stop[1], ylim)):
        if max(here, there) < least or min(here, there) > most:
            return None
        step = there / 2 - here / 2
        if step:
            enter, leave = sorted(((least / 2 - here / 2) / step, (most / 2 - here / 2) / step))
            low, high = max(low, enter), min(high, leave)
    if low > high:
        return None
    return tuple(_along(start, stop, part, xlim, ylim) for part in (low, high))  # type: ignore[return-value]


def _along(
    start: _Limits, stop: _Limits, part: float, xlim: _Limits, ylim: _Limits
) -> _Limits:
    """Return the point at `part` of the way, held inside the rectangle; the ends come back exactly."""
    if part in (0.0, 1.0):
        return stop if part else start
    x = start[0] * (1 - part) + stop[0] * part
    y = start[1] * (1 - part) + stop[1] * part
    return min(max(x, xlim[0]), xlim[1]), min(max(y, ylim[0]), ylim[1])
