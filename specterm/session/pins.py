"""Pins: sheets kept with what was asked of them, so that their spectra stand beside the present one."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from specterm.errors import SheetError, printable
from specterm.session.document import LARGEST

MOST = 50
"""Pins of one session."""


@dataclass(frozen=True)
class Pin:
    """A sheet as it was: its `text`, the `folder` its paths start from, and the levels asked for; `name` is the user's."""

    name: str
    text: str
    folder: Path
    count: int | None = None
    near: float | None = None
    tolerance: float = 1e-8

    def data(self) -> dict[str, Any]:
        """Return the pin as plain data."""
        return {
            "name": self.name, "text": self.text, "folder": str(self.folder), "count": self.count, "near": self.near,
            "tolerance": self.tolerance,
        }  # fmt: skip


def pin_from(data: Any) -> Pin:  # noqa: ANN401 - from a file of whatever content
    """Return the pin that plain data describe; raises SheetError where they do not."""
    try:
        text, count = str(data["text"]), data["count"]
        if len(text) > LARGEST:
            raise ValueError("text")
        near, tolerance = None if data["near"] is None else float(data["near"]), float(data["tolerance"])
        if not 0 < tolerance < 1 or (near is not None and not math.isfinite(near)):
            raise ValueError("numbers")
        return Pin(
            printable(str(data["name"]))[:80].replace("\n", " "), text, Path(str(data["folder"])),
            None if count is None else min(max(1, int(count)), 100_000),
            near, tolerance,
        )  # fmt: skip
    except (TypeError, ValueError, KeyError, OverflowError, RecursionError) as error:
        raise SheetError("this is no pin", mend="pin the spectrum again") from error


def unused_name(pins: Sequence[Pin], wanted: str) -> str:
    """Return a name that no pin has: the one wanted, or it with a number behind."""
    known = {pin.name for pin in pins}
    if wanted not in known:
        return wanted
    return next(name for number in range(2, len(known) + 3) if (name := f"{wanted} ({number})") not in known)


def renamed(pins: tuple[Pin, ...], place: int, name: str) -> tuple[Pin, ...]:
    """Return the pins with another name at a place; a name that is taken gets a number."""
    others = (*pins[:place], *pins[place + 1 :])
    return (*pins[:place], replace(pins[place], name=unused_name(others, name)), *pins[place + 1 :])
