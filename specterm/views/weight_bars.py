"""Bars of weights: how much of a prepared state each level holds."""

from __future__ import annotations

import math

_EIGHTHS = " ▏▎▍▌▋▊▉█"


def bar(weight: float, width: int, glyphs: str = "braille") -> str:
    """Return a bar of exactly `width` columns for a weight between 0 and 1.

    A weight too small for the smallest part of a column still leaves a dot, so that it can be told from none; what is not a
    number shows "?", what is above 1 fills the bar.
    """
    if width <= 0:
        return ""
    if not math.isfinite(weight):
        return "?".ljust(width)
    size = min(max(weight, 0.0), 1.0) * width
    if glyphs == "ascii":
        full = int(size + 0.5)
        text = "#" * full if full else ("." if size > 1e-12 else "")
        return text.ljust(width)
    parts = int(size * 8 + 0.5)
    if not parts:
        return ("." if size > 1e-12 else "").ljust(width)
    text = _EIGHTHS[8] * (parts // 8) + (_EIGHTHS[parts % 8] if parts % 8 else "")
    return text.ljust(width)


def percent(weight: float, error: float | None = None) -> str:
    """Return a weight as a percentage in 7 columns: ` 97.31%`; with an error only the sure digits, at most two decimals."""
    if not math.isfinite(weight):
        return "      ?"
    decimals = 2
    if error is not None and math.isfinite(error) and error > 0:
        decimals = min(2, max(0, -math.ceil(math.log10(200 * error) - 1e-9)))
    text = f"{100 * weight:.{decimals}f}"
    if weight > 0 and not float(text):
        text = f"<{10.0**-decimals:.{decimals}f}"
    return f"{text}%".rjust(7)
