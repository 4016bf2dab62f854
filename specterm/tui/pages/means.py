"""The page of means: every observable of the sheet in the chosen level and in the state weighed, and two beside each other."""

from __future__ import annotations

import textwrap
from dataclasses import dataclass
from typing import Any

from specterm.errors import SpectermError, WorkStopped
from specterm.session.records import Record
from specterm.tui.look import Look
from specterm.tui.pages.page import Bench, Page, Room, Stop, Tell
from specterm.tui.solving import Outcome
from specterm.views.cells import Row, Rows, fit_row
from specterm.views.columns import padded, table_rows


@dataclass(frozen=True)
class Means:
    """Asks for the means in these states, and for two observables beside each other in the last of them."""

    states: tuple[str, ...]
    first: str | None
    second: str | None

    def answer(self, outcome: Outcome, should_stop: Stop, _: Tell) -> MeansFound:
        """Return means and spreads of all the observables there are."""
        from specterm.analysis.named import expectations, named_observables  # noqa: PLC0415 - heavy

        model, spectrum, folder = outcome.model, outcome.spectrum, outcome.request.folder
        assert spectrum is not None
        names = named_observables(model)
        extra = tuple(name for name in (self.first, self.second) if name is not None and name not in names)
        names = (*names, *dict.fromkeys(extra))
        columns = []
        for state in self.states:
            if should_stop():
                raise WorkStopped("stopped")
            columns.append(expectations(model, spectrum, names, state, folder))
        return MeansFound(model, self.states, names, tuple(columns), self._pair(outcome, names))

    def _pair(self, outcome: Outcome, names: tuple[str, ...]) -> Any:  # noqa: ANN401 - a Pair or an error
        """Return the two observables beside each other; coordinate and momentum where none are chosen."""
        from specterm.analysis.uncertainty import pair_of  # noqa: PLC0415 - heavy

        first = self.first or names[0]
        assert outcome.spectrum is not None
        second = self.second or ("p" if first != "p" else names[0])
        try:
            return pair_of(outcome.model, outcome.spectrum, (first, second), self.states[-1], outcome.request.folder)
        except SpectermError as error:
            return error


@dataclass(frozen=True, eq=False)
class MeansFound:
    """Expectations, or the errors in their place, by state (columns) and name (rows); `pair` in the last state, or an error."""

    model: Any
    states: tuple[str, ...]
    names: tuple[str, ...]
    columns: tuple[tuple[Any, ...], ...]
    pair: Any


def _inquiry(look: Look, outcome: Outcome, _: Bench) -> Means | None:
    spectrum = outcome.spectrum
    if spectrum is None or not spectrum.levels:
        return None
    level = f"level({spectrum.levels[look.chosen].index})"
    states = (level,) if look.state in (None, level) else (level, look.state or "")
    return Means(states, look.choices.observable, look.choices.other)


def _rows(found: MeansFound, room: Room) -> Rows:
    """Return the table of means over the pair."""
    pair, reasons = _pair_rows(found, room), _reasons(found, room)
    height = room.height - len(pair) - len(reasons)
    headings, rows = _table(found)
    scroll, aside = room.look.choices.scroll, room.look.choices.aside
    table = table_rows(headings, rows, room.width, height, scroll=scroll, aside=aside, left=frozenset({0}), glyphs=room.glyphs)
    return padded([*table, *reasons, *pair], room.width, room.height)


def _reasons(found: MeansFound, room: Room) -> list[Row]:
    """Return why some means have no value or no error, in a few rows."""
    said: dict[str, None] = {}
    for column in found.columns:
        for name, one in zip(found.names, column, strict=True):
            words = [one.message] if isinstance(one, SpectermError) else one.notes
            said |= dict.fromkeys(f"{name}: {note}" for note in words)
    lines = [line for words in said for line in textwrap.wrap(words, max(10, room.width - 2))]
    return [fit_row(((" " + line, "dim"),), room.width) for line in lines[: max(0, room.height // 5)]]


def _table(found: MeansFound) -> tuple[list[str], list[list[str]]]:
    """Return headings and cells: name, then mean, spread and unit, for one state or for two."""
    from specterm.views.mean_table import mean_texts  # noqa: PLC0415 - it brings the engine

    headings = ["observable"]
    for state in found.states[: len(found.columns)]:
        headings += [f"mean in {state}", "spread"]
    rows = []
    for place, name in enumerate(found.names):
        cells, unit = [name], ""
        for column in found.columns:
            one = column[place]
            if isinstance(one, SpectermError):
                cells += ["-", "-"]
            else:
                mean, spread, unit = mean_texts(found.model, one)
                cells += [mean, spread]
        rows.append([*cells, unit])
    return [*headings, "unit"], rows


def _pair_rows(found: MeansFound, room: Room) -> list[Row]:
    """Return the two observables beside each other, wrapped, with notes; at most half of the page."""
    from specterm.views.mean_table import mean_line, pair_lines  # noqa: PLC0415 - it brings the engine

    if isinstance(found.pair, SpectermError):
        lines, style = [found.pair.message, found.pair.mend], "warn"
    else:
        means = [mean_line(found.model, found.pair.first), mean_line(found.model, found.pair.second)]
        lines, style = [*means, *pair_lines(found.model, found.pair), *found.pair.notes], "plain"
    rows: list[Row] = [(), fit_row(((f" two observables in {found.states[-1]}", "title"),), room.width)]
    for line in lines:
        rows += [fit_row(((" " + part, style),), room.width) for part in textwrap.wrap(line, max(10, room.width - 2))]
    return rows[: max(0, room.height // 2 + 1)]


def _record(found: MeansFound, _: Room) -> Record:
    from specterm.session.records.means import expectations_record  # noqa: PLC0415 - heavy

    return expectations_record(tuple(one for column in found.columns for one in column if not isinstance(one, SpectermError)))


MEANS = Page(
    "means", _inquiry, _rows, _record, "no level: nothing has a mean",
    keys=("page.observable", "page.second"),
)
