"""Numbers as text: a value with its error in bracket notation, and short plain numbers for axes and status lines."""

from __future__ import annotations

import math
from decimal import ROUND_CEILING, Context, Decimal

_CONTEXT = Context(prec=80)
DIGITS = 17


def bracket(value: float, error: float | None, *, digits: int = 6) -> str:
    """Return the value with its error behind the last digit: `1.0603620904842(3)`, `-1.5(2)e-9`.

    The bracket counts units of the last digit shown and is rounded up, the rounding of the value itself included, so that it
    never promises more than `error`. Error 0 shows the shortest text that reads back as the value. Without a known error (None,
    NaN or infinite) `digits` digits are shown behind a `~`. Never more than 17 digits.
    """
    if not math.isfinite(value):
        return _odd(value)
    if error is None or not math.isfinite(error) or error < 0:
        return "~" + short(value, digits)
    if error == 0:
        return _layout(Decimal(repr(value)).normalize(_CONTEXT), None)
    exact, bound = Decimal(value), Decimal(error)
    place = bound.adjusted()
    if value:
        place = max(place, exact.adjusted() - DIGITS + 1)
    shown, last = _rounded(exact, bound, place)
    while last >= 10:
        place += 1
        shown, last = _rounded(exact, bound, place)
    return _layout(shown, last)


def _rounded(value: Decimal, error: Decimal, place: int) -> tuple[Decimal, int]:
    """Return the value rounded to 10^place and the error in those units, rounded up."""
    unit = Decimal(1).scaleb(place, _CONTEXT)
    shown = value.quantize(unit, context=_CONTEXT)
    off = _CONTEXT.add(error, abs(_CONTEXT.subtract(value, shown)))
    return shown, int(_CONTEXT.divide(off, unit).to_integral_value(ROUND_CEILING))


def _layout(number: Decimal, last: int | None) -> str:
    """Return the digits of `number` with the bracket, in decimal form near 1 and with an exponent elsewhere."""
    tail = "" if last is None else f"({last})"
    place = int(number.as_tuple().exponent)
    lead = max(number.adjusted(), place) if number else place
    if (-4 <= lead < 7) and (place <= 0 or last is None):
        return f"{number:f}{tail}"
    if not number:
        return f"0{tail}e{place}" if last is not None else "0"
    mantissa = number.scaleb(-lead, _CONTEXT)
    return f"{mantissa:f}{tail}e{lead}"


def _odd(value: float) -> str:
    """Return the text of a number that is not finite."""
    return "nan" if math.isnan(value) else ("inf" if value > 0 else "-inf")


def short(value: float, digits: int = 6) -> str:
    """Return the value to at most `digits` digits, trailing zeros removed: `-12.5`, `3e-08` as `3e-8`."""
    if not math.isfinite(value):
        return _odd(value)
    text = f"{value:.{digits}g}"
    mantissa, _, power = text.partition("e")
    if power:
        return f"{mantissa}e{int(power)}"
    return "0" if mantissa == "-0" else mantissa


def with_unit(text: str, unit: str) -> str:
    """Return the text followed by its unit, which may be empty."""
    return f"{text} {unit}" if unit else text


def duration(seconds: float) -> str:
    """Return a time span in words a status line has room for: `0.8 ms`, `34 ms`, `1.2 s`, `130 s`."""
    if not math.isfinite(seconds):
        return _odd(seconds)
    if seconds < 0.9995:
        return f"{short(seconds * 1000, 2 if seconds < 0.0995 else 3)} ms"
    return f"{short(seconds, 2) if seconds < 99.5 else format(seconds, '.0f')} s"


def scale_of(unit: str) -> tuple[float, str]:
    """Return what numbers in a unit are multiplied by to be shown, and the unit shown: `75.4 fs` gives (75.4, `fs`)."""
    head, _, name = unit.partition(" ")
    try:
        return (float(head), name) if name else (1.0, unit)
    except ValueError:
        return 1.0, unit
