"""Bracket levels by counting: no level can be missed, and close ones come as groups."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array, Counts

Count = Callable[[Array], Counts]

CLOSE = 1e-10
"""Levels nearer to each other than this share of their distance to the bottom, or to the top, are handled as one group."""

ALONE = 0.02
"""A single level is bracketed to this share of the mean spacing before Newton's method takes over."""


@dataclass(frozen=True)
class Ruler:
    """What distances between levels are judged by: the energy `bottom` they lie above, and `top`, where a continuum begins."""

    bottom: float
    top: float = math.inf

    def close(self, energy: float) -> float:
        """Return the distance below which levels near an energy are one group: never less than a few roundings."""
        return float(max(CLOSE * min(abs(energy - self.bottom), abs(self.top - energy)), 8 * np.spacing(abs(energy))))


@dataclass(frozen=True)
class Group:
    """Levels number `first` ... `first + size - 1`, all of them in (low, high), and no others there."""

    first: int
    size: int
    low: float
    high: float


def isolate(count: Count, first: int, last: int, low: float, high: float, ruler: Ruler) -> list[Group]:
    """Return groups that hold the levels first ... last, given count(low) <= first and count(high) > last.

    Each bracket is cut at several energies at once, until it holds one level or is closer than `ruler` can tell levels apart.
    """
    ends = count(np.array([low, high]))
    todo = [Group(int(ends[0]), int(ends[1] - ends[0]), low, high)]
    enough = ALONE * (high - low) / max(1, last - first + 1)
    done: list[Group] = []
    while todo:
        cuts = [_cuts(group, first, last) for group in todo]
        counts = np.split(count(np.concatenate(cuts)), np.cumsum([len(c) for c in cuts])[:-1])
        pieces = [piece for group, c, n in zip(todo, cuts, counts, strict=True) for piece in _pieces(group, c, n)]
        wanted = [g for g in pieces if g.first <= last and g.first + g.size > first]
        todo = [g for g in wanted if not _settled(g, ruler, enough)]
        done += [g for g in wanted if _settled(g, ruler, enough)]
    return sorted(done, key=lambda group: group.first)


def _settled(group: Group, ruler: Ruler, enough: float) -> bool:
    """Say whether a bracket is narrow: a single level to `enough`, several to where counts can no longer tell them apart."""
    width = group.high - group.low
    middle = (group.high + group.low) / 2
    narrow = width <= ruler.close(middle)
    return (group.size == 1 and width <= enough) or narrow


def _cuts(group: Group, first: int, last: int) -> Array:
    """Return energies inside a bracket: several for each wanted level in it."""
    inside = min(group.first + group.size - 1, last) - max(group.first, first) + 1
    pieces = int(min(512, max(12, 3 * inside)))
    return np.linspace(group.low, group.high, pieces + 1)[1:-1]


def _pieces(group: Group, cuts: Array, counts: Counts) -> list[Group]:
    """Return the non-empty parts of a bracket; a count that rounding made fall is raised to the one below it."""
    places = np.concatenate([[group.low], cuts, [group.high]])
    numbers = np.concatenate(
        [[group.first], np.clip(counts, group.first, group.first + group.size), [group.first + group.size]]
    )
    numbers = np.maximum.accumulate(numbers)
    rise = np.flatnonzero(np.diff(numbers))
    return [Group(int(numbers[k]), int(numbers[k + 1] - numbers[k]), float(places[k]), float(places[k + 1])) for k in rise]
