"""What may stand on the command line."""

from __future__ import annotations

import argparse
import math
from typing import NoReturn

from specterm.errors import LONGEST, printable

VERBS = (
    "levels", "weights", "expectation", "transitions", "measure", "evolve", "sensitivities", "fit", "sweep", "figure", "check",
    "presets",
)  # fmt: skip
MOST = 1_000_000
WIDEST = 2_000
VIEWS = ("psi", "density", "levels", "momentum")
GLYPHS = ("braille", "block", "ascii")

_SHEET = "a sheet's file, a preset's name, or - for standard input"
_EPILOG = """\
specterm SHEET            opens the terminal interface (with no terminal: levels and figure as text)
specterm VERB --help      tells more of a verb
"""


class Parser(argparse.ArgumentParser):
    """A parser whose complaints cannot steer the terminal."""

    def error(self, message: str) -> NoReturn:
        """Say what is wrong with the command line, cleaned, and leave with status 2."""
        super().error(printable(message if len(message) <= LONGEST else message[: LONGEST - 3] + "..."))


def parser() -> argparse.ArgumentParser:
    """Return the parser of `specterm VERB ...`."""
    whole = Parser(
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
    weights.add_argument("--captured", type=_share, metavar="SHARE", help="as many levels as hold this share, such as 0.999")
    _expectation(verbs.add_parser("expectation", help="mean and spread of an observable"))
    _transitions(verbs.add_parser("transitions", help="lines between levels, with strengths"))
    _measure(verbs.add_parser("measure", help="a sequence of measurements on a prepared state"))
    _evolve(verbs.add_parser("evolve", help="survival probability and means at given times"))
    _fit(_with_sheet(verbs.add_parser("fit", help="the sheet's numbers that match observed lines"), solving=True))
    slopes = _with_sheet(verbs.add_parser("sensitivities", help="derivatives of levels by the sheet's numbers"), solving=True)
    slopes.add_argument("--parameter", dest="parameters", action="append", metavar="NAME", help="only this one (repeatable)")
    slopes.add_argument("--transitions", action="store_true", help="of the lines between the levels instead")
    _sweep(verbs.add_parser("sweep", help="levels against a parameter, smallest gaps; or a map over two"))
    figure = _with_sheet(verbs.add_parser("figure", help="potential, levels and eigenstates as a text figure"), solving=True)
    figure.add_argument("--levels", metavar="I,J", type=_indices, help="only these levels")
    figure.add_argument("--state", metavar="STATE", help="draw this prepared state too")
    figure.add_argument("--view", choices=VIEWS, default="psi", help="drawn at each level; or momentum, of one state")
    figure.add_argument("--width", type=_size(20, WIDEST), default=100, metavar="W", help="columns (100)")
    figure.add_argument("--height", type=_size(5, WIDEST), default=32, metavar="H", help="rows (32)")
    _with_glyphs(figure)
    _with_sheet(verbs.add_parser("check", help="well formed, Hermitian, bounded below?"), solving=False)
    presets = verbs.add_parser("presets", help="the sheets that come along, one a line")
    _with_output(presets)
    return whole


def _expectation(one: argparse.ArgumentParser) -> None:
    """Add what `expectation` takes."""
    _with_sheet(one, solving=True)
    one.add_argument("observable", metavar="OBSERVABLE", help="a name of the sheet or an expression, such as x or 'p^2'")
    one.add_argument("--level", type=_size(0), metavar="N", help="in this level (0)")
    one.add_argument("--state", metavar="STATE", help="in this prepared state")
    one.add_argument("--with", dest="other", metavar="OBSERVABLE", help="a second one: product of spreads, commutator")
    one.add_argument("--matrix", action="store_true", help="the matrix between the levels instead, with a map of it")
    _with_size(one, 100, 24)


def _transitions(one: argparse.ArgumentParser) -> None:
    """Add what `transitions` takes."""
    _with_sheet(one, solving=True)
    one.add_argument("--from", dest="start", type=_level_or_all, metavar="N", help="lines from this level (the lowest), or all")
    one.add_argument("--dipole", metavar="OBSERVABLE", help="the dipole (the coordinate)")
    one.add_argument("--into", metavar="FILE", help="lines into the levels of this other sheet (Franck-Condon factors)")
    one.add_argument("--least", type=_number, metavar="F", help="only lines at least this strong")
    one.add_argument("--temperature", type=_number, metavar="T", help="thermal populations, in K (in energy without units)")
    one.add_argument("--broadening", type=_positive, metavar="E", help="full width of a line in the figure")
    one.add_argument("--shape", choices=("lorentz", "gauss"), default="lorentz", help="of a line in the figure (lorentz)")
    _with_size(one, 100, 20)


def _measure(one: argparse.ArgumentParser) -> None:
    """Add what `measure` takes."""
    _with_sheet(one, solving=True)
    one.add_argument("state", metavar="STATE", help="a state of the sheet, or 'level(3)'")
    one.add_argument("observables", nargs="+", metavar="OBSERVABLE", help="measured one after the other")
    one.add_argument("--seed", type=_size(0), metavar="K", help="of the random draw; the same seed gives the same record")
    one.add_argument("--choose", metavar="V,W", help="outcomes taken instead of drawn, the nearest to each value; - draws")
    one.add_argument("--runs", type=_size(1), metavar="N", help="repeat the whole sequence and count")
    one.add_argument("--after", type=_number, default=0.0, metavar="T", help="free evolution between two measurements (0)")
    one.add_argument("--bins", type=_size(2), metavar="N", help="about so many bins for a continuous observable (24)")
    one.add_argument("--bin-width", dest="bin_width", type=_positive, metavar="W", help="or bins of this width")
    _with_glyphs(one)


def _evolve(one: argparse.ArgumentParser) -> None:
    """Add what `evolve` takes."""
    _with_sheet(one, solving=True)
    one.add_argument("state", metavar="STATE", help="a state of the sheet, or 'level(3)'")
    one.add_argument("--times", type=_times, required=True, metavar="A:B:COUNT", help="from A to B, or a list A,B,C")
    one.add_argument("--observable", metavar="OBSERVABLE", help="whose mean is followed (the coordinate)")
    one.add_argument("--density", action="store_true", help="|psi|^2 too; the last one is drawn")
    _with_size(one, 100, 16)


def _sweep(one: argparse.ArgumentParser) -> None:
    """Add what `sweep` takes."""
    _with_sheet(one, solving=True)
    one.add_argument(
        "ranges", nargs="+", metavar="NAME=A:B:COUNT",
        help="from A to B, both included, in the unit the sheet writes; log:A:B:COUNT or a list A,B,C; two of them make a map",
    )  # fmt: skip
    one.add_argument(
        "--quantity", default="levels", metavar="Q",
        help="levels (the default), transitions, expectation=OBSERVABLE, weights=STATE or strengths[=DIPOLE]",
    )  # fmt: skip
    one.add_argument("--from", dest="start", type=_size(0), metavar="N", help="transitions and strengths from this level (0)")
    one.add_argument("--level", type=_size(0), metavar="N", help="the level that is strong in the figure, or that is mapped")
    one.add_argument("--no-gaps", dest="gaps", action="store_false", help="look for no smallest gaps")
    one.add_argument("--journal", metavar="FILE", help="keep each point there as it is done, and go on from what it holds")
    one.add_argument("--workers", type=_size(1), metavar="N", help="this many processes")
    one.add_argument("--cluster", metavar="ADDRESS", help="the workers of this Dask scheduler, or of the file it wrote")
    _with_size(one, 100, 24)


def _fit(one: argparse.ArgumentParser) -> None:
    """Add what `fit` takes beside a sheet."""
    one.add_argument("observed", metavar="OBSERVED", help="a CSV file: from,to,value,uncertainty or level,value,uncertainty")
    one.add_argument(
        "--vary", type=_varied, action="append", required=True, metavar="A,B=LO:HI", help="the numbers to fit, with bounds"
    )
    one.add_argument("--assign", action="store_true", help="accept the nearest transitions for lines without level numbers")
    one.add_argument("--save", metavar="FILE", help="write the sheet with the fitted numbers")


def _varied(text: str) -> list[tuple[str, tuple[float, float]]]:
    """Return the names in `A,B=LO:HI` with their bounds."""
    return [_one(part) for part in text.split(",")]


def _one(part: str) -> tuple[str, tuple[float, float]]:
    name, sign, bounds = part.partition("=")
    low, colon, high = bounds.partition(":")
    if not name.strip() or (sign and not colon):
        raise argparse.ArgumentTypeError(f"{part!r}: expected NAME or NAME=LO:HI")
    try:
        return name.strip(), (float(low) if low.strip() else float("-inf"), float(high) if high.strip() else float("inf"))
    except ValueError:
        raise argparse.ArgumentTypeError(f"{part!r}: bounds are numbers, as in NAME=0:10") from None


def interface_parser() -> argparse.ArgumentParser:
    """Return the parser of `specterm [SHEET] ...`, which opens the terminal interface."""
    one = Parser(prog="specterm", add_help=False)
    _with_sheet(one, solving=True, data=False)
    _with_glyphs(one)
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


def _with_glyphs(one: argparse.ArgumentParser) -> None:
    one.add_argument("--glyphs", choices=GLYPHS, help="what the curves are made of (by the locale)")


def _with_size(one: argparse.ArgumentParser, width: int, height: int) -> None:
    """Add the size of the figure under the table."""
    one.add_argument("--width", type=_size(20, WIDEST), default=width, metavar="W", help=f"columns of the figure ({width})")
    one.add_argument("--height", type=_size(5, WIDEST), default=height, metavar="H", help=f"rows of the figure ({height})")
    _with_glyphs(one)


def _with_output(one: argparse.ArgumentParser, *, data: bool = True) -> None:
    """Add where and how the result is written."""
    if data:
        form = one.add_mutually_exclusive_group()
        form.add_argument("--json", action="store_true", help="as JSON")
        form.add_argument("--csv", action="store_true", help="as comma-separated values")
    one.add_argument("-o", dest="output", metavar="FILE", help="write the result there")


def _size(least: int, most: int = MOST):  # type: ignore[no-untyped-def]  # noqa: ANN202 - a converter for argparse
    """Return a converter to whole numbers from `least` to `most`."""

    def whole(text: str) -> int:
        value = int(text)
        if value < least or value > most:
            raise argparse.ArgumentTypeError(f"{text} is not a number from {least} to {most}")
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


def _share(text: str) -> float:
    value = float(text)
    if not 0 < value <= 1:
        raise argparse.ArgumentTypeError(f"{text} is not above 0 and up to 1")
    return value


def _positive(text: str) -> float:
    value = _number(text)
    if value <= 0:
        raise argparse.ArgumentTypeError(f"{text} is not above 0")
    return value


def _level_or_all(text: str) -> str:
    if text != "all" and not (text.isascii() and text.isdigit() and int(text) < MOST):
        raise argparse.ArgumentTypeError(f"{text} is neither the number of a level nor `all`")
    return text


def _times(text: str) -> tuple[float, ...]:
    """Return the numbers of `a:b:count` (both ends included) or of a comma list."""
    parts = text.split(":")
    if len(parts) == 1:
        return tuple(_number(part) for part in text.split(","))
    if len(parts) != 3:
        raise argparse.ArgumentTypeError(f"{text} is neither A:B:COUNT nor a comma list")
    first, last, count = _number(parts[0]), _number(parts[1]), _size(1)(parts[2])
    if count == 1:
        return (first,)
    return tuple(first * ((count - 1 - k) / (count - 1)) + last * (k / (count - 1)) for k in range(count))
