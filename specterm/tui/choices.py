"""What the user has chosen on the pages, as a value."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Choices:
    """`observable` and `other` are names or expressions (None: the usual ones); the rest belongs to single pages.

    lines: `every` level as a start, `temperature`, `broadening`, `into` another sheet; time: `times` (from, to, count) and the
    `cursor`; matrix: `logarithmic`; notebook: `bins`, `runs`, `orders`; sweep: the ranges, such as `F=0:20:41`, and the
    `quantity` followed; fit: the file of `observed` lines, and what to `vary` with its bounds; `scroll` is the first row of the
    page's table, `aside` the number of columns passed over.
    """

    observable: str | None = None
    other: str | None = None
    every: bool = False
    temperature: float | None = None
    broadening: float | None = None
    into: str | None = None
    times: tuple[float, float, int] | None = None
    cursor: int = 0
    logarithmic: bool = False
    bins: int = 24
    runs: int = 0
    orders: bool = False
    sweep: tuple[str, ...] = ()
    quantity: str = "levels"
    observed: str | None = None
    vary: tuple[tuple[str, tuple[float, float]], ...] = ()
    aside: int = 0
    scroll: int = 0
