"""What surrounds a level figure: title, energy axis with ticks, places along the bottom, level numbers along the right."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from specterm.views.canvas import DOTS
from specterm.views.cells import Row, Rows, cut, fit_row, row_width, width_of
from specterm.views.scene import Scene
from specterm.views.ticks import Ticks, ticks

_LINES = {"braille": "│┤─┬└", "block": "│┤─┬└", "ascii": "|+-++"}


@dataclass(frozen=True)
class Frame:
    """Sizes in cells: `columns` x `rows` for the canvas, `gutter` for the energies, `numbers` for the level numbers.

    `dots` is the number of dots across and down a cell.
    """

    width: int
    columns: int
    rows: int
    gutter: int
    numbers: int
    energies: Ticks
    places: Ticks
    dots: tuple[int, int]
    has_title: bool
    has_line: bool
    has_labels: bool


def frame_for(scene: Scene, width: int, height: int, glyphs: str) -> Frame:
    """Return the frame that leaves the canvas most of a small size and shows all its parts in a large one."""
    has_labels, has_title, has_line = height >= 5, height >= 7, height >= 9
    rows = max(0, height - has_labels - has_title - has_line)
    energies = ticks(*scene.energies, max(1, rows // 3))
    numbers = _numbers_width(scene) if width >= 16 else 0
    gutter = max((width_of(label) for label in energies.labels), default=0) + 1 if width >= 30 else 0
    if gutter > width // 3:
        gutter = 0
    columns = max(0, width - gutter - numbers)
    places = ticks(*scene.window, max(1, columns // 8))
    return Frame(width, columns, rows, gutter, numbers, energies, places, DOTS[glyphs], has_title, has_line, has_labels)


def _numbers_width(scene: Scene) -> int:
    """Return the columns the level numbers need, at most 7."""
    return min(7, 2 + max((len(str(level.index)) for level in scene.levels), default=0)) if scene.levels else 0


def assemble(scene: Scene, frame: Frame, canvas: Rows, words: Row, glyphs: str, name: str = "") -> Rows:
    """Return the whole figure: the canvas with its surroundings, every row `frame.width` columns wide."""
    lines = _LINES[glyphs]
    rows: list[Row] = []
    if frame.has_title:
        rows.append(_title(scene, frame, words, name))
    marked = _energy_labels(scene, frame)
    numbered = _level_numbers(scene, frame)
    for number, cells in enumerate(canvas):
        left: Row = ()
        if frame.gutter:
            label = marked.get(number, "")
            left = ((label.rjust(frame.gutter - 1) + (lines[1] if label else lines[0]), "axis"),)
        rows.append((*left, *cells, *numbered.get(number, ((" " * frame.numbers, "plain"),))))
    if frame.has_line:
        rows.append(_bottom_line(scene, frame, lines))
    if frame.has_labels:
        rows.append(_place_labels(scene, frame))
    mark = "~" if glyphs == "ascii" else "…"
    return tuple(fit_row(tuple(run for run in row if run[0]), frame.width, mark) for row in rows)


def axis_title(name: str, note: str, unit: str) -> str:
    """Return `energy (meV)`, `energy (10^6 meV)` or `energy - 1.06 (meV)`."""
    if note.endswith("+"):
        return axis_title(f"{name} - {note.rstrip(' +')}", "", unit)
    if " + " in note:
        base, power = note.split(" + ")
        return axis_title(f"{name} - {base}", power, unit)
    inner = " ".join(part for part in (note, unit) if part)
    return f"{name} ({inner})" if inner else name


def _title(scene: Scene, frame: Frame, words: Row, name: str) -> Row:
    """Return the top row: the energy axis's title on the left, a name in the middle, what is drawn on the right."""
    left = axis_title("energy", frame.energies.note, scene.axes.energy)
    gap = frame.width - width_of(left) - row_width(words)
    if gap < 2:
        words = tuple((text.replace(" hatched", ""), style) for text, style in words)
        gap = frame.width - width_of(left) - row_width(words)
    if gap < 2:
        return ((left, "axis"), ("  ", "plain"), *words) if frame.gutter else words
    if name and width_of(name) + 4 <= gap:
        before = (gap - width_of(name)) // 2
        after = gap - width_of(name) - before
        return ((left, "axis"), (" " * before + name + " " * after, "dim"), *words)
    return ((left, "axis"), (" " * gap, "plain"), *words)


def _row_of(scene: Scene, frame: Frame, energy: float) -> int | None:
    """Return the cell row of an energy, or None outside the canvas."""
    low, high = scene.energies
    place = (high - energy) / (high - low)
    return round(place * (frame.rows * frame.dots[1] - 1)) // frame.dots[1] if np.isfinite(place) and 0 <= place <= 1 else None


def _energy_labels(scene: Scene, frame: Frame) -> dict[int, str]:
    """Return the energy labels by cell row."""
    found: dict[int, str] = {}
    for place, label in zip(frame.energies.places, frame.energies.labels, strict=True):
        row = _row_of(scene, frame, place)
        if row is not None:
            found.setdefault(row, label)
    return found


def _level_numbers(scene: Scene, frame: Frame) -> dict[int, Row]:
    """Return the numbers at the right end of each row; several levels in one row share it, the chosen one comes first."""
    at: dict[int, list[int]] = {}
    chosen_row = None
    for place, level in enumerate(scene.levels):
        row = _row_of(scene, frame, level.value)
        if row is not None:
            at.setdefault(row, []).append(level.index)
            if place == scene.chosen:
                chosen_row = row
    made: dict[int, Row] = {}
    for row, indices in at.items():
        chosen = scene.levels[scene.chosen].index if row == chosen_row and scene.chosen is not None else None
        text = f"<{chosen}" if chosen is not None else f" {indices[0]}"
        if len(indices) > 1:
            text += "+"
        text = cut(text, frame.numbers, "~").ljust(frame.numbers)
        made[row] = ((text, "chosen" if chosen is not None else "other"),)
    return made


def _column_of(scene: Scene, frame: Frame, place: float) -> int | None:
    """Return the cell column of a place, counted from the left edge of the figure, or None outside."""
    low, high = scene.window
    column = (place - low) / (high - low)
    if not (frame.columns and np.isfinite(column) and 0 <= column <= 1):
        return None
    return frame.gutter + round(column * (frame.columns * frame.dots[0] - 1)) // frame.dots[0]


def _bottom_line(scene: Scene, frame: Frame, lines: str) -> Row:
    """Return the line under the canvas with its tick marks."""
    text = [" "] * frame.gutter + [lines[2]] * frame.columns
    if frame.gutter:
        text[frame.gutter - 1] = lines[4]
    for place in frame.places.places:
        column = _column_of(scene, frame, place)
        if column is not None:
            text[column] = lines[3]
    return (("".join(text), "axis"),)


def _place_labels(scene: Scene, frame: Frame) -> Row:
    """Return the labels of the places, centred under their ticks, with the coordinate's name at the right end."""
    name = axis_title(scene.axes.coordinate, frame.places.note, scene.axes.length)
    room = frame.width - width_of(name) - 1
    text = ""
    for place, label in zip(frame.places.places, frame.places.labels, strict=True):
        column = _column_of(scene, frame, place)
        if column is None:
            continue
        start = max(0, column - len(label) // 2)
        if start < len(text) + (1 if text else 0) or start + len(label) > room:
            continue
        text += " " * (start - len(text)) + label
    return ((text + " " * max(1, frame.width - len(text) - width_of(name)) + name, "axis"),)
