"""The page of matrix elements: a map and a table of one observable between the levels."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from specterm.session.records import Record
from specterm.tui.look import Look
from specterm.tui.pages.page import Bench, Page, Room, Stop, Tell
from specterm.tui.solving import Outcome
from specterm.views.cells import Row, Rows, fit_row
from specterm.views.columns import padded, table_rows

if TYPE_CHECKING:
    from specterm.analysis.matrix_elements import MatrixElements


MOST_ROWS = 40


@dataclass(frozen=True)
class Matrix:
    """Asks for the matrix of an observable between the levels."""

    observable: str

    def answer(self, outcome: Outcome, _: Stop, __: Tell) -> MatrixElements:
        """Return the matrix with its errors."""
        from specterm.analysis.matrix_elements import matrix_elements  # noqa: PLC0415 - heavy

        assert outcome.spectrum is not None
        return matrix_elements(outcome.model, outcome.spectrum, self.observable)


def _inquiry(look: Look, outcome: Outcome, _: Bench) -> Matrix | None:
    if outcome.spectrum is None or not outcome.spectrum.levels:
        return None
    return Matrix(look.choices.observable or outcome.model.domain.coordinate)


def _rows(found: MatrixElements, room: Room) -> Rows:
    """Return the map over as much of the table as fits."""
    from specterm.views.element_table import element_columns  # noqa: PLC0415 - it brings the engine
    from specterm.views.heat_map import heat_map  # noqa: PLC0415

    first = max(0, min(room.look.choices.scroll, len(found.rows) - 1))
    unit = f" ({found.unit})" if found.unit else ""
    scale = ", logarithmic" if room.look.choices.logarithmic else ""
    rows: list[Row] = [fit_row(((f" |<a|{found.observable}|b>|{unit}{scale}", "title"),), room.width)]
    down = max(1, room.height - 3)
    drawn = heat_map(
        abs(found.values[first:, first:][:down]), found.rows[first:][:down], found.columns[first:], room.width - 1,
        glyphs=room.glyphs, logarithmic=room.look.choices.logarithmic,
    )  # fmt: skip
    rows += [fit_row(((" ", "plain"), *row), room.width) for row in drawn]
    if room.height - len(rows) > 4:
        some = slice(first, first + MOST_ROWS)
        headings, cells = element_columns(found.values[some], found.errors[some], found.rows[some], found.columns)
        height = room.height - len(rows) - 1
        table = table_rows(headings, cells, room.width, height, aside=room.look.choices.aside, glyphs=room.glyphs)
        rows += [fit_row((), room.width), *table]
    return padded(rows, room.width, room.height)


def _record(found: MatrixElements, _: Room) -> Record:
    from specterm.session.records.means import matrix_record  # noqa: PLC0415 - heavy

    return matrix_record(found)


MATRIX = Page(
    "matrix", _inquiry, _rows, _record, "no level: there is no matrix", keys=("page.observable", "page.amount"),
)
