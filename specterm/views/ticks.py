"""Ticks of an axis: round places and short labels that differ."""

from __future__ import annotations

import math
from dataclasses import dataclass

from specterm.views.numbers import short


@dataclass(frozen=True, slots=True)
class Ticks:
    """Places on an axis with their labels; `note` belongs in the axis title: "" or "10^6" or "+ 1.0603620904"."""

    places: tuple[float, ...]
    labels: tuple[str, ...]
    note: str = ""


def ticks(low: float, high: float, count: int) -> Ticks:
    """Return about `count` round places between two finite ends, low < high; no ticks where that is not so.

    Numbers beyond 1e5 or below 1e-3 share a power of ten; a range narrow beside its distance from zero is counted from a base.
    """
    if not (math.isfinite(low) and math.isfinite(high) and low < high) or count < 1 or not math.isfinite(high - low):
        return Ticks((), ())
    largest = max(abs(low), abs(high))
    step = _step((high - low) / count)
    if step < 1e-14 * largest:
        return Ticks((), ())
    if (high - low) < 1e-5 * largest:
        base = _base((low + high) / 2, step)
        inner = ticks(low - base, high - base, count)
        note = f"{short(base, 15)} + {inner.note}".rstrip("+ ") if inner.note else f"{short(base, 15)} +"
        return Ticks(tuple(base + place for place in inner.places), inner.labels, note)
    power = math.floor(math.log10(largest) + 1e-12)
    scale = power if power >= 5 or power < -3 else 0
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    places = tuple(number * step for number in range(first, last + 1))
    decimals = max(0, -math.floor(math.log10(step) + 1e-9) + scale)
    factor = 10.0**-scale if scale > -300 else 1.0
    labels = tuple(f"{place * factor:.{decimals}f}" for place in places)
    labels = tuple(label.lstrip("-") if not float(label) else label for label in labels)
    return Ticks(places, labels, f"10^{scale}" if scale else "")


def _step(raw: float) -> float:
    """Return the smallest of 1, 2, 5 times a power of ten that is not below `raw`."""
    power = math.floor(math.log10(raw)) if raw > 1e-300 else -300
    for factor in (1.0, 2.0, 5.0):
        if raw <= factor * 10.0**power * (1 + 1e-9):
            return factor * 10.0**power
    return 10.0 ** (power + 1)


def _base(middle: float, step: float) -> float:
    """Return a number near `middle` with few digits, a thousand steps or more coarse."""
    coarse = 10.0 ** math.ceil(math.log10(step) + 2)
    return round(middle / coarse) * coarse
