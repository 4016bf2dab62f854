"""Where specterm keeps what outlives a session."""

from __future__ import annotations

import os
from pathlib import Path


def folder() -> Path:
    """Return `specterm` in the user's folder for state files (XDG base directory convention)."""
    base = os.environ.get("XDG_STATE_HOME") or os.path.expanduser("~/.local/state")
    return Path(base) / "specterm"
