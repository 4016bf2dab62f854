"""What an operator needs to know beyond its own terms."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from specterm.model.domain import Domain
from specterm.model.scalar import ONE, Scalar


@dataclass(frozen=True)
class Setting:
    """hbar, the coordinate's name, the domain (None before it is known) and the user's names of terms (digest -> name)."""

    hbar: Scalar = ONE
    coordinate: str = "x"
    domain: Domain | None = None
    labels: Mapping[int, str] = field(default_factory=dict)
