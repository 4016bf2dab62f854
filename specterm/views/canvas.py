"""A canvas of dots in character cells: braille (2x4 dots a cell), block (2x2) or ascii (1x3).

Drawing takes places in dots, row 0 at the top, any finite or non-finite number; nothing outside the canvas costs anything.
"""

from __future__ import annotations

import itertools
import sys
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specterm.views.cells import Row, Rows

GLYPHS = ("braille", "block", "ascii")
DOTS = {"braille": (2, 4), "block": (2, 2), "ascii": (1, 3)}
_BRAILLE = np.array([[0x01, 0x08], [0x02, 0x10], [0x04, 0x20], [0x40, 0x80]], dtype=np.uint8)
_BLOCK = np.array([[1, 2], [4, 8]], dtype=np.uint8)
_ASCII = np.array([[1], [2], [4]], dtype=np.uint8)
_WEIGHTS = {"braille": _BRAILLE, "block": _BLOCK, "ascii": _ASCII}
_CHARACTERS = {
    "braille": " " + "".join(chr(0x2800 + mask) for mask in range(1, 256)),
    "block": " ▘▝▀▖▌▞▛▗▚▐▜▄▙▟█",
    "ascii": " '-|.:||",
}
_TABLES = {glyphs: np.array(list(characters)) for glyphs, characters in _CHARACTERS.items()}
_UTF_32 = f"utf-32-{sys.byteorder[0]}e"


