"""The known name nearest to a misspelt one."""

from __future__ import annotations

from collections.abc import Iterable


def nearest(name: str, known: Iterable[str]) -> str | None:
    """Return the known name that `name` most likely stands for, or None where none is near.

    Names that differ only by case or underscores come first; otherwise the distance counts letters dropped, added,
    changed or swapped with their neighbour, and may be at most a third of the length.
    """
    wanted = name[:64]
    best: tuple[int, str] | None = None
    for candidate in known:
        if candidate == name:
            continue
        if _folded(candidate) == _folded(wanted):
            return candidate
        allowed = max(len(wanted), len(candidate)) // 3
        if allowed and abs(len(wanted) - len(candidate)) <= allowed:
            distance = _distance(wanted.casefold(), candidate.casefold())
            if distance <= allowed and (best is None or (distance, candidate) < best):
                best = distance, candidate
    return best[1] if best else None


def _folded(name: str) -> str:
    """Return a name without case and underscores."""
    return name.casefold().replace("_", "")


def _distance(first: str, second: str) -> int:
    """Return the number of edits between two words (optimal string alignment)."""
    last: list[int] = []
    row = list(range(len(second) + 1))
    for i, a in enumerate(first, 1):
        older, last, row = last, row, [i]
        for j, b in enumerate(second, 1):
            cost = min(last[j] + 1, row[j - 1] + 1, last[j - 1] + (a != b))
            if i > 1 and j > 1 and a == second[j - 2] and first[i - 2] == b:
                cost = min(cost, older[j - 2] + 1)
            row.append(cost)
    return row[-1]
