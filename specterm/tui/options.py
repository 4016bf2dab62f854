"""What a session is started with."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path


@dataclass(frozen=True)
class Options:
    """`glyphs` None: as the locale suggests; `count` None: the engine's choice; `folder` None: the sheet's own.

    `guarded` watches signals and the terminal; tests leave it off.
    """

    glyphs: str | None = None
    count: int | None = None
    near: float | None = None
    tolerance: float = 1e-8
    overrides: Mapping[str, str] = field(default_factory=dict)
    folder: Path | None = None
    mouse: bool = False
    guarded: bool = False
