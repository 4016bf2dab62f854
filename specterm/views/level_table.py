"""The table of levels: number, value with error, kind, nodes, parity, and the weight of a prepared state row by row."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache

from specterm.spectrum.result import Level
from specterm.views.cells import MARKS, Row, Rows, cut, fit_row, plain, width_of
from specterm.views.numbers import bracket, short
from specterm.views.weight_bars import bar, percent

_SMALLEST = 6
"""The fewest columns for a column of choice."""
_NARROWEST = 12
"""The fewest columns for a bar with its percentage."""


@dataclass(frozen=True)
class Weighing:
    """The weights of one prepared state by level index, with their errors, the part captured and the state's name."""

    state: str
    weights: Mapping[int, float]
    errors: Mapping[int, float | None]
    captured: float


@dataclass(frozen=True)
class Extra:
    """A column of choice: its heading and a text for every level."""

    heading: str
    texts: tuple[str, ...]


@dataclass(frozen=True)
class _Column:
    """One column: its heading and a text for every level; `right` aligns to the right."""

    heading: str
    texts: tuple[str, ...]
    right: bool = False

    @property
    def width(self) -> int:
        """Columns needed."""
        return max([width_of(self.heading), *(width_of(text) for text in self.texts)])


def value_text(level: Level) -> str:
    """Return a level's value with its error, and the width of a resonance behind it."""
    text = bracket(level.value, level.error)
    return text if level.width is None else f"{text} width {short(level.width, 4)}"


def aligned(texts: Sequence[str]) -> tuple[str, ...]:
    """Return numbers padded on the left so that their decimal points stand under each other."""
    heads = [len(_head(text)) for text in texts]
    widest = max(heads, default=0)
    return tuple(" " * (widest - head) + text for head, text in zip(heads, texts, strict=True))


def _head(text: str) -> str:
    """Return the part of a number before its decimal point, bracket or exponent."""
    for place, character in enumerate(text):
        if character in ".(e" and place:
            return text[:place]
    return text


@lru_cache(maxsize=4)
def _columns(levels: tuple[Level, ...], unit: str, extra: Extra | None = None) -> list[_Column]:
    """Return the columns in the order they matter; kept, as stepping through many levels asks for the same ones each time."""
    value = f"value ({unit})" if unit else "value"
    chosen = [_Column(extra.heading, extra.texts)] if extra else []
    made = [
        _Column("n", tuple(str(level.index) for level in levels), right=True),
        _Column(value, aligned([value_text(level) for level in levels])),
        *chosen,
        _Column("kind", tuple(level.kind for level in levels)),
        _Column("nodes", tuple("-" if level.nodes is None else str(level.nodes) for level in levels), right=True),
        _Column("parity", tuple(level.parity or "-" for level in levels)),
    ]
    always = ("n", value, "kind", extra.heading if extra else "")
    return [column for column in made if column.heading in always or any(text != "-" for text in column.texts)]


def table(
    levels: Sequence[Level],
    width: int,
    height: int,
    *,
    unit: str = "",
    chosen: int | None = None,
    first: int = 0,
    weighing: Weighing | None = None,
    extra: Extra | None = None,
    glyphs: str = "braille",
) -> Rows:
    """Return `height` rows of `width` columns: a heading and the levels from place `first` on; `chosen` is a place.

    Columns that do not fit are left out from the right, the weight's bar and the value never; a value that is cut shows it.
    `extra` stands behind the value.
    """
    if width <= 0 or height <= 0:
        return ((),) * max(0, height)
    mark = MARKS[glyphs]
    columns = _columns(tuple(levels), unit, extra)
    tail = _tail(columns, width) if weighing else 0
    columns = _with_room(columns, width - tail - 1, mark) if extra else columns
    kept = _fitting(columns, width - tail - 1)
    look = _Look(width, tail, chosen, weighing, glyphs)
    rows = [_heading(kept, width, weighing, tail, mark)]
    rows += [_line(kept, levels[place], place, look) for place in range(first, min(len(levels), first + height - 1))]
    rows += [((" " * width, "plain"),)] * (height - len(rows))
    return tuple(rows[:height])


