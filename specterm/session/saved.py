"""A session as it is saved: text, what undo can bring back, pins, notebook, view."""

from __future__ import annotations

import json
import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from specterm.errors import SheetError
from specterm.session.document import LARGEST, Document, checked
from specterm.session.notebook import Notebook, notebook_from
from specterm.session.pins import MOST, Pin, pin_from

LARGEST_SESSION = 8_000_000
"""The largest session in bytes."""
MOST_PAST = 200
LARGEST_PAST = 1_000_000
"""Earlier texts that are kept: so many, and so many characters in all."""


@dataclass(frozen=True)
class Saved:
    """A session: the document, earlier texts from the oldest on, pins, notebook, what the screen showed as plain data.

    `folder` is where relative paths in the sheet start.
    """

    document: Document
    folder: Path
    past: tuple[str, ...] = ()
    pins: tuple[Pin, ...] = ()
    notebook: Notebook = field(default_factory=Notebook)
    view: dict[str, Any] = field(default_factory=dict)
    near: float | None = None
    tolerance: float = 1e-8

    @property
    def worth_keeping(self) -> bool:
        """Whether there is anything that the sheet's file does not hold."""
        return bool(self.document.changed or self.pins or self.notebook.entries)


def text_of(saved: Saved) -> str:
    """Return a session as text."""
    document = saved.document
    data = {
        "specterm": 1,
        "text": document.text,
        "path": None if document.path is None else str(document.path.absolute()),
        "saved": document.saved,
        "title": document.title,
        "folder": str(saved.folder.absolute()),
        "past": list(kept_past(saved.past)),
        "pins": [pin.data() for pin in saved.pins],
        "notebook": saved.notebook.data(),
        "view": saved.view,
        "near": saved.near,
        "tolerance": saved.tolerance,
    }
    return json.dumps(data, ensure_ascii=True, allow_nan=False)


def kept_past(past: Sequence[str]) -> tuple[str, ...]:
    """Return the newest of the earlier texts, as many as may be kept."""
    kept: list[str] = []
    room = LARGEST_PAST
    for text in reversed(past[-MOST_PAST:]):
        room -= len(text)
        if room < 0:
            break
        kept.append(text)
    return tuple(reversed(kept))


def saved_from(text: str) -> Saved:
    """Return the session a text describes; raises SheetError where it describes none."""
    try:
        data = json.loads(text, parse_constant=_refused, parse_float=_finite)
        document = Document(
            _sheet(data["text"]), None if data["path"] is None else Path(str(data["path"])),
            None if data["saved"] is None else _sheet(data["saved"]), str(data["title"])[:200],
        )  # fmt: skip
        past = tuple(_sheet(one) for one in data["past"][-MOST_PAST:])
        pins = tuple(pin_from(one) for one in data["pins"][:MOST])
        for pin in pins:
            _sheet(pin.text)
        near, tolerance = data["near"], float(data["tolerance"])
        if not 0 < tolerance < 1 or (near is not None and not math.isfinite(near)):
            raise ValueError("tolerance")
        view = data["view"] if isinstance(data["view"], dict) else {}
        notebook = notebook_from(data["notebook"])
        return Saved(document, Path(str(data["folder"])), past, pins, notebook, view, near, tolerance)
    except (TypeError, ValueError, KeyError, OverflowError, RecursionError, AttributeError) as error:
        raise SheetError("this is no session of specterm", mend="it cannot be taken up again") from error


def _sheet(text: Any) -> str:  # noqa: ANN401 - from a file of whatever content
    """Return a text that may be a sheet; raises ValueError or SheetError."""
    if not isinstance(text, str) or len(text) > LARGEST:
        raise ValueError("text")
    return checked(text, "the session")


def _refused(name: str) -> float:
    raise ValueError(name)


def _finite(text: str) -> float:
    """Return a number; ValueError where it is too large to be one."""
    value = float(text)
    return value if math.isfinite(value) else _refused(text)
