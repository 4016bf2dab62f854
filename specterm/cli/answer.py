"""What all verbs share: the answer they give, the model and the levels they start from, names and units."""

from __future__ import annotations

import argparse
import locale
import re
from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from specterm.cli.progress import Progress
from specterm.cli.source import Source, overrides
from specterm.language import parse
from specterm.model import Model, build

if TYPE_CHECKING:
    from specterm.session.records import Record
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


def enough(arguments: argparse.Namespace, model: Model, least: int | None) -> Spectrum:
    """Return the levels asked for, or the usual ones, and more where at least `least` are needed."""
    found = solved(arguments, model)
    if least is None or least < 1 or arguments.near is not None or len(found.levels) >= least:
        return found
    return solved(arguments, model, least)


def least_for(model: Model, state: str) -> int | None:
    """Return how many levels a state is made of at least: one above the highest it names, None where it names none."""
    written = re.fullmatch(r"\s*level\(\s*(\d{1,6})\s*\)\s*", state)
    named = model.states.get(state)
    own = [index for _, index, path in named.levels if path is None] if named is not None else []
    numbers = [*own, *([int(written[1])] if written else [])]
    return max(numbers) + 1 if numbers else None


def status_of(spectrum: Spectrum) -> int:
    """Return 1 where a level asked for is unresolved, or the count does not agree."""
    return int(any(level.kind == "unresolved" for level in spectrum.levels) or not spectrum.complete)


def expression_of(model: Model) -> str:
    """Return the operator as the sheet writes it."""
    from specterm.session.records.levels import expression_of as written  # noqa: PLC0415 - heavy

    return written(model)


def answered(
    arguments: argparse.Namespace, record: Record, text: Callable[[], str], status: int = 0, warnings: tuple[str, ...] = ()
) -> Answer:
    """Return a result the way it is asked for: JSON, CSV, or the text that `text` makes."""
    words = record.json() if arguments.json else record.csv() if arguments.csv else text()
    return Answer(words, status, warnings)


def glyphs_of(wanted: str | None) -> str:
    """Return what curves are made of: as asked, else braille where the locale writes UTF-8, else ascii."""
    if wanted:
        return wanted
    return "braille" if "utf" in locale.getpreferredencoding(do_setlocale=False).lower() else "ascii"
