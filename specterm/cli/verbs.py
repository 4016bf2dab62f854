"""The verbs: each takes the parsed arguments and returns the result as text, with an exit status."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from specterm.cli.answer import Answer, answered, expression_of, glyphs_of, model_of, solved, status_of
from specterm.cli.source import Source
from specterm.errors import PhysicsError, SheetError, SpectermError, position
from specterm.model import Model
from specterm.session.presets import names
from specterm.session.records.writing import to_csv, to_json

if TYPE_CHECKING:
    from specterm.spectrum import Spectrum


def levels(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `levels`."""
    from specterm.session.records.levels import levels_record  # noqa: PLC0415 - heavy

    model = model_of(arguments, source)
    spectrum = solved(arguments, model)
    return answered(
        arguments, levels_record(model, spectrum), lambda: levels_text(model, spectrum), status_of(spectrum), spectrum.notes
    )


def levels_text(model: Model, spectrum: Spectrum) -> str:
    """Return a spectrum as aligned text: the operator, the table, and how far it can be trusted."""
    from specterm.views.cells import plain  # noqa: PLC0415 - only text needs the views
    from specterm.views.level_table import text_table  # noqa: PLC0415
    from specterm.views.of_model import units_of as names_of  # noqa: PLC0415
    from specterm.views.status import trust_line  # noqa: PLC0415

    units = names_of(model)
    table = [text_table(spectrum.levels, model.units.energy)] if spectrum.levels else []
    return "\n".join([expression_of(model), *table, plain([trust_line(spectrum, units, 1000)]).rstrip()])


def figure(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `figure`."""
    if arguments.view == "momentum":
        from specterm.cli.momentum import momentum  # noqa: PLC0415 - only for this view

        return momentum(arguments, source)
    if arguments.json or arguments.csv:
        raise SheetError("only --view momentum has data", mend="ask for `levels --json`, or for --view momentum")
    model = model_of(arguments, source)
    wanted = arguments.levels
    spectrum = solved(arguments, model, max(wanted) + 1 if wanted else None)
    return Answer(figure_text(arguments, source, model, spectrum), status_of(spectrum), spectrum.notes)


def figure_text(arguments: argparse.Namespace, source: Source, model: Model, spectrum: Spectrum) -> str:
    """Return the figure of a spectrum as plain text."""
    from specterm.analysis import project  # noqa: PLC0415 - heavy
    from specterm.views.of_model import figure_text as drawn  # noqa: PLC0415

    only, known = arguments.levels, {level.index for level in spectrum.levels}
    if only and not set(only) <= known:
        raise SheetError(f"--levels names levels that were not found: there are {len(known)}", mend="ask for more with -n")
    weights = project(model, spectrum, arguments.state, source.folder) if arguments.state else None
    return drawn(
        model, spectrum, arguments.width, arguments.height,
        only=only, weights=weights, mode=arguments.view, glyphs=glyphs_of(arguments.glyphs),
    )  # fmt: skip


def check(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `check`: whether the sheet is well formed, the operator Hermitian, bounded below, with levels of its own."""
    problems: list[dict[str, Any]] = []
    status, model = 0, None
    try:
        model = model_of(arguments, source)
        _check_physics(model)
    except SpectermError as error:
        line, column = position(source.text, error.span.start) if error.span else (None, None)
        problems.append({"line": line, "column": column, "message": error.message, "mend": error.mend})
        status = error.exit_status
    warnings = list(model.warnings) if model else []
    if arguments.json:
        text = to_json({"ok": not problems, "problems": problems, "warnings": warnings})
    elif arguments.csv:
        text = to_csv(("line", "column", "message", "mend"), [tuple(p.values()) for p in problems])
    else:
        lines = [_problem(source, problem) for problem in problems] or [f"{source.name}: ok"]
        text = "\n".join([*lines, *(f"  {warning}" for warning in warnings)])
    return Answer(text, status)


def _problem(source: Source, problem: dict[str, Any]) -> str:
    place = f":{problem['line']}:{problem['column']}" if problem["line"] else ""
    return f"{source.name}{place}: {problem['message']}" + (f"\n  {problem['mend']}" if problem["mend"] else "")


def _check_physics(model: Model) -> None:
    """Raise PhysicsError where the operator has no levels to speak of; a single level is tried."""
    from specterm.spectrum import solve  # noqa: PLC0415 - heavy

    fault = model.operator.hermitian()
    if fault is not None:
        raise PhysicsError(fault.reason, mend=fault.mend)
    near = 0.0 if model.operator.order < 2 and model.domain.is_ring else None
    solve(model, count=1, near=near, tolerance=1e-3)


def list_presets(arguments: argparse.Namespace) -> Answer:
    """Answer `presets`."""
    known = names()
    if arguments.json:
        return Answer(to_json({"presets": [{"name": name, "title": title} for name, title in known]}))
    if arguments.csv:
        return Answer(to_csv(("name", "title"), known))
    width = max((len(name) for name, _ in known), default=0)
    return Answer("\n".join(f"{name:<{width}}  {title}" for name, title in known))
