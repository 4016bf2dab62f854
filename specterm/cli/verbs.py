"""The verbs: each takes the parsed arguments and returns the result as text, with an exit status."""

from __future__ import annotations

import argparse
import locale
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from specterm.cli.output import to_csv, to_json
from specterm.cli.progress import Progress
from specterm.cli.source import Source, overrides
from specterm.errors import PhysicsError, SheetError, SpectermError, position
from specterm.language import parse
from specterm.language.printing import format_expression
from specterm.model import Model, build
from specterm.session.presets import names

if TYPE_CHECKING:
    from specterm.spectrum import Spectrum


@dataclass(frozen=True)
class Answer:
    """What a verb has to say, and the exit status that goes with it."""

    text: str
    status: int = 0
    warnings: tuple[str, ...] = ()


def model_of(arguments: argparse.Namespace, source: Source) -> Model:
    """Return the sheet made ready."""
    return build(parse(source.text), folder=source.folder, overrides=overrides(arguments.overrides))


def solved(arguments: argparse.Namespace, model: Model, least: int | None = None) -> Spectrum:
    """Return the levels asked for, or at least `least`; progress goes to standard error when the work outlasts a second."""
    from specterm.spectrum import solve  # noqa: PLC0415 - `check` and `presets` do without it

    count = arguments.count
    if least is not None:
        count = max(least, count or least)
    with Progress() as progress:
        return solve(model, count=count, near=arguments.near, tolerance=arguments.tol, progress=progress.tell)


def _status(spectrum: Spectrum) -> int:
    """Return 1 where a level asked for is unresolved, or the count does not agree."""
    return int(any(level.kind == "unresolved" for level in spectrum.levels) or not spectrum.complete)


def expression_of(model: Model) -> str:
    """Return the operator as the sheet writes it."""
    for definition in model.sheet.definitions:
        if definition.name == model.main:
            return f"{model.main} = {format_expression(definition.expression)}"
    return model.main


def units_of(model: Model) -> dict[str, str]:
    """Return the names of the units, empty where the sheet is dimensionless."""
    units = model.units
    return {"energy": units.energy, "length": units.length, "mass": units.mass, "time": units.time}


def levels(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `levels`."""
    model = model_of(arguments, source)
    spectrum = solved(arguments, model)
    if arguments.json:
        text = to_json(levels_data(model, spectrum))
    elif arguments.csv:
        heading = ("index", "value", "error", "kind", "nodes", "parity", "width")
        text = to_csv(heading, [tuple(getattr(level, name) for name in heading) for level in spectrum.levels])
    else:
        text = levels_text(model, spectrum)
    return Answer(text, _status(spectrum), spectrum.notes)


def levels_data(model: Model, spectrum: Spectrum) -> dict[str, Any]:
    """Return a spectrum as data for JSON."""
    domain = model.domain
    names_ = ("index", "value", "error", "kind", "nodes", "parity", "width")
    return {
        "operator": expression_of(model),
        "units": units_of(model),
        "levels": [{name: getattr(level, name) for name in names_} for level in spectrum.levels],
        "bound": spectrum.bound,
        "threshold": spectrum.threshold,
        "complete": spectrum.complete,
        "domain": {
            "coordinate": domain.coordinate,
            "left": domain.left,
            "right": domain.right,
            "ends": [domain.left_end, domain.right_end],
            "phase": domain.phase,
            "computed": [spectrum.left, spectrum.right],
        },
        "basis": spectrum.basis,
        "unknowns": spectrum.unknowns,
        "tolerance": spectrum.tolerance,
        "from_top": spectrum.from_top,
        "seconds": spectrum.seconds,
        "notes": list(spectrum.notes),
    }


def levels_text(model: Model, spectrum: Spectrum) -> str:
    """Return a spectrum as aligned text: the operator, the table, and how far it can be trusted."""
    from specterm.views.cells import plain  # noqa: PLC0415 - only text needs the views
    from specterm.views.level_table import text_table  # noqa: PLC0415
    from specterm.views.of_model import units_of as names_of  # noqa: PLC0415
    from specterm.views.status import trust_line  # noqa: PLC0415

    units = names_of(model)
    table = [text_table(spectrum.levels, model.units.energy)] if spectrum.levels else []
    return "\n".join([expression_of(model), *table, plain([trust_line(spectrum, units, 1000)]).rstrip()])


def weights(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `weights`."""
    from specterm.analysis import project  # noqa: PLC0415 - heavy

    model = model_of(arguments, source)
    state = model.states.get(arguments.state)
    own = [index for _, index, path in state.levels if path is None] if state is not None else []
    spectrum = solved(arguments, model, max(own) + 1 if own else None)
    found = project(model, spectrum, arguments.state, source.folder)
    if arguments.json:
        text = to_json(
            {
                "state": found.state,
                "weights": [
                    {"index": w.index, "value": w.value, "weight": w.weight, "error": w.error, "amplitude": w.amplitude}
                    for w in found.weights
                ],
                "captured": found.captured,
                "mean": found.mean,
                "spread": found.spread,
                "notes": list(found.notes),
            }
        )
    elif arguments.csv:
        rows = [(w.index, w.value, w.weight, w.error, w.amplitude.real, w.amplitude.imag) for w in found.weights]
        text = to_csv(("index", "value", "weight", "error", "amplitude_re", "amplitude_im"), rows)
    else:
        text = _weights_text(model, spectrum, found)
    return Answer(text, _status(spectrum), (*spectrum.notes, *found.notes))


def _weights_text(model: Model, spectrum: Spectrum, found: Any) -> str:  # noqa: ANN401 - analysis.Weights, imported late
    """Return weights as the level table with a bar in each row."""
    from specterm.views.level_table import Weighing, text_table  # noqa: PLC0415 - only text needs the views
    from specterm.views.numbers import short, with_unit  # noqa: PLC0415

    weighing = Weighing(
        found.state, {w.index: w.weight for w in found.weights}, {w.index: w.error for w in found.weights}, found.captured
    )
    energy = model.units.energy
    mean, spread = with_unit(short(found.mean), energy), with_unit(short(found.spread), energy)
    lines = [
        f"{found.state} on {expression_of(model)}",
        text_table(spectrum.levels, energy, weighing, glyphs_of(None)),
        "   ".join([f"captured {found.captured:.10g}", f"mean {mean}", f"spread {spread}"]),
    ]
    return "\n".join(lines)


def figure(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `figure`."""
    model = model_of(arguments, source)
    wanted = arguments.levels
    spectrum = solved(arguments, model, max(wanted) + 1 if wanted else None)
    return Answer(figure_text(arguments, source, model, spectrum), _status(spectrum), spectrum.notes)


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


def glyphs_of(wanted: str | None) -> str:
    """Return what curves are made of: as asked, else braille where the locale writes UTF-8, else ascii."""
    if wanted:
        return wanted
    return "braille" if "utf" in locale.getpreferredencoding(do_setlocale=False).lower() else "ascii"


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
