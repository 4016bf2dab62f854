"""Observed lines and levels from a table file: header by name, read safely and bounded, units and settings worked in."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

from specterm.errors import SheetError, Span, printable
from specterm.language.suggest import nearest
from specterm.model import Model
from specterm.model.tablefile import TableText, read_table
from specterm.units import ENERGY

MOST_LINES = 10_000
MOST_LEVEL = 100_000
_COLUMNS = ("from", "to", "level", "value", "uncertainty", "unit")
_NUMBER = re.compile(r"[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d+)?", re.ASCII)
_NOWHERE = Span(0, 0)

Settings = tuple[tuple[str, float], ...]
"""Plain numbers of the sheet that a line sets, by name in alphabetical order."""


@dataclass(frozen=True)
class End:
    """One level of a line: its number, None where it is not assigned, and what numbers of the sheet hold for it."""

    level: int | None
    settings: Settings = ()

    @property
    def label(self) -> str:
        """The level as text: `1 (J=2)`, `?` where it is not assigned."""
        shown = ", ".join(f"{name}={value:g}" for name, value in self.settings)
        return ("?" if self.level is None else str(self.level)) + (f" ({shown})" if shown else "")


@dataclass(frozen=True)
class Observation:
    """One observed number, in the sheet's unit of energy: E(upper) - E(lower), or E(upper) where there is no `lower`.

    `row` is the line in the file; `uncertainty` is None where the file gives none.
    """

    row: int
    lower: End | None
    upper: End
    value: float
    uncertainty: float | None

    @property
    def assigned(self) -> bool:
        """Say whether both levels have their numbers."""
        return self.upper.level is not None and (self.lower is None or self.lower.level is not None)


@dataclass(frozen=True)
class Observed:
    """The lines of a file; `weighted` says that they have uncertainties (all of them or none)."""

    lines: tuple[Observation, ...]
    weighted: bool
    set_names: tuple[str, ...] = field(default=())


def read_observed(model: Model, path: Path) -> Observed:
    """Return the lines in a file: columns `from, to, value` or `level, value`, and perhaps `uncertainty` and `unit`.

    With neither `from, to` nor `level` the values are those of transitions to be assigned. Further columns are plain numbers of
    the sheet: `J` sets J for both levels of a line, `from.J` and `to.J` for one of them; an empty cell leaves the sheet's own.
    Empty level numbers are to be assigned. Values are in the sheet's unit of energy unless the column `unit` says otherwise.
    Raises SheetError for a file or cell that cannot be used.
    """
    try:
        return _read(model, path)
    except SheetError as error:
        error.names_file, error.span = True, None
        raise


def _read(model: Model, path: Path) -> Observed:
    shown = printable(path.name)
    table = read_table(path.parent, path.name, _NOWHERE)
    _check_columns(model, table, shown)
    if not table.rows:
        raise SheetError(f"{shown} holds no lines", mend="give at least as many as there are parameters to vary")
    if len(table.rows) > MOST_LINES:
        raise SheetError(f"{shown} holds {len(table.rows)} lines; the limit is {MOST_LINES}", mend="fit a part of them")
    lines = tuple(_line(model, table, dict(zip(table.names, row, strict=False)), k) for k, row in enumerate(table.rows))
    given = [line.uncertainty is not None for line in lines]
    if any(given) and not all(given):
        raise SheetError(
            f"{shown}, line {lines[given.index(False)].row}: no uncertainty, but other lines have one",
            mend="give every line an uncertainty, or none",
        )
    names = {setting for line in lines for end in (line.lower, line.upper) if end for setting, _ in end.settings}
    return Observed(lines, all(given), tuple(sorted(names)))


def _check_columns(model: Model, table: TableText, shown: str) -> None:
    names = table.names
    both = "level" in names and ("to" in names or "from" in names)
    if "value" not in names or both or ("from" in names and "to" not in names):
        raise SheetError(
            f"{shown} must have the columns `from, to, value`, `level, value` or `value`; it has: {_list(names)}",
            mend="write the names of the columns into the first line, separated by commas",
        )
    if "to" in names and "from" not in names:
        raise SheetError(f"{shown} has a column `to` but none `from`", mend="lines are from one level to another")
    if len(set(names)) < len(names):
        raise SheetError(f"{shown} has two columns of one name: {_list(names)}", mend="rename one of them")
    for name in names:
        bare = name.removeprefix("from.").removeprefix("to.")
        if name not in _COLUMNS and (bare not in model.plain or (bare != name and "level" in names)):
            near = nearest(bare, (*_COLUMNS, *model.plain))
            raise SheetError(
                f"{shown}: the column `{printable(name)[:40]}` is neither known nor a plain number of the sheet",
                mend=(f"did you mean `{near}`? " if near else "") + f"plain numbers: {', '.join(model.plain) or 'none'}",
            )


def _list(names: tuple[str, ...]) -> str:
    return printable(", ".join(names))[:120] or "no names"


def _line(model: Model, table: TableText, cells: Mapping[str, str], row: int) -> Observation:
    """Return one line of the file."""
    where = f"{table.path}, line {table.lines[row]}"
    value, uncertainty = _number(cells, "value", where), _optional(cells, "uncertainty", where)
    if value is None:
        raise SheetError(f"{where}: there is no value", mend="write a number, or take the line out")
    if uncertainty is not None and not uncertainty > 0:
        raise SheetError(f"{where}: the uncertainty must be above 0, found {uncertainty:g}", mend="give a positive one")
    factor = _factor(model, cells.get("unit", ""), where)
    common = _settings(table, cells, "", where)
    line = table.lines[row]
    scaled = None if uncertainty is None else uncertainty * factor
    if "level" in table.names:
        return Observation(line, None, End(_level(cells, "level", where), _sorted(common)), value * factor, scaled)
    ends = [
        End(_level(cells, side, where), _sorted(common | _settings(table, cells, f"{side}.", where))) for side in ("from", "to")
    ]
    return Observation(line, ends[0], ends[1], value * factor, scaled)


def _sorted(settings: Mapping[str, float]) -> Settings:
    return tuple(sorted(settings.items()))


def _settings(table: TableText, cells: Mapping[str, str], prefix: str, where: str) -> dict[str, float]:
    """Return the numbers of the sheet that columns with this prefix set."""
    found = {}
    for name in table.names:
        plain = name.removeprefix(prefix)
        own = name.startswith(prefix) and "." not in plain and plain not in _COLUMNS
        value = _number(cells, name, where) if own else None
        if value is not None:
            found[plain] = value
    return found


def _factor(model: Model, unit: str, where: str) -> float:
    """Return what a value in this unit is to be multiplied by."""
    unit = unit.strip().strip("[]").strip()
    if not unit:
        return 1.0
    try:
        factor, dimension = model.units.parse(unit, _NOWHERE)
    except SheetError as error:
        raise SheetError(f"{where}: {error.message}", mend=error.mend) from None
    if dimension != ENERGY:
        raise SheetError(f"{where}: `{printable(unit)}` is no unit of energy", mend="give cm^-1, meV, GHz or the like")
    return factor


def _optional(cells: Mapping[str, str], name: str, where: str) -> float | None:
    return _number(cells, name, where) if name in cells else None


def _number(cells: Mapping[str, str], name: str, where: str) -> float | None:
    """Return the number in a cell, None where the cell is empty."""
    text = cells.get(name, "").strip()
    if not text:
        return None
    value = float(text) if _NUMBER.fullmatch(text) else math.nan
    if not math.isfinite(value):
        raise SheetError(f"{where}: `{printable(text)[:40]}` in the column `{name}` is no number", mend="write it as 1234.5")
    return value


def _level(cells: Mapping[str, str], name: str, where: str) -> int | None:
    """Return the number of a level, None where the cell is empty."""
    value = _number(cells, name, where)
    if value is None:
        return None
    if value != int(value) or not 0 <= value <= MOST_LEVEL:
        raise SheetError(f"{where}: `{value:g}` is no number of a level", mend="levels are counted 0, 1, 2, ...")
    return int(value)
