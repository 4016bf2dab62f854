"""Line charts with ticks on our own canvas: what is redrawn at every key."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specterm.views.canvas import Canvas
from specterm.views.cells import Row, Rows, cut, fit_row, width_of
from specterm.views.plot import SMALLEST, Curve, Label, blank, clipped, inside, limits, noted
from specterm.views.ticks import Ticks, ticks

Floats = NDArray[np.float64]
_Limits = tuple[float, float]
_LINES = {"braille": tuple("┌─┐│┤└┬┘"), "block": tuple("┌─┐│┤└┬┘"), "ascii": tuple("+-+|++++")}
_NARROWEST = 4


@dataclass(frozen=True)
class _Frame:
    """Where things stand: limits, ticks inside them, the columns left of the axis, and which lines there are."""

    xlim: _Limits
    ylim: _Limits
    across: Ticks
    up: Ticks
    gutter: int
    width: int
    height: int
    titled: bool
    named: bool

    def column(self, x: float | Floats, columns: int) -> Floats:
        """Return places on the x axis as places among `columns` columns."""
        return _scaled(np.asarray(x), self.xlim) * (columns - 1)

    def row(self, y: float | Floats, rows: int) -> Floats:
        """Return places on the y axis as places among `rows` rows, row 0 at the top."""
        return (1 - _scaled(np.asarray(y), self.ylim)) * (rows - 1)


def _scaled(values: Floats, ends: _Limits) -> Floats:
    """Return values in [0, 1] between the ends; halves keep the largest numbers finite."""
    with np.errstate(over="ignore", invalid="ignore"):
        return np.asarray((values / 2 - ends[0] / 2) / (ends[1] / 2 - ends[0] / 2))


def chart(
    curves: Sequence[Curve], width: int, height: int, *, glyphs: str = "braille", title: str = "", xlabel: str = "",
    ylabel: str = "", xlim: _Limits | None = None, ylim: _Limits | None = None, labels: Sequence[Label] = (),
) -> Rows:  # fmt: skip
    """Return a chart in exactly `height` rows of `width` columns; limits not given come from the finite points of the curves.

    NaN and infinite points are gaps. A size below 12 x 5 has no room for a chart and gives blank rows.
    """
    if width < SMALLEST[0] or height < SMALLEST[1]:
        return blank(width, height)
    ends = limits([curve.x for curve in curves] if xlim is None else [np.array(xlim)])
    range_ = limits([curve.y for curve in curves] if ylim is None else [np.array(ylim)])
    frame = _frame(ends, range_, (width, height), titled=bool(title), named=bool(xlabel or ylabel))
    canvas = Canvas(frame.width, frame.height, glyphs)
    for curve in curves:
        _draw(canvas, frame, curve)
    for label in labels:
        if ends[0] <= label.x <= ends[1] and range_[0] <= label.y <= range_[1]:
            place = round(float(frame.column(label.x, frame.width)))
            row = round(float(frame.row(label.y, frame.height)))
            canvas.write(max(0, min(place, frame.width - len(label.text))), row, label.text, label.style)
    names = (noted(xlabel, frame.across), noted(ylabel, frame.up))
    rows = _surrounded(canvas.cells(), frame, title, names, _LINES[glyphs])
    return tuple(fit_row(row, width, "~" if glyphs == "ascii" else "…") for row in rows)


def _frame(xlim: _Limits, ylim: _Limits, size: tuple[int, int], *, titled: bool, named: bool) -> _Frame:
    """Return the frame that fits; names and title give way to the curves."""
    width, height = size
    across, up = inside(ticks(*xlim, max(1, width // 12)), xlim), inside(ticks(*ylim, max(1, height // 4)), ylim)
    room = height - 3 - titled - named
    named = named and room >= 1
    titled = titled and height - 3 - named >= 2
    gutter = max((width_of(label) for label in up.labels), default=0)
    gutter = gutter if width - gutter - 2 >= _NARROWEST else 0
    return _Frame(xlim, ylim, across, up, gutter, width - gutter - 2, height - 3 - titled - named, titled, named)


def _draw(canvas: Canvas, frame: _Frame, curve: Curve) -> None:
    """Draw one curve; where it leaves the view it is cut exactly there."""
    x, y = np.asarray(curve.x, dtype=np.float64), np.asarray(curve.y, dtype=np.float64)
    known = y[np.isfinite(y)]
    if len(known) and (known.min() < frame.ylim[0] or known.max() > frame.ylim[1]):
        x, y = clipped(x, y, frame.xlim, frame.ylim)
    y = np.where(np.isfinite(y), y, np.nan)
    canvas.curve(frame.column(x, canvas.columns), frame.row(y, canvas.rows), curve.style)


def _surrounded(cells: Rows, frame: _Frame, title: str, names: tuple[str, str], lines: tuple[str, ...]) -> list[Row]:
    """Return the cells with frame, ticks, names and title."""
    corner, along, corner_right, upright, tick, low, tick_down, low_right = lines
    left = " " * frame.gutter
    rows: list[Row] = []
    if frame.titled:
        rows.append(((cut(title, frame.gutter + frame.width + 2).center(frame.gutter + frame.width + 2), "axis"),))
    rows.append(((left + corner + along * frame.width + corner_right, "axis"),))
    marked = dict(zip(frame.row(np.array(frame.up.places), frame.height).round().tolist(), frame.up.labels, strict=True))
    for number, row in enumerate(cells):
        label = marked.get(number)
        edge = left + upright if label is None else label.rjust(frame.gutter)[: frame.gutter] + tick
        rows.append(((edge, "axis"), *row, (upright, "axis")))
    places = [round(float(frame.column(x, frame.width))) for x in frame.across.places]
    bottom = "".join(tick_down if place in places else along for place in range(frame.width))
    rows.append(((left + low + bottom + low_right, "axis"),))
    rows.append(((_tick_labels(frame, places), "axis"),))
    if frame.named:
        rows.append(((_names(names, frame), "axis"),))
    return rows


def _tick_labels(frame: _Frame, places: Sequence[int]) -> str:
    """Return the labels of the ticks across, each in the middle below its tick, those without room left out."""
    line, first = "", frame.gutter + 1
    for place, label in zip(places, frame.across.labels, strict=True):
        start = min(first + place - (len(label) - 1) // 2, frame.gutter + frame.width + 2 - len(label))
        if start >= len(line) + bool(line):
            line = line.ljust(start) + label
    return line


def _names(names: tuple[str, str], frame: _Frame) -> str:
    """Return the line of names: the upright axis's on the left, the other's in the middle, or behind it."""
    across, up = names
    start = max(frame.gutter + 1 + (frame.width - width_of(across)) // 2, width_of(up) + 1 if up else 0)
    return up + " " * max(0, start - width_of(up)) + across