@dataclass
class Canvas:
    """Cells of `width` x `height`; `glyphs` is one of GLYPHS. Later drawing gives the cell its style."""

    width: int
    height: int
    glyphs: str = "braille"
    dots: NDArray[np.bool_] = field(init=False)
    style: NDArray[np.int16] = field(init=False)
    names: list[str] = field(init=False, default_factory=lambda: ["plain"])
    letters: dict[tuple[int, int], tuple[str, str]] = field(init=False, default_factory=dict)

    def __post_init__(self) -> None:
        """Make an empty canvas; sizes below zero count as zero."""
        self.width, self.height = max(0, self.width), max(0, self.height)
        across, down = DOTS[self.glyphs]
        self.dots = np.zeros((self.height * down, self.width * across), dtype=bool)
        self.style = np.zeros((self.height, self.width), dtype=np.int16)

    @property
    def columns(self) -> int:
        """Dots across."""
        return int(self.dots.shape[1])

    @property
    def rows(self) -> int:
        """Dots down."""
        return int(self.dots.shape[0])

    def curve(
        self, column: NDArray[np.float64], row: NDArray[np.float64], style: str, *, over: bool = False,
        dash: tuple[int, int] = (1, 0),
    ) -> None:  # fmt: skip
        """Draw the polyline through (column, row), shapes (n,), column ascending; NaN makes a gap.

        `over` clears what else stands in the cells it passes, so that it can be told from a hatched ground; `dash` =
        (dots drawn, dots left out) along its way.
        """
        low, high = self._extents(column, row)
        places = self._places(low, high)
        mask = (places >= low) & (places <= high)
        if dash[1]:
            mask &= (np.arange(self.columns) + places) % sum(dash) < dash[0]
        self._stamp(mask, places, style, over=over)

    def hatch(self, column: NDArray[np.float64], row: NDArray[np.float64], base: float, style: str) -> None:
        """Hatch between the polyline and the row `base`: every second dot column, one a cell for braille and block."""
        low, high = self._extents(column, row)
        level = round(min(max(base, -1.0), float(self.rows))) if np.isfinite(base) else -1
        known = (low <= high) & (np.arange(self.columns) % 2 == 0)
        top = np.where(known, np.minimum(low, level), 1)
        bottom = np.where(known, np.maximum(high, level), 0)
        places = self._places(top, bottom)
        self._stamp((places >= top) & (places <= bottom), places, style)

    def horizontal(
        self, row: float, style: str, *, dash: tuple[int, int] = (1, 0), where: NDArray[np.bool_] | None = None
    ) -> None:
        """Draw a line across at `row`, `dash` = (dots drawn, dots left out), only where `where`, shape (columns,), is true."""
        if not np.isfinite(row) or not -0.5 <= row < self.rows - 0.5:
            return
        drawn = np.arange(self.columns) % sum(dash) < dash[0]
        drawn = drawn if where is None else drawn & where
        across, down = DOTS[self.glyphs]
        self.dots[round(row)] |= drawn
        self.style[round(row) // down, drawn.reshape(self.width, across).any(axis=1)] = self._number(style)

    def vertical(self, column: float, style: str, *, dash: tuple[int, int] = (1, 0)) -> None:
        """Draw a line down at `column`."""
        if not np.isfinite(column) or not -0.5 <= column < self.columns - 0.5:
            return
        places = np.arange(self.rows)[:, None]
        self._stamp((places % sum(dash) < dash[0]) & (np.arange(self.columns) == round(column)), places, style)

    def write(self, column: int, row: int, text: str, style: str) -> None:
        """Write single-column characters into cells from (column, row) on; what falls outside is left out."""
        for place, character in enumerate(text, column):
            if 0 <= place < self.width and 0 <= row < self.height:
                self.letters[row, place] = (character, style)

    def cells(self) -> Rows:
        """Return what was drawn, `height` rows of exactly `width` columns."""
        if not self.dots.size:
            return ((),) * self.height
        across, down = DOTS[self.glyphs]
        weights = _WEIGHTS[self.glyphs]
        masks = np.zeros((self.height, self.width), dtype=np.uint8)
        for row in range(down):
            for column in range(across):
                masks += self.dots[row::down, column::across] * weights[row, column]
        characters, styles = _TABLES[self.glyphs][masks], _carried(self.style, masks > 0)
        for (row, place), (character, style) in self.letters.items():
            characters[row, place], styles[row, place] = character, self._number(style)
        return tuple(self._row(*of) for of in zip(characters, styles, strict=True))

    def _row(self, characters: NDArray[np.str_], styles: NDArray[np.int16]) -> Row:
        """Return one row of cells, neighbours of one style joined."""
        text = characters.tobytes().decode(_UTF_32)
        edges = [0, *(np.flatnonzero(np.diff(styles)) + 1).tolist(), self.width]
        return tuple((text[first:last], self.names[styles[first]]) for first, last in itertools.pairwise(edges))

    def _places(self, low: NDArray[np.int64], high: NDArray[np.int64]) -> NDArray[np.int64]:
        """Return the dot rows (rows, 1) of the cells from the first to the last that the columns reach, perhaps none."""
        down = DOTS[self.glyphs][1]
        known = low <= high
        first = max(0, int(low[known].min(initial=self.rows))) // down * down
        last = min(self.rows - 1, int(high[known].max(initial=-1)))
        return np.arange(first, -(-(last + 1) // down) * down)[:, None]

    def _stamp(self, mask: NDArray[np.bool_], places: NDArray[np.int64], style: str, *, over: bool = False) -> None:
        """Add the dots of `mask` in the dot rows `places` of whole cells, and give their cells the style."""
        if not mask.size:
            return
        across, down = DOTS[self.glyphs]
        touched = mask[::down].copy()
        for row in range(1, down):
            touched |= mask[row::down]
        touched = np.logical_or.reduce([touched[:, column::across] for column in range(across)])
        rows = slice(int(places[0, 0]), int(places[-1, 0]) + 1)
        if over:
            self.dots[rows][np.repeat(np.repeat(touched, down, axis=0), across, axis=1)] = False
        self.dots[rows] |= mask
        self.style[rows.start // down : rows.stop // down][touched] = self._number(style)

    def _number(self, style: str) -> int:
        """Return the number that stands for a style."""
        if style not in self.names:
            self.names.append(style)
        return self.names.index(style)

    def _extents(self, column: NDArray[np.float64], row: NDArray[np.float64]) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
        """Return the first and last dot row of a polyline by dot column, shapes (columns,); first > last where it is absent."""
        low = np.full(self.columns, self.rows + 2.0)
        high = np.full(self.columns, -3.0)
        if self.columns and self.rows:
            for places, heights in _pieces(column, np.clip(row, -2.0, self.rows + 1.0)):
                _cover(low, high, *_dense(places, heights, self.columns))
        return _rows_between(low, high)


def _carried(style: NDArray[np.int16], drawn: NDArray[np.bool_]) -> NDArray[np.int16]:
    """Return the styles (rows, columns) with blank cells taking the style before them in the row, so that it has few runs."""
    last = np.maximum.accumulate(np.where(drawn, np.arange(style.shape[1]), -1), axis=1)
    return np.where(last >= 0, np.take_along_axis(style, np.maximum(last, 0), axis=1), 0).astype(np.int16)


def _rows_between(low: NDArray[np.float64], high: NDArray[np.float64]) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return the rows whose middles lie in [low, high), else the one nearest to both, so that lines stay one dot thin."""
    first, last = np.ceil(low), np.ceil(high) - 1
    nearest = np.rint((low + high) / 2)
    thin = (first > last) & (low <= high)
    return np.where(thin, nearest, first).astype(np.int64), np.where(thin, nearest, last).astype(np.int64)


def _pieces(column: NDArray[np.float64], row: NDArray[np.float64]) -> Sequence[tuple[NDArray[np.float64], NDArray[np.float64]]]:
    """Return the stretches of a polyline between its gaps; `row` is clipped already, so only NaN makes one."""
    known = np.isfinite(column) & ~np.isnan(row)
    edges = np.flatnonzero(np.diff(np.concatenate(([0], known.astype(np.int8), [0]))))
    return [(column[first:last], row[first:last]) for first, last in zip(edges[::2], edges[1::2], strict=True)]


def _dense(
    column: NDArray[np.float64], row: NDArray[np.float64], columns: int
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return the stretch with the middle of every dot column inside it added as a point."""
    middles = np.arange(columns, dtype=np.float64)
    inside = middles[(middles > column[0]) & (middles < column[-1])]
    if not len(inside):
        return column, row
    order = np.argsort(np.concatenate((column, inside)), kind="stable")
    places = np.concatenate((column, inside))[order]
    heights = np.concatenate((row, np.interp(inside, column, row)))[order]
    return places, heights


def _cover(low: NDArray[np.float64], high: NDArray[np.float64], column: NDArray[np.float64], row: NDArray[np.float64]) -> None:
    """Widen `low` and `high`, shapes (columns,), to hold the points, neighbours in different columns meeting half way."""
    places = np.clip(np.rint(column), -1, len(low)).astype(np.int64)
    middle = (row[1:] + row[:-1]) / 2
    all_places = np.concatenate((places, places[:-1], places[1:]))
    all_rows = np.concatenate((row, middle, middle))
    inside = (all_places >= 0) & (all_places < len(low))
    np.minimum.at(low, all_places[inside], all_rows[inside])
    np.maximum.at(high, all_places[inside], all_rows[inside])
