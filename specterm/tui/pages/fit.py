"""The page of a fit: observed lines, the numbers varied, matches to approve, and the result."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from specterm.errors import SheetError
from specterm.session.records import Record
from specterm.tui.look import Look
from specterm.tui.pages.page import Bench, Page, Room, Stop, Tell
from specterm.tui.solving import Outcome
from specterm.views.cells import Row, Rows, fit_row
from specterm.views.columns import padded, text_rows
from specterm.views.numbers import short

if TYPE_CHECKING:
    from specterm.analysis.fit_assign import Match
    from specterm.analysis.fitting import Fit

Bounds = tuple[tuple[str, tuple[float, float]], ...]


@dataclass(frozen=True)
class Fitting:
    """Asks for the numbers of the sheet that match observed lines; `accepted` says that matches found are approved."""

    path: str
    vary: Bounds
    accepted: bool

    def answer(self, outcome: Outcome, should_stop: Stop, _: Tell) -> FitFound:
        """Return the fit, or the matches that want approval."""
        from specterm.analysis.fit_levels import Solver  # noqa: PLC0415 - heavy
        from specterm.analysis.fitting import fit, propose  # noqa: PLC0415
        from specterm.analysis.observed import read_observed  # noqa: PLC0415

        asked = outcome.request
        observed = read_observed(outcome.model, asked.folder / self.path)
        solver = Solver(asked.folder, asked.overrides, asked.count, asked.near, asked.tolerance, should_stop)
        vary = dict(self.vary)
        if not self.accepted and not all(line.assigned for line in observed.lines):
            return FitFound(None, tuple(propose(asked.text, observed, vary, solver)))
        return FitFound(fit(asked.text, observed, vary, solver), ())


@dataclass(frozen=True, eq=False)
class FitFound:
    """A fit, or the matches to approve before there is one."""

    fit: Fit | None
    matches: tuple[Match, ...]


def vary_from(text: str) -> Bounds:
    """Return names and bounds from `F, m=0.05:0.08`; raises SheetError."""
    found = []
    for part in text.replace(",", " ").split():
        name, _, span = part.partition("=")
        low, colon, high = span.partition(":")
        try:
            bounds = (float(low) if low else -float("inf"), float(high) if high else float("inf"))
        except ValueError:
            bounds = (1.0, 0.0)
        if not bounds[0] < bounds[1] or bool(span) != bool(colon):
            raise SheetError(f"cannot read {part!r}", mend="write NAME or NAME=low:high, separated by blanks")
        found.append((name, bounds))
    return tuple(found)


def _inquiry(look: Look, _: Outcome, __: Bench) -> Fitting | None:
    choices = look.choices
    return Fitting(choices.observed, choices.vary, choices.every) if choices.observed and choices.vary else None


def _rows(found: FitFound, room: Room) -> Rows:
    """Return parameters and lines with residuals, or the matches."""
    from specterm.views.fit_table import fit_lines, match_table, parameter_table  # noqa: PLC0415 - it brings the engine

    choices, energy = room.look.choices, room.units.energy
    names = ", ".join(name for name, _ in choices.vary)
    rows: list[Row] = [fit_row(((f" {Path(choices.observed or '').name}: {names} varied", "title"),), room.width)]
    if found.fit is None:
        words = " matched to the nearest transitions: z approves them and fits"
        rows += [fit_row(((words, "warn"),), room.width), *text_rows(match_table(found.matches, energy), room.width)]
        return padded(rows, room.width, room.height)
    fit = found.fit
    each = f" ({short(fit.reduced, 3)} each)" if fit.dof else ""
    quality = f"chi-square {short(fit.chi2, 4)} for {fit.dof} degrees of freedom{each}"
    first = room.look.choices.scroll
    rows += text_rows(parameter_table(fit), room.width)
    rows += [fit_row(((" " + words, style),), room.width) for words, style in [(quality, "plain"), *_notes(fit)]]
    rows += text_rows(fit_lines(fit, energy), room.width)[first:]
    return padded(rows, room.width, room.height)


def _notes(fit: Fit) -> list[tuple[str, str]]:
    return [(note, "warn") for note in fit.notes]


def _record(found: Any, _: Room) -> Record:  # noqa: ANN401 - a fit
    from specterm.session.records.fits import fit_record, matches_record  # noqa: PLC0415 - heavy

    return fit_record(found.fit) if found.fit is not None else matches_record(list(found.matches))


FIT = Page(
    "fit", _inquiry, _rows, _record, "no fit yet: F chooses the file of observed lines, d the numbers to vary",
    keys=(("page.into", "F file"), ("page.observable", "d vary"), ("page.every", "z approve"), ("tune.take", "T take")),
)