def _tail(columns: Sequence[_Column], width: int) -> int:
    """Return the columns that weights get: enough for a bar to tell something, less where the kind would not fit beside it."""
    wanted = min(8 + max(4, width // 4), max(0, width - 24))
    beside = width - 1 - sum(column.width + 1 for column in columns[:3])
    return beside if _NARROWEST <= beside < wanted else wanted


def _fitting(columns: Sequence[_Column], width: int) -> list[_Column]:
    """Return the columns that fit in `width`, at least number and value."""
    kept = list(columns)
    while len(kept) > 2 and sum(column.width + 1 for column in kept) > width:
        kept.pop()
    return kept


def _with_room(columns: list[_Column], width: int, mark: str) -> list[_Column]:
    """Return the columns with the column of choice cut to the room behind number and value, where there is some."""
    room = width - sum(column.width + 1 for column in columns[:2]) - 1
    if not _SMALLEST <= room < columns[2].width:
        return columns
    texts = tuple(cut(text, room, mark) for text in columns[2].texts)
    return [*columns[:2], _Column(cut(columns[2].heading, room, mark), texts), *columns[3:]]


def _cells(columns: Sequence[_Column], texts: Sequence[str]) -> str:
    """Return one line of columns."""
    pairs = zip(columns, texts, strict=True)
    return " ".join(text.rjust(column.width) if column.right else text.ljust(column.width) for column, text in pairs)


def _heading(columns: Sequence[_Column], width: int, weighing: Weighing | None, tail: int, mark: str) -> Row:
    """Return the headings; with a prepared state its name and the captured part stand over the bars."""
    text = " " + _cells(columns, [column.heading for column in columns])
    if not weighing or not tail:
        return fit_row(((text, "axis"),), width, mark)
    amount = percent(weighing.captured).strip()
    choices = (f"{weighing.state} {amount} captured", f"{weighing.state} {amount}", f"{amount} {weighing.state}")
    words = next((words for words in choices if width_of(words) < tail), choices[-1])
    head = fit_row(((text, "axis"),), width - tail, mark)
    return (*head, *fit_row(((" " + cut(words, tail - 1, mark), "weight"),), tail, mark))


@dataclass(frozen=True)
class _Look:
    """What the rows of one table share: columns in all and for the weight, the chosen place, the weights, the glyphs."""

    width: int
    tail: int
    chosen: int | None
    weighing: Weighing | None
    glyphs: str


def _line(columns: Sequence[_Column], level: Level, place: int, look: _Look) -> Row:
    """Return the row of the level at `place`."""
    mark, weighing, tail, chosen = MARKS[look.glyphs], look.weighing, look.tail, place == look.chosen
    style = "chosen" if chosen else ("warn" if level.kind in ("box", "unresolved") else "plain")
    text = (">" if chosen else " ") + _cells(columns, [column.texts[place] for column in columns])
    head = fit_row(((text, style),), look.width - tail, mark)
    if not weighing or not tail:
        return head
    weight = weighing.weights.get(level.index)
    if weight is None:
        return (*head, (" " * tail, "plain"))
    amount = percent(weight, weighing.errors.get(level.index))
    room = tail - 1 - len(amount)
    text = bar(weight, room, look.glyphs) + amount if room >= 1 else amount[: tail - 1].ljust(tail - 1)
    return (*head, (" " + text, "weight"))


def text_table(
    levels: Sequence[Level], unit: str = "", weighing: Weighing | None = None, glyphs: str = "braille",
    extra: Extra | None = None,
) -> str:  # fmt: skip
    """Return the whole table as aligned plain text, as wide as it needs to be."""
    columns = _columns(tuple(levels), unit, extra)
    width = sum(column.width + 1 for column in columns) + 1 + (40 if weighing else 0)
    if weighing:
        width = max(width, 4 * 32)
    return plain(table(levels, width, len(levels) + 1, unit=unit, weighing=weighing, extra=extra, glyphs=glyphs))
