"""What may stand on the command line."""

from __future__ import annotations

import argparse
import math

VERBS = ("levels", "weights", "figure", "check", "presets")
LATER = ("expectation", "transitions", "sensitivities", "sweep", "measure", "evolve", "fit")
GLYPHS = ("braille", "block", "ascii")

_SHEET = "a sheet's file, a preset's name, or - for standard input"
_EPILOG = """\
specterm SHEET            opens the terminal interface (with no terminal: levels and figure as text)
specterm VERB --help      tells more of a verb
"""


def parser() -> argparse.ArgumentParser:
    """Return the parser of `specterm VERB ...`."""
    whole = argparse.ArgumentParser(
        prog="specterm",
        description="Levels of an operator, with the digits that can be trusted.",
        epilog=_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    whole.add_argument("--version", action="store_true", help="print the version and leave")
    verbs = whole.add_subparsers(dest="verb", metavar="VERB")
    _with_sheet(verbs.add_parser("levels", help="the levels, with error and kind"), solving=True)
    weights = _with_sheet(verbs.add_parser("weights", help="projection weights of a prepared state"), solving=True)
    weights.add_argument("state", metavar="STATE", help="a state of the sheet, or 'level(3)'")
    figure = _with_sheet(
        verbs.add_parser("figure", help="potential, levels and eigenstates as a text figure"), solving=True, data=False
    )
    figure.add_argument("--levels", metavar="I,J", type=_indices, help="only these levels")
    figure.add_argument("--state", metavar="STATE", help="draw this prepared state too")
    figure.add_argument("--view", choices=("psi", "density", "levels"), default="psi", help="what is drawn at each level")
    figure.add_argument("--width", type=_size(20), default=100, metavar="W", help="columns (100)")
    figure.add_argument("--height", type=_size(5), default=32, metavar="H", help="rows (32)")
    figure.add_argument("--glyphs", choices=GLYPHS, help="what the curves are made of (by the locale)")
    _with_sheet(verbs.add_parser("check", help="well formed, Hermitian, bounded below?"), solving=False)
    presets = verbs.add_parser("presets", help="the sheets that come along, one a line")
    _with_output(presets)
    return whole


def interface_parser() -> argparse.ArgumentParser:
    """Return the parser of `specterm [SHEET] ...`, which opens the terminal interface."""
    one = argparse.ArgumentParser(prog="specterm", add_help=False)
    _with_sheet(one, solving=True, data=False)
    one.add_argument("--glyphs", choices=GLYPHS, help="what the curves are made of (by the locale)")
    one.add_argument("--mouse", action="store_true", help="let the mouse in (text can then not be selected)")
    return one


def _with_sheet(one: argparse.ArgumentParser, *, solving: bool, data: bool = True) -> argparse.ArgumentParser:
    """Add what every verb on a sheet takes."""
    one.add_argument("sheet", nargs="?", metavar="SHEET", help=_SHEET)
    one.add_argument("-e", dest="text", metavar="TEXT", help="the sheet itself, statements separated by ;")
    one.add_argument("--set", dest="overrides", metavar="NAME=VALUE", action="append", default=[], help="replace a definition")
    if solving:
        one.add_argument("-n", dest="count", type=_size(1), metavar="COUNT", help="how many levels")
        one.add_argument("--near", type=_number, metavar="E", help="the levels nearest to this energy")
        one.add_argument(
            "--tol", type=_tolerance, default=1e-8, metavar="T", help="error wanted, as a share of the level (1e-8)"
        )
    _with_output(one, data=data)
    return one


def _with_output(one: argparse.ArgumentParser, *, data: bool = True) -> None:
    """Add where and how the result is written."""
    if data:
        form = one.add_mutually_exclusive_group()
        form.add_argument("--json", action="store_true", help="as JSON")
        form.add_argument("--csv", action="store_true", help="as comma-separated values")
    one.add_argument("-o", dest="output", metavar="FILE", help="write the result there")


def _size(least: int):  # type: ignore[no-untyped-def]  # noqa: ANN202 - a converter for argparse
    """Return a converter to whole numbers of at least `least`."""

    def whole(text: str) -> int:
        value = int(text)
        if value < least or value > 1_000_000:
            raise argparse.ArgumentTypeError(f"{text} is not a number from {least} to 1000000")
        return value

    whole.__name__ = "whole number"
    return whole


def _number(text: str) -> float:
    value = float(text)
    if not math.isfinite(value):
        raise argparse.ArgumentTypeError(f"{text} is not a finite number")
    return value


def _tolerance(text: str) -> float:
    value = float(text)
    if not 0 < value < 1:
        raise argparse.ArgumentTypeError(f"{text} is not between 0 and 1")
    return value


def _indices(text: str) -> tuple[int, ...]:
    return tuple(int(part) for part in text.split(","))
