"""JSON and CSV as text."""

from __future__ import annotations

import csv
import io
import json
import math
from collections.abc import Iterable, Sequence
from typing import Any


def to_json(data: dict[str, Any]) -> str:
    """Return the data as JSON: numbers with all their digits, null for what is not a finite number."""
    return json.dumps(_plain(data), indent=1, ensure_ascii=False, allow_nan=False)


def _plain(value: Any) -> Any:  # noqa: ANN401 - anything JSON knows
    """Return the value with numpy numbers made plain and non-finite ones null."""
    if isinstance(value, dict):
        return {key: _plain(item) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [_plain(item) for item in value]
    if isinstance(value, complex):
        return [_plain(value.real), _plain(value.imag)]
    if isinstance(value, bool) or value is None or isinstance(value, (int, str)):
        return value
    number = float(value)
    return number if math.isfinite(number) else None


def to_csv(heading: Sequence[str], rows: Iterable[Sequence[Any]]) -> str:
    """Return the rows as comma-separated values; None is an empty cell."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(heading)
    for row in rows:
        writer.writerow(["" if cell is None else repr(float(cell)) if isinstance(cell, float) else cell for cell in row])
    return text.getvalue().rstrip("\n")
