"""Two lines under the screen: what the chosen state is, and how far it can be trusted."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import ROUND_CEILING, Context, Decimal
from math import isfinite

from specterm.spectrum.result import Level, Spectrum
from specterm.views.cells import Row, cut, width_of
from specterm.views.level_table import value_text
from specterm.views.numbers import duration, short, with_unit


@dataclass(frozen=True)
class Units:
    """The names of the units, "" when dimensionless, and the coordinate's name."""

    energy: str = ""
    length: str = ""
    momentum: str = ""
    coordinate: str = "x"


@dataclass(frozen=True)
class MomentsText:
    """Expectations and spreads of place and momentum in a state; NaN where one is not known."""

    x: float
    spread_x: float
    p: float
    spread_p: float


def state_line(
    level: Level | None, units: Units, width: int, *, moments: MomentsText | None = None, more: Sequence[str] = (),
    mark: str = "…",
) -> Row:  # fmt: skip
    """Return the line for the chosen state, with `more` to be said of it; parts at the end that do not fit leave a mark."""
    if level is None:
        return ((cut("no level", width, mark), "warn"),)
    parts = [*state_parts(level, units), *more]
    if moments is not None:
        parts += moment_parts(moments, units)
    line = join(parts, width, mark)
    head = "  ".join(parts[:2])
    if line.startswith(head) and len(line) > len(head):
        return ((head, "chosen"), (line[len(head) :], "plain"))
    return ((line, "chosen"),)


def state_parts(level: Level, units: Units) -> tuple[str, ...]:
    """Return number, value with error, kind, nodes and parity of a level."""
    parts = [f"level {level.index}", with_unit(value_text(level), units.energy), level.kind]
    if level.nodes is not None:
        parts.append(f"{level.nodes} node{'' if level.nodes == 1 else 's'}")
    if level.parity:
        parts.append(level.parity)
    return tuple(parts)


def moment_parts(moments: MomentsText, units: Units) -> tuple[str, ...]:
    """Return expectation and spread of place and momentum, each pair sharing its unit."""
    places = f"<{units.coordinate}> {_amount(moments.x, moments.spread_x)} spread {short(moments.spread_x, 4)}"
    momenta = f"<p> {_amount(moments.p, moments.spread_p)} spread {short(moments.spread_p, 4)}"
    return with_unit(places, units.length), with_unit(momenta, units.momentum)


def _amount(value: float, spread: float) -> str:
    """Return an expectation; one that is nothing beside its spread is shown as 0."""
    return "0" if abs(value) < 1e-9 * abs(spread) else short(value, 5)


def join(parts: Sequence[str], width: int, mark: str = "…", gap: str = "  ") -> str:
    """Return the parts in a line of at most `width` columns; whole parts are left out at the end, a mark in their place."""
    line = gap.join(parts)
    kept = list(parts)
    while width_of(line) > width and len(kept) > 1:
        kept.pop()
        line = gap.join(kept) + gap[:1] + mark
    return cut(line, width, mark)


def trust_line(spectrum: Spectrum | None, units: Units, width: int, *, mark: str = "…") -> Row:
    """Return the line of trust: largest error, levels found and bound, whether any is missing, domain, basis, time."""
    if spectrum is None:
        return ((cut("no spectrum yet", width, mark), "dim"),)
    good = spectrum.complete and all(level.kind != "unresolved" for level in spectrum.levels)
    parts = trust_parts(spectrum, units)
    if width_of("  ".join(parts)) > width:
        parts = trust_parts(spectrum, units, brief=True)
    return ((join(parts, width, mark), "good" if good else "warn"),)


def trust_parts(spectrum: Spectrum, units: Units, *, brief: bool = False) -> list[str]:
    """Return the parts of the line of trust; `brief` leaves out what the axes and the table say too, and the basis."""
    found, reached = _found(spectrum), _reached(spectrum, units)
    domain = f"{units.coordinate} {short(spectrum.left, 4)}..{short(spectrum.right, 4)}"
    parts = [reached, found, domain if brief else with_unit(domain, units.length)]
    parts += [f"{spectrum.unknowns} unknowns", duration(spectrum.seconds), "" if brief else spectrum.basis]
    return [part for part in parts if part]


def _reached(spectrum: Spectrum, units: Units) -> str:
    """Return the largest error of the levels that have one."""
    errors = [level.error for level in spectrum.levels if level.error is not None]
    if not errors:
        return "no error known" if spectrum.levels else ""
    return f"error <= {with_unit(_up(max(errors)), units.energy)}"


def _up(error: float) -> str:
    """Return an error to one digit, rounded up: a bound must not shrink on its way to the screen."""
    if not isfinite(error) or not error:
        return short(error, 1)
    return short(float(Decimal(repr(float(error))).normalize(Context(prec=1, rounding=ROUND_CEILING))), 1)


def _found(spectrum: Spectrum) -> str:
    """Return how many levels there are, how many are bound, and whether one may be missing."""
    count = len(spectrum.levels)
    words = f"{count} level{'' if count == 1 else 's'}"
    if spectrum.bound is not None:
        words += f", {spectrum.bound} bound"
    unresolved = sum(level.kind == "unresolved" for level in spectrum.levels)
    if unresolved:
        words += f", {unresolved} UNRESOLVED"
    return words + (", complete" if spectrum.complete else ", MAY BE INCOMPLETE")
