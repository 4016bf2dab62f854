"""From the words on the command line to an exit status."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

from specterm.cli.arguments import VERBS, interface_parser, parser
from specterm.cli.source import Source, overrides, read_source
from specterm.errors import SpectermError, describe, printable

if TYPE_CHECKING:
    from specterm.cli.answer import Answer


def main(words: Sequence[str]) -> int:  # noqa: PLR0911 - one return for each way out
    """Run one command; 0 done, 1 the physics says no, 2 bad input. Errors are told on standard error, never as a traceback."""
    source: Source | None = None
    try:
        whole = words and (words[0] in VERBS or words[0] in ("-h", "--help", "--version"))
        if whole:
            arguments = parser().parse_args(words)
            if arguments.version:
                return _version()
            if arguments.verb == "presets":
                return _presets(arguments)
            source = read_source(*_sheet_of(arguments))
            return _run(arguments, source)
        arguments = interface_parser().parse_args(words)
        source = read_source(arguments.sheet, arguments.text) if arguments.sheet or arguments.text else None
        return _interface(arguments, source)
    except SpectermError as error:
        return _tell(describe(error, source.text if source else "", source.name if source else "specterm"), error.exit_status)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except KeyboardInterrupt:
        return _tell("specterm: stopped", 130)
    except MemoryError:
        return _tell("specterm: out of memory\n  ask for fewer levels", 1)
    except Exception as error:  # the edge of the program: a defect must not show a traceback
        return _tell(
            printable(f"specterm failed here ({type(error).__name__}: {error})\n  this is a defect: please report it"), 1
        )


def _sheet_of(arguments: argparse.Namespace) -> tuple[str | None, str | None]:
    """Return sheet and text; with -e the word that stands where the sheet would is the verb's own first argument."""
    if arguments.text is not None and arguments.sheet is not None and arguments.verb == "measure":
        arguments.observables = [arguments.state, *arguments.observables]
        arguments.state, arguments.sheet = arguments.sheet, None
    if arguments.text is not None and arguments.sheet is not None and arguments.verb == "sweep":
        arguments.ranges, arguments.sheet = [arguments.sheet, *arguments.ranges], None
    return arguments.sheet, arguments.text


def _tell(words: str, status: int = 2) -> int:
    """Say something on standard error."""
    sys.stderr.write(words + "\n")
    return status


def _version() -> int:
    from importlib.metadata import PackageNotFoundError, version  # noqa: PLC0415 - only asked for here

    try:
        sys.stdout.write(f"specterm {version('specterm')}\n")
    except PackageNotFoundError:
        sys.stdout.write("specterm, from a working copy\n")
    return 0


def _presets(arguments: argparse.Namespace) -> int:
    from specterm.cli.output import deliver  # noqa: PLC0415 - not needed to open the interface
    from specterm.cli.verbs import list_presets  # noqa: PLC0415

    deliver(list_presets(arguments).text, arguments.output)
    return 0


def _run(arguments: argparse.Namespace, source: Source) -> int:
    """Run a verb on a sheet."""
    from specterm.cli.output import deliver  # noqa: PLC0415

    answer = _verb(arguments.verb)(arguments, source)
    deliver(answer.text, arguments.output)
    for warning in dict.fromkeys(answer.warnings):
        _tell(f"note: {warning}")
    return int(answer.status)


def _verb(name: str) -> Callable[[argparse.Namespace, Source], Answer]:
    """Return the function of a verb; each is imported when it is run."""
    if name == "weights":
        from specterm.cli.weights import weights as found  # noqa: PLC0415
    elif name == "expectation":
        from specterm.cli.expectation import expectation as found  # noqa: PLC0415
    elif name == "transitions":
        from specterm.cli.transitions import transitions as found  # noqa: PLC0415
    elif name == "measure":
        from specterm.cli.measure import measure as found  # noqa: PLC0415
    elif name == "evolve":
        from specterm.cli.evolve import evolve as found  # noqa: PLC0415
    elif name == "sweep":
        from specterm.cli.sweep import sweep as found  # noqa: PLC0415
    elif name == "fit":
        from specterm.cli.fit import fit as found  # noqa: PLC0415
    elif name == "sensitivities":
        from specterm.cli.sensitivities import sensitivities as found  # noqa: PLC0415
    else:
        from specterm.cli import verbs  # noqa: PLC0415

        found = getattr(verbs, name)
    return found


def _interface(arguments: argparse.Namespace, source: Source | None) -> int:
    """Open the terminal interface, or print levels and figure where there is no terminal."""
    from specterm.tui.terminal import usable  # noqa: PLC0415 - light, but not needed by the verbs

    if usable() and arguments.output is None:
        from specterm.tui import run  # noqa: PLC0415 - heavy
        from specterm.tui.options import Options  # noqa: PLC0415

        chosen = Options(
            glyphs=arguments.glyphs,
            count=arguments.count,
            near=arguments.near,
            tolerance=arguments.tol,
            overrides=overrides(arguments.overrides),
            folder=source.folder if source else None,
            mouse=arguments.mouse,
        )
        return run(source.text if source else "", source.path if source else None, chosen)
    if source is None:
        return _tell(parser().format_help())
    return _as_text(arguments, source)


def _as_text(arguments: argparse.Namespace, source: Source) -> int:
    """Print levels and figure, and say why there is no screen."""
    from specterm.cli import answer, verbs  # noqa: PLC0415 - heavy
    from specterm.cli.output import deliver  # noqa: PLC0415

    model = answer.model_of(arguments, source)
    spectrum = answer.solved(arguments, model)
    options = argparse.Namespace(levels=None, state=None, width=_columns(), height=32, view="psi", glyphs=arguments.glyphs)
    parts = [verbs.levels_text(model, spectrum), "", verbs.figure_text(options, source, model, spectrum)]
    deliver("\n".join(parts), arguments.output)
    for warning in dict.fromkeys(spectrum.notes):
        _tell(f"note: {warning}")
    if arguments.output is None:
        term = os.environ.get("TERM", "")
        why = f"TERM={printable(term)[:40]} draws no screen" if sys.stdout.isatty() else "no terminal to draw on"
        _tell(f"note: {why}: levels and figure as text")
    return 0


def _columns() -> int:
    """Return how wide a figure may be: as the terminal, at most 100 columns."""
    try:
        return max(40, min(100, os.get_terminal_size(1).columns - 1))
    except (OSError, ValueError):
        return 100
