"""The level figure: potential, levels and eigenstates, energies up, in exactly the cells it is given.

The chosen state is drawn strong: hatched where it is classically allowed, a bare line on a dotted level where it is forbidden,
so the figure reads without colour.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from specterm.views.canvas import Canvas
from specterm.views.cells import Row, Rows
from specterm.views.figure_frame import assemble, frame_for
from specterm.views.scene import Scene

Floats = NDArray[np.float64]
_CROWDED = 3.0


def draw(scene: Scene, width: int, height: int, *, mode: str = "psi", glyphs: str = "braille", name: str = "") -> Rows:
    """Return the figure, `height` rows of `width` columns; `mode` is one of MODES, `glyphs` one of GLYPHS. Any size is fine.

    `name` is put in the middle of the top row where there is room.
    """
    if width <= 0 or height <= 0:
        return ((),) * max(0, height)
    frame = frame_for(scene, width, height, glyphs)
    canvas = Canvas(frame.columns, frame.rows, glyphs)
    if canvas.columns and canvas.rows:
        _draw_all(Painter(scene, canvas, mode))
    return assemble(scene, frame, canvas.cells(), title(scene, mode), glyphs, name)


def title(scene: Scene, mode: str) -> Row:
    """Return what the figure shows, in words; how much of it is printed depends on the room."""
    if not scene.levels:
        return (("no level", "warn"),)
    if mode == "levels":
        return (("levels", "title"),)
    what = "|psi|^2" if mode == "density" else ("|psi| hatched, Re psi" if scene.is_complex else "psi")
    if scene.chosen is None:
        return ((what, "title"),)
    return ((f"{what}, level {scene.levels[scene.chosen].index}", "title"),)


class Painter:
    """Draws one scene on one canvas; knows where places and energies lie in dots."""

    def __init__(self, scene: Scene, canvas: Canvas, mode: str) -> None:
        """Keep the scene and work out the scales."""
        self.scene, self.canvas, self.mode = scene, canvas, mode
        low, high = scene.window
        self.across = (scene.x - low) / (high - low) * (canvas.columns - 1)
        self.bottom, self.top = scene.energies
        rows = self.rows_of(np.array([level.value for level in scene.levels]))
        self.usual = _usual(rows, canvas.rows) * (1.0 if mode == "density" else 0.7)
        self.room = _room(rows)

    def row(self, energy: float) -> float:
        """Return the dot row of an energy, row 0 at the top."""
        return float(self.rows_of(np.array(energy)))

    def rows_of(self, energies: Floats) -> Floats:
        """Return the dot rows of energies of any shape."""
        with np.errstate(over="ignore", invalid="ignore"):
            return np.asarray((self.top - energies) / (self.top - self.bottom) * (self.canvas.rows - 1))

    def column(self, place: float) -> float:
        """Return the dot column of a place."""
        low, high = self.scene.window
        return (place - low) / (high - low) * (self.canvas.columns - 1)

    def allowed(self, energy: float) -> NDArray[np.bool_]:
        """Return where, on the samples, the level is classically allowed, shape (n,); everywhere without a potential."""
        sign = -1.0 if self.scene.from_top else 1.0
        return ~(sign * self.scene.potential > sign * energy)

    def allowed_columns(self, energy: float) -> NDArray[np.bool_]:
        """Return where the level is allowed by dot column, shape (columns,)."""
        columns = np.arange(self.canvas.columns)
        nearest = np.clip(np.searchsorted(self.across, columns), 0, len(self.across) - 1)
        inside = (columns >= self.across[0] - 0.5) & (columns <= self.across[-1] + 0.5)
        return np.asarray(self.allowed(energy)[nearest] & inside)

    def shape_of(self, wave: NDArray[Any]) -> tuple[Floats, Floats]:
        """Return the line and the outline of the hatching for a wave, both (n,) with largest size 1."""
        size = np.abs(wave)
        largest = float(np.nanmax(size, initial=0.0))
        if not np.isfinite(largest) or largest <= 0:
            return np.full(len(wave), np.nan), np.full(len(wave), np.nan)
        if self.mode == "density":
            return (size / largest) ** 2, (size / largest) ** 2
        line = np.real(wave) / largest
        return line, size / largest if np.iscomplexobj(wave) and np.abs(wave.imag).max() > 0 else line

    def reach(self, place: int) -> float:
        """Return how many dot rows the wave at `place` reaches: the usual distance, less near neighbours, enough to be seen."""
        return min(self.usual, max(0.9 * float(self.room[place]), 0.1 * self.canvas.rows, 2.0))


def _usual(rows: Floats, height: int) -> float:
    """Return the usual distance of the levels in dot rows, at least a tenth and at most a quarter of the canvas."""
    gaps = np.diff(np.sort(rows[np.isfinite(rows)]))
    gaps = gaps[gaps > 1.0]
    usual = 0.85 * float(np.median(gaps)) if len(gaps) else 0.25 * height
    return min(max(usual, 0.1 * height, 2.0), 0.25 * height)


def _room(rows: Floats) -> Floats:
    """Return for each level the distance to the nearer of its neighbours that are a dot row or more away, inf without any."""
    known = np.nan_to_num(rows, nan=0.0, posinf=1e6, neginf=-1e6)
    apart = np.abs(known[:, None] - known[None, :])
    return np.asarray(np.where(apart > 1.0, apart, np.inf).min(axis=1, initial=np.inf))


def _draw_all(painter: Painter) -> None:
    """Draw the layers from the back to the front."""
    scene, canvas = painter.scene, painter.canvas
    if scene.threshold is not None:
        canvas.horizontal(painter.row(scene.threshold), "threshold", dash=(4, 4))
    _draw_behind(painter)
    _draw_others(painter)
    if scene.prepared is not None:
        _, mean, wave = scene.prepared
        line, _ = painter.shape_of(wave)
        canvas.curve(painter.across, painter.row(mean) - painter.usual * line, "weight")
    if scene.chosen is not None:
        _draw_hatch(painter, scene.chosen)
    canvas.curve(painter.across, painter.rows_of(scene.potential), "potential", over=True)
    _draw_walls(painter)
    if scene.chosen is not None:
        _draw_chosen(painter, scene.chosen)


def _draw_behind(painter: Painter) -> None:
    """Draw a pinned potential, level and state in dots."""
    scene, canvas = painter.scene, painter.canvas
    if scene.behind is None:
        return
    potential, value, wave = scene.behind
    canvas.curve(painter.across, painter.rows_of(potential), "pinned", dash=(1, 2))
    if value is None or not np.isfinite(value):
        return
    canvas.horizontal(painter.row(value), "pinned", dash=(1, 5))
    if wave is not None and painter.mode != "levels":
        line, _ = painter.shape_of(wave)
        canvas.curve(painter.across, painter.row(value) - painter.usual * line, "pinned", dash=(1, 2))


def _draw_others(painter: Painter) -> None:
    """Draw the levels that are not chosen: a dotted line each and, where there is room, the wave."""
    scene, canvas = painter.scene, painter.canvas
    rows = painter.rows_of(np.array([level.value for level in scene.levels]))
    spread = np.sort(rows[np.isfinite(rows)])
    shown = np.isfinite(rows) & (rows > -canvas.rows) & (rows < 2 * canvas.rows)
    roomy = len(spread) < 2 or float(np.median(np.diff(spread))) >= _CROWDED
    for place, level in enumerate(scene.levels):
        if place == scene.chosen or not shown[place]:
            continue
        stacked = painter.mode == "levels"
        dash = (1, 0) if stacked else (1, 3)
        canvas.horizontal(rows[place], "other", dash=dash, where=painter.allowed_columns(level.value))
        if roomy and not stacked:
            line, _ = painter.shape_of(scene.waves[place])
            canvas.curve(painter.across, rows[place] - painter.reach(place) * line, "other")


def _draw_hatch(painter: Painter, place: int) -> None:
    """Hatch the chosen state where it is classically allowed."""
    level = painter.scene.levels[place]
    if painter.mode == "levels" or not np.isfinite(level.value):
        return
    base = painter.row(level.value)
    _, outline = painter.shape_of(painter.scene.waves[place])
    inside = np.where(painter.allowed(level.value), base - painter.reach(place) * outline, np.nan)
    painter.canvas.hatch(painter.across, inside, base, "chosen")


def _draw_chosen(painter: Painter, place: int) -> None:
    """Draw the chosen level and its wave, told apart by style and dotting where it is classically forbidden."""
    level, canvas = painter.scene.levels[place], painter.canvas
    if not np.isfinite(level.value):
        return
    base = painter.row(level.value)
    inside = painter.allowed_columns(level.value)
    canvas.horizontal(base, "forbidden", dash=(1, 2), where=~inside)
    canvas.horizontal(base, "chosen", where=inside)
    if painter.mode == "levels":
        return
    line, _ = painter.shape_of(painter.scene.waves[place])
    rows = base - painter.reach(place) * line
    canvas.curve(painter.across, rows, "forbidden")
    canvas.curve(painter.across, np.where(painter.allowed(level.value), rows, np.nan), "chosen")


def _draw_walls(painter: Painter) -> None:
    """Draw the ends of the domain: a full line for a wall, a broken one for a free end or a ring's seam."""
    axes = painter.scene.axes
    for place, end in ((axes.left, axes.left_end), (axes.right, axes.right_end)):
        if end != "open" and np.isfinite(place):
            painter.canvas.vertical(painter.column(place), "wall", dash=(1, 0) if end == "wall" else (2, 2))


