"""One result as data for JSON and as a table for CSV."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from specterm.session.records.writing import to_csv, to_json


@dataclass(frozen=True)
class Record:
    """`data` is what JSON holds; `heading` and `rows` are the table of numbers that CSV holds."""

    data: dict[str, Any]
    heading: Sequence[str]
    rows: Iterable[Sequence[Any]]

    def json(self) -> str:
        """Return the data as JSON."""
        return to_json(self.data)

    def csv(self) -> str:
        """Return the table as comma-separated values."""
        return to_csv(self.heading, self.rows)
