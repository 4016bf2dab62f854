"""The verb `transitions`: lines between levels of a sheet, or into those of another."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from specterm.cli.answer import Answer, enough, expression_of, glyphs_of, model_of, solved, status_of
from specterm.cli.output import to_csv, to_json
from specterm.cli.source import Source
from specterm.errors import SheetError
from specterm.model import Model

if TYPE_CHECKING:
    from specterm.analysis.lines import Line
    from specterm.analysis.transitions import Transitions
    from specterm.spectrum import Spectrum

_KEYS = (
    "energy", "energy_error", "dipole", "dipole_error", "strength", "strength_error", "wavelength", "frequency", "wavenumber",
    "einstein", "population",
)  # fmt: skip


def transitions(arguments: argparse.Namespace, source: Source) -> Answer:
    """Answer `transitions`."""
    model = model_of(arguments, source)
    if arguments.into is not None and arguments.temperature is not None:
        raise SheetError("--temperature and --into do not go together", mend="give --from for the level the lines start at")
    least = None if arguments.start in (None, "all") else int(arguments.start) + 1
    spectrum = enough(arguments, model, least)
    found = _into(arguments, source, model, spectrum) if arguments.into is not None else _within(arguments, model, spectrum)
    lines = [line for line in found.lines if arguments.least is None or line.intensity >= arguments.least]
    if arguments.json:
        text = to_json(_data(found, lines))
    elif arguments.csv:
        text = to_csv(("from", "to", *_flat_keys()), [(line.start, line.to, *_flat(line)) for line in lines])
    else:
        text = _text(arguments, model, found, lines)
    return Answer(text, status_of(spectrum), (*spectrum.notes, *found.notes))


def _starts(arguments: argparse.Namespace, spectrum: Spectrum) -> tuple[int, ...]:
    """Return the levels lines start from: the lowest unless asked otherwise, all of them at a temperature."""
    every = tuple(level.index for level in spectrum.levels)
    if arguments.start == "all" or (arguments.start is None and arguments.temperature is not None):
        return every
    return every[:1] if arguments.start is None else (int(arguments.start),)


def _within(arguments: argparse.Namespace, model: Model, spectrum: Spectrum) -> Transitions:
    from specterm.analysis.transitions import transitions as lines_of  # noqa: PLC0415 - heavy

    starts = _starts(arguments, spectrum)
    return lines_of(model, spectrum, starts, arguments.dipole, temperature=arguments.temperature)


def _into(arguments: argparse.Namespace, source: Source, model: Model, spectrum: Spectrum) -> Transitions:
    """Return the lines from levels of the sheet to those of another."""
    from specterm.analysis.prepared import other_sheet  # noqa: PLC0415 - heavy
    from specterm.analysis.transitions import into_other  # noqa: PLC0415

    found = solved(arguments, other_sheet(model, arguments.into, source.folder))
    return into_other(model, spectrum, found, _starts(arguments, spectrum), arguments.dipole)


def _data(found: Transitions, lines: list[Line]) -> dict[str, Any]:
    """Return lines as data; `sum_rule` is that of the only starting level, null where there are several."""
    sums = list(found.sums.values())
    return {
        "dipole": found.dipole,
        "transitions": [
            {"from": line.start, "to": line.to, **{key: getattr(line, key) for key in _KEYS}, "weight": abs(line.dipole) ** 2}
            for line in lines
        ],
        "sum_rule": sums[0] if len(sums) == 1 else None,
        "sum_rules": [{"from": start, "sum": total} for start, total in found.sums.items()],
        "notes": list(found.notes),
    }


def _flat_keys() -> tuple[str, ...]:
    return tuple(name for key in _KEYS for name in (("dipole_re", "dipole_im") if key == "dipole" else (key,)))


def _flat(line: Line) -> list[float | None]:
    cells: list[float | None] = []
    for key in _KEYS:
        value = getattr(line, key)
        cells += [value.real, value.imag] if key == "dipole" else [value]
    return cells


def _text(arguments: argparse.Namespace, model: Model, found: Transitions, lines: list[Line]) -> str:
    """Return lines as a table, the sums of strengths, and the spectrum drawn."""
    from specterm.views.cells import plain  # noqa: PLC0415 - only text needs the views
    from specterm.views.line_spectrum import Stick, line_spectrum  # noqa: PLC0415
    from specterm.views.line_table import line_table  # noqa: PLC0415
    from specterm.views.numbers import short  # noqa: PLC0415

    shown = [line for line in lines if line.start != line.to or arguments.into is not None]
    units = model.units
    parts = [f"dipole {found.dipole} on {expression_of(model)}", line_table(shown, units.energy, units.length)]
    for start, total in found.sums.items():
        if total is not None:
            parts.append(f"sum of the strengths from level {start}, over the levels found: {short(total, 10)}")
    absorbed = [line for line in shown if arguments.temperature is None or line.energy > 0]
    sticks = [Stick(line.energy, line.intensity, f"{line.start}-{line.to}") for line in absorbed]
    drawn = line_spectrum(
        sticks, arguments.width, arguments.height, broadening=arguments.broadening, shape=arguments.shape, unit=units.energy,
        glyphs=glyphs_of(arguments.glyphs),
    )  # fmt: skip
    return "\n".join([*parts, *([plain(drawn)] if drawn else [])])
