"""The rows of the panes, from what is shown to cells; no screen in here."""

from __future__ import annotations

import textwrap
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any

from specterm.errors import SpectermError, printable
from specterm.session.document import Document
from specterm.tui.complaint import complaint
from specterm.tui.layout import BESIDE, SMALLEST
from specterm.tui.look import Look
from specterm.tui.pages import LETTERS, NAMES, page_of
from specterm.tui.pages.page import Answered, Bench, Room
from specterm.tui.pinned import Pinned
from specterm.tui.solving import Outcome, Weighed
from specterm.views.cells import MARKS, Row, Rows, cut, fit_row, plain, width_of
from specterm.views.columns import padded
from specterm.views.level_figure import draw
from specterm.views.level_table import Extra, table, text_table
from specterm.views.numbers import short, with_unit
from specterm.views.scene import Prepared, scene
from specterm.views.status import MomentsText, Units, join, moment_parts, state_line, state_parts, trust_line, trust_parts


@dataclass(frozen=True)
class Shown:
    """All that the panes are drawn from.

    `outcome` is the last one with a model, `stale` whether the text has moved on since; `weighed` and `moments` have arrived
    for what `look` chooses, or are None; `tuned` says what number is picked; `answer` is that of the page shown, perhaps an
    earlier one (`fresh` says not) and `also` its second one, `asking` whether more is on its way; `extra` is the column of
    choice, `pinned` stands beside and the levels have `moved` since; `name` is the sheet's where no other pane says it;
    `error`, with the text it is about, has the place of the levels where there are none.
    """

    look: Look
    outcome: Outcome | None = None
    stale: bool = False
    weighed: Weighed | None = None
    moments: MomentsText | None = None
    answer: Answered | None = None
    fresh: bool = False
    asking: bool = False
    tuned: str = ""
    also: Answered | None = None
    extra: Extra | None = None
    pinned: Pinned | None = None
    moved: tuple[Any, ...] | None = None
    bench: Bench = field(default_factory=Bench)
    error: tuple[SpectermError, str] | None = None
    message: str = ""
    message_style: str = "plain"
    name: str = ""

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
    if not spectrum.levels:
        said: Rows = (((" no level is bound", "title"),), ((" + asks for more: box levels", "plain"),))
        return tuple(fit_row(row, width, shown.mark) for row in (said + ((),) * height)[:height])
    flip = not spectrum.from_top
    levels = spectrum.levels[::-1] if flip else spectrum.levels
    chosen = len(levels) - 1 - shown.look.chosen if flip else shown.look.chosen
    room = max(1, height - 1)
    more = len(levels) > room
    room -= more
    first = max(0, min(chosen - room // 2, len(levels) - room))
    rows = table(
        levels, width, height - more, unit=outcome.units.energy, chosen=chosen, first=first,
        weighing=shown.weighed.weighing if shown.weighed else None, extra=_turned(shown.extra, flip=flip),
        glyphs=shown.look.glyphs,
    )  # fmt: skip
    if more:
        words = f" {len(levels)} levels, rows {first + 1}-{first + room}"
        rows = (*rows, fit_row(((words, "dim"),), width, shown.mark))
    return rows


def _turned(extra: Extra | None, *, flip: bool) -> Extra | None:
    """Return the column of choice with energies up."""
    return Extra(extra.heading, extra.texts[::-1]) if extra and flip else extra


def figure_rows(shown: Shown, width: int, height: int) -> Rows:
    """Return the figure of the chosen level, or the page that stands in its place."""
    outcome = shown.outcome
    if page_of(shown.look) is not None:
        return page_rows(shown, width, height)
    if outcome is None or outcome.origin is None:
        return (((" " * max(0, width), "plain"),),) * height
    spectrum = outcome.origin.spectrum
    chosen = shown.look.chosen if spectrum and spectrum.levels else None
    zoom = shown.look.mode != "levels"
    behind = shown.pinned.behind(chosen, shown.moved) if shown.pinned else None
    view = scene(outcome.origin, chosen, samples=max(100, 8 * width), prepared=shown.prepared, behind=behind, zoom=zoom)
    return draw(view, width, height, mode=shown.look.mode, glyphs=shown.look.glyphs, name=shown.name)


def page_rows(shown: Shown, width: int, height: int) -> Rows:
    """Return the page shown, under the line that names all pages."""
    page, answer, units = page_of(shown.look), shown.answer, shown.outcome.units if shown.outcome else None
    assert page is not None
    head: Rows = () if shown.look.page == NAMES[0] else (names_row(shown, width),)
    also = shown.also.result if shown.also is not None else None
    room = Room(width, max(0, height - len(head)), shown.look, units or Units(), shown.bench, also)
    if shown.outcome is None or shown.outcome.origin is None:
        rows: Rows = complaint(*shown.error, max(10, width - 1), max(2, height - 2)) if shown.error else ()
    elif answer is not None and answer.error is None:
        rows = page.rows(answer.result, room)
    else:
        rows = page.rows(None, room)[: len(shown.bench.notebook.entries) + 2] if page.alone else ()
        if answer is not None and answer.error is not None:
            rows = (*rows, *complaint(answer.error, "", max(10, width - 1)))
        elif page.inquiry(shown.look, shown.outcome, shown.bench) is None:
            rows = (*rows, fit_row(((" " + page.missing, "warn"),), width, shown.mark))
        else:
            words = " computing; x stops it" if shown.asking else " stopped; r computes again"
            rows = (*rows, fit_row(((words, "dim"),), width, shown.mark))
    return padded((*head, *rows), width, height)


def names_row(shown: Shown, width: int) -> Row:
    """Return the line that names the pages with their keys, the one shown marked, and says when it is an earlier answer."""
    runs: list[tuple[str, str]] = []
    for number, name in enumerate(NAMES, 1):
        key = str(number) if number < 9 else LETTERS[name]
        runs += [(" " if number > 1 else "", "plain"), (f"{key} {name}", "bar" if name == shown.look.page else "dim")]
    if shown.asking and not shown.fresh:
        runs.append((" ...", "warn"))
    return fit_row(tuple(runs), width)


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
    moments = shown.moments if shown.look.moments and width >= BESIDE else None
    more = [f"{shown.extra.heading} {shown.extra.texts[shown.look.chosen].strip()}"] if shown.extra else []
    level = spectrum.levels[shown.look.chosen]
    row = state_line(level, outcome.units, width - 1, moments=moments, more=more, mark=shown.mark)
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


def moments_row(shown: Shown, width: int) -> Row:
    """Return means and spreads on a line of their own."""
    parts = moment_parts(shown.moments, shown.outcome.units) if shown.moments and shown.outcome and shown.look.moments else ()
    return fit_row(((" " + join(parts, width - 1, shown.mark), "plain"),), width)


def message_row(shown: Shown, width: int) -> Row:
    """Return the message line: a message, else what is known of the prepared state, else notes."""
    if shown.message:
        return fit_row(((" " + cut(shown.message, width - 1, shown.mark), shown.message_style),), width)
    outcome = shown.outcome
    words = [*([shown.tuned] if shown.tuned else []), *weighed_parts(shown)]
    if words:
        return fit_row(((" " + join(words, width - 1, shown.mark), "weight"),), width)
    notes = "; ".join(outcome.notes) if outcome else ""
    return fit_row(((" " + cut(notes, width - 1, shown.mark), "dim"),), width)


def weighed_parts(shown: Shown) -> list[str]:
    """Return what is known of the prepared state: the part captured, mean and spread of the energy in that part, notes."""
    outcome, weighed = shown.outcome, shown.weighed
    if weighed is None or weighed.weighing is None or outcome is None:
        return []
    unit = outcome.units.energy
    spread = weighed.spread if weighed.spread > 1e-9 * abs(weighed.mean) else 0.0
    words = [f"state {weighed.state}", f"captured {100 * weighed.weighing.captured:.4f}%"]
    words += [f"its mean {with_unit(short(weighed.mean, 6), unit)}", f"spread {with_unit(short(spread, 4), unit)}"]
    return [*words, *weighed.notes]


def details(shown: Shown, document: Document, width: int) -> Rows:
    """Return all that the lines under the panes say, unabridged, wrapped to `width`."""
    outcome = shown.outcome
    spectrum = outcome.spectrum if outcome else None
    if outcome is None or spectrum is None:
        return (((cut("no level", width, shown.mark), "plain"),),)
    units = outcome.units
    blocks = [("Sheet", [document.name])]
    if spectrum.levels:
        moments = list(moment_parts(shown.moments, units)) if shown.moments else []
        blocks.append(("Level", [*state_parts(spectrum.levels[shown.look.chosen], units), *moments]))
    blocks.append(("State", weighed_parts(shown)))
    edge = [] if spectrum.threshold is None else [f"threshold {with_unit(short(spectrum.threshold, 10), units.energy)}"]
    blocks.append(("Message", [shown.message] if shown.message else []))
    blocks += [("All levels", [*trust_parts(spectrum, units), *edge]), ("Notes", list(outcome.notes))]
    rows: list[Row] = []
    for heading, parts in blocks:
        lines = [line for part in parts for line in textwrap.wrap(part, max(8, width - 2))]
        rows += [((heading, "title"),), *[(("  " + line, "plain"),) for line in lines], ()] if lines else []
    return tuple(fit_row(row, width, shown.mark) for row in rows[:-1])


def as_text(shown: Shown, width: int, height: int) -> str:
    """Return the chosen level, the trust in it, the whole table and the figure as plain text."""
    outcome = shown.outcome
    if outcome is None or outcome.spectrum is None:
        return ""
    weighing = shown.weighed.weighing if shown.weighed else None
    lines = plain([chosen_row(shown, 200), trusted_row(shown, 200)])
    levels = text_table(outcome.spectrum.levels, outcome.units.energy, weighing, shown.look.glyphs, shown.extra)
    figure = plain(figure_rows(shown, max(width, 60), max(height, 20)))
    return f"{lines}\n\n{levels}\n\n{figure}\n"


def needs_rows(width: int, height: int) -> Rows:
    """Return what the screen says where it is too small, as much of it as fits."""
    words = f"too small: specterm needs {SMALLEST[0]} x {SMALLEST[1]}, this is {width} x {height}. q quits"
    lines = textwrap.wrap(words, max(1, width))[: max(0, height)]
    return tuple(fit_row(((line, "title"),), width) for line in lines)


def bottom_row(texts: Sequence[str], width: int) -> Row:
    """Return the bottom line: as many of the keys as fit, the last two always."""
    kept = list(texts)
    while len(kept) > 2 and sum(width_of(text) + 2 for text in kept) > width:
        kept.pop(-3)
    runs: list[tuple[str, str]] = [(" ", "plain")]
    for text in kept:
        key, _, words = text.partition(" ")
        runs += [(key, "key"), (f" {words}", "dim"), ("  ", "plain")]
    return fit_row(tuple(runs[:-1]), width)
