"""The rows of the panes, from what is shown to cells; no screen in here."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from specterm.errors import SpectermError, printable
from specterm.session.document import Document
from specterm.tui.complaint import complaint
from specterm.tui.layout import WIDE
from specterm.tui.look import Look
from specterm.tui.solving import Outcome, Weighed
from specterm.views.cells import MARKS, Row, Rows, cut, fit_row, plain, width_of
from specterm.views.level_figure import draw
from specterm.views.level_table import table, text_table
from specterm.views.numbers import short, with_unit
from specterm.views.scene import Prepared, scene
from specterm.views.status import MomentsText, join, moment_parts, state_line, trust_line


@dataclass(frozen=True)
class Shown:
    """All that the panes are drawn from.

    `outcome` is the last one with a model, `stale` whether the text has moved on since; `weighed` and `moments` have arrived
    for what `look` chooses, or are None; `error`, with the text it is about, has the place of the levels where there are none.
    """

    look: Look
    outcome: Outcome | None = None
    stale: bool = False
    weighed: Weighed | None = None
    moments: MomentsText | None = None
    error: tuple[SpectermError, str] | None = None
    message: str = ""
    message_style: str = "plain"

    @property
    def mark(self) -> str:
        """The mark that stands for what is cut."""
        return MARKS[self.look.glyphs]

    @property
    def prepared(self) -> Prepared | None:
        """The prepared state to draw, where its weights have arrived."""
        return self.weighed.prepared if self.weighed else None


def heading_row(document: Document, width: int, *, typing: bool, glyphs: str) -> Row:
    """Return the heading of the sheet: its file and whether there is unsaved text."""
    words = document.name + ("  unsaved" if document.changed else "")
    style = "bar" if typing else "title"
    return fit_row(((" " + cut(words, max(0, width - 1), MARKS[glyphs]), style),), width)


def level_rows(shown: Shown, width: int, height: int) -> Rows:
    """Return the table of levels, energies up as in the figure, scrolled to the chosen one."""
    outcome = shown.outcome
    spectrum = outcome.spectrum if outcome else None
    if spectrum is None or outcome is None:
        rows = complaint(*shown.error, max(1, width), max(2, height)) if shown.error else ()
        return (rows + (((" " * max(0, width), "plain"),),) * height)[:height]
    flip = not spectrum.from_top
    levels = spectrum.levels[::-1] if flip else spectrum.levels
    chosen = len(levels) - 1 - shown.look.chosen if flip else shown.look.chosen
    room = max(1, height - 1)
    more = len(levels) > room
    room -= more
    first = max(0, min(chosen - room // 2, len(levels) - room))
    rows = table(
        levels, width, height - more, unit=outcome.units.energy, chosen=chosen, first=first,
        weighing=shown.weighed.weighing if shown.weighed else None, glyphs=shown.look.glyphs,
    )
    if more:
        words = f" {len(levels)} levels, rows {first + 1}-{first + room}"
        rows = (*rows, fit_row(((words, "dim"),), width, shown.mark))
    return rows


def figure_rows(shown: Shown, width: int, height: int) -> Rows:
    """Return the figure of the chosen level."""
    outcome = shown.outcome
    if outcome is None or outcome.origin is None:
        return (((" " * max(0, width), "plain"),),) * height
    spectrum = outcome.origin.spectrum
    chosen = shown.look.chosen if spectrum and spectrum.levels else None
    zoom = shown.look.mode != "levels"
    view = scene(outcome.origin, chosen, samples=max(100, 8 * width), prepared=shown.prepared, zoom=zoom)
    return draw(view, width, height, mode=shown.look.mode, glyphs=shown.look.glyphs)


def drawn_safely(draw: Callable[[Shown, int, int], Rows], shown: Shown, width: int, height: int) -> Rows:
    """Return what `draw` returns, or words in its place where a wave or potential cannot be evaluated."""
    try:
        return draw(shown, width, height)
    except Exception as error:  # the edge of the screen: what cannot be drawn must not end the session
        words = f" cannot be drawn: {printable(str(error))}".replace("\n", " ")
        return (fit_row(((words, "warn"),), width, shown.mark),) + (((" " * width, "plain"),),) * (height - 1)


def chosen_row(shown: Shown, width: int) -> Row:
    """Return the line of the chosen level, with the mean of the prepared state when there is one."""
    outcome = shown.outcome
    spectrum = outcome.spectrum if outcome else None
    if outcome is None or spectrum is None or not spectrum.levels:
        return fit_row((("", "plain"),), width)
    moments = shown.moments if shown.look.moments and width >= WIDE else None
    row = state_line(spectrum.levels[shown.look.chosen], outcome.units, width - 1, moments=moments, mark=shown.mark)
    return fit_row(((" ", "plain"), *row), width)


def trusted_row(shown: Shown, width: int) -> Row:
    """Return the line of trust; it says so when the text has moved on since."""
    outcome = shown.outcome
    if outcome is None or outcome.spectrum is None:
        return fit_row((("", "plain"),), width)
    if shown.stale:
        words = "levels and figure are those of an earlier text"
        return fit_row(((" " + cut(words, width - 1, shown.mark), "warn"),), width)
    return fit_row(((" ", "plain"), *trust_line(outcome.spectrum, outcome.units, width - 1, mark=shown.mark)), width)


def message_row(shown: Shown, width: int) -> Row:
    """Return the message line: a message, else the prepared state's mean energy, else the moments where narrow, else notes."""
    if shown.message:
        return fit_row(((" " + cut(shown.message, width - 1, shown.mark), shown.message_style),), width)
    outcome, weighed = shown.outcome, shown.weighed
    if weighed is not None and weighed.weighing is not None and outcome is not None:
        unit = outcome.units.energy
        words = [f"state {weighed.state}", f"mean {with_unit(short(weighed.mean, 6), unit)}"]
        words += [f"spread {with_unit(short(weighed.spread, 4), unit)}", f"captured {100 * weighed.weighing.captured:.4f}%"]
        return fit_row(((" " + join(words, width - 1, shown.mark), "weight"),), width)
    if width < WIDE and shown.moments is not None and shown.look.moments and outcome is not None:
        parts = moment_parts(shown.moments, outcome.units)
        return fit_row(((" " + join(parts, width - 1, shown.mark), "plain"),), width)
    notes = "; ".join(outcome.notes) if outcome else ""
    return fit_row(((" " + cut(notes, width - 1, shown.mark), "dim"),), width)


def as_text(shown: Shown, width: int, height: int) -> str:
    """Return the chosen level, the trust in it, the whole table and the figure as plain text."""
    outcome = shown.outcome
    if outcome is None or outcome.spectrum is None:
        return ""
    weighing = shown.weighed.weighing if shown.weighed else None
    lines = plain([chosen_row(shown, 200), trusted_row(shown, 200)])
    levels = text_table(outcome.spectrum.levels, outcome.units.energy, weighing, shown.look.glyphs)
    figure = plain(figure_rows(shown, max(width, 60), max(height, 20)))
    return f"{lines}\n\n{levels}\n\n{figure}\n"


def bottom_row(texts: Sequence[str], width: int) -> Row:
    """Return the bottom line: as many of the keys as fit, the last two always."""
    kept = list(texts)
    while len(kept) > 2 and sum(width_of(text) + 3 for text in kept) > width:
        kept.pop(-3)
    runs: list[tuple[str, str]] = [(" ", "plain")]
    for text in kept:
        key, _, words = text.partition(" ")
        runs += [(key, "key"), (f" {words}   ", "dim")]
    return fit_row(tuple(runs), width)
