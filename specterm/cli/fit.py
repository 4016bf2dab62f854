"""The verb `fit`: numbers of a sheet that match observed lines."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from specterm.cli.answer import Answer, answered, expression_of, model_of
from specterm.cli.progress import Progress
from specterm.cli.source import Source, overrides
from specterm.errors import SheetError
from specterm.session.document import write_text

if TYPE_CHECKING:
    from specterm.analysis.fit_assign import Match
    from specterm.analysis.fitting import Fit
    from specterm.analysis.observed import Observed
    from specterm.model import Model

UNACCEPTED = "the lines above were matched to the nearest transitions: look them over and accept them with --assign"


def fit(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `fit`; without --assign, matches of lines without quantum numbers are only shown, with status 1."""
    from specterm.analysis.fit_levels import Solver  # noqa: PLC0415 - heavy
    from specterm.analysis.fitting import fit as fitted  # noqa: PLC0415
    from specterm.analysis.fitting import fitted_text, propose  # noqa: PLC0415
    from specterm.analysis.observed import read_observed  # noqa: PLC0415
    from specterm.session.records.fits import fit_record, matches_record  # noqa: PLC0415

    if arguments.save is not None and arguments.overrides:
        raise SheetError("--save writes the sheet as it stands: --set cannot go along", mend="edit the number in the sheet")
    model = model_of(arguments, source)
    observed = read_observed(model, Path(arguments.observed))
    vary = dict(pair for part in arguments.vary for pair in part)
    with Progress() as progress:
        solver = Solver(
            source.folder, overrides(arguments.overrides), arguments.count, arguments.near, arguments.tol, None, progress.tell
        )
        progress.tell("fitting")
        if not arguments.assign and not all(line.assigned for line in observed.lines):
            matches = propose(source.text, observed, vary, solver)
            return answered(arguments, matches_record(matches), lambda: _proposed(model, matches), 1, (UNACCEPTED,))
        found = fitted(source.text, observed, vary, solver)
    if arguments.save is not None:
        write_text(Path(arguments.save), fitted_text(source.text, found))
    status = 0 if found.converged else 1
    return answered(arguments, fit_record(found), lambda: _text(model, observed, found), status, found.notes)


def _proposed(model: Model, matches: list[Match]) -> str:
    from specterm.views.fit_table import match_table  # noqa: PLC0415 - only text needs the views

    return match_table(matches, model.units.energy)


def _text(model: Model, observed: Observed, found: Fit) -> str:
    """Return a fit as text."""
    from specterm.views.fit_table import fit_lines, parameter_table  # noqa: PLC0415 - only text needs the views
    from specterm.views.numbers import short  # noqa: PLC0415

    chi2 = f"chi-square {short(found.chi2, 4)} for {found.dof} degrees of freedom"
    quality = f"{chi2} ({short(found.reduced, 3)} each)" if found.dof else chi2
    weights = "" if observed.weighted else ", every line with weight 1"
    parts = [expression_of(model), parameter_table(found), f"{quality}{weights}", fit_lines(found, model.units.energy)]
    return "\n".join(parts)
