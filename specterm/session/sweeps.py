"""Where the journals of sweeps lie, so that one that was cut off goes on where it stopped."""

from __future__ import annotations

import contextlib
from pathlib import Path

from specterm.analysis.sweep import SweepRequest
from specterm.analysis.sweep_request import fingerprint
from specterm.session.place import folder

KEPT = 20
"""So many journals are kept, the newest ones."""


def journal_of(request: SweepRequest) -> Path | None:
    """Return the file for the journal of a sweep, None where there can be none; old journals make room."""
    place = folder() / "sweeps"
    try:
        place.mkdir(mode=0o700, parents=True, exist_ok=True)
        known = sorted(place.glob("*.jsonl"), key=lambda path: path.stat().st_mtime)
    except OSError:
        return None
    for path in known[: max(0, len(known) - KEPT)]:
        with contextlib.suppress(OSError):
            path.unlink()
    return place / f"{fingerprint(request)[:24]}.jsonl"
