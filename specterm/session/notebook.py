"""The notebook: what was prepared, measured and waited for, in order, with undo; plain data that outlives the session."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import asdict, dataclass, fields, replace
from typing import Any

from specterm.errors import SheetError, printable
from specterm.session.records.record import Record

KINDS = ("prepared", "measured", "waited")
_NUMBERS = ("value", "low", "high", "probability")
_WORDS = ("text", "unit", "sheet", "digest")
LARGEST_SEED = 2**63
MOST = 10_000
"""Entries of one notebook."""


@dataclass(frozen=True, slots=True)
class Entry:
    """One line of the notebook.

    `kind` is "prepared" (`text` names the state), "measured" (`text` is the observable; `value` the outcome, from `low` to
    `high`, of `probability`; `levels` the level numbers behind it) or "waited" (`value` is the time). `sheet` is the name of
    the sheet and `digest` tells its text; `unit` that of the value; `chosen` says that the outcome was chosen, not drawn.
    """

    kind: str
    text: str
    value: float = math.nan
    low: float = math.nan
    high: float = math.nan
    probability: float = math.nan
    unit: str = ""
    levels: tuple[int, ...] = ()
    chosen: bool = False
    sheet: str = ""
    digest: str = ""


@dataclass(frozen=True)
class Notebook:
    """Entries in the order they were made, and the seed that all draws come from."""

    entries: tuple[Entry, ...] = ()
    seed: int = 0

    @property
    def chain(self) -> tuple[Entry, ...]:
        """The entries since the last preparation, that one included; () before the first."""
        for place in range(len(self.entries) - 1, -1, -1):
            if self.entries[place].kind == "prepared":
                return self.entries[place:]
        return ()

    def noted(self, entry: Entry) -> Notebook:
        """Return the notebook with one more entry; the oldest goes when there are too many."""
        return replace(self, entries=(*self.entries, entry)[-MOST:])

    def undone(self) -> Notebook:
        """Return the notebook without its last entry."""
        return replace(self, entries=self.entries[:-1])

    def data(self) -> dict[str, Any]:
        """Return the notebook as plain data; what is not a number is None."""
        return {"seed": self.seed, "entries": [_plain(asdict(entry)) for entry in self.entries]}

    def record(self) -> Record:
        """Return the notebook as data and as a table."""
        names = [field.name for field in fields(Entry)]
        rows = [[_cell(getattr(entry, name)) for name in names] for entry in self.entries]
        return Record(self.data(), names, rows)


def _plain(data: dict[str, Any]) -> dict[str, Any]:
    return {key: None if isinstance(value, float) and not math.isfinite(value) else value for key, value in data.items()}


def _cell(value: Any) -> Any:  # noqa: ANN401 - a cell of a table
    if isinstance(value, tuple):
        return " ".join(str(part) for part in value)
    return None if isinstance(value, float) and not math.isfinite(value) else value


def notebook_from(data: Any) -> Notebook:  # noqa: ANN401 - from a file of whatever content
    """Return the notebook that plain data describe; raises SheetError where they do not."""
    try:
        entries = tuple(_entry(one) for one in data["entries"][:MOST])
        seed = int(data["seed"])
        if not 0 <= seed < LARGEST_SEED:
            raise ValueError("seed")
        return Notebook(entries, seed)
    except (TypeError, ValueError, KeyError, OverflowError, RecursionError) as error:
        raise SheetError("this is no notebook", mend="start a new one") from error


def _entry(data: Mapping[str, Any]) -> Entry:
    numbers: Any = {name: math.nan if data[name] is None else float(data[name]) for name in _NUMBERS}
    words: Any = {name: printable(str(data[name]))[:500].replace("\n", " ") for name in _WORDS}
    if data["kind"] not in KINDS:
        raise ValueError("kind")
    levels = tuple(int(level) for level in data["levels"][:1000])
    return Entry(kind=data["kind"], levels=levels, chosen=bool(data["chosen"]), **numbers, **words)
