"""Numbers of a sheet changed in place: comments, layout, units and everything else stay as they are.

Only definitions that are a plain number count: `NAME = number [unit]`, with or without a sign.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import Decimal

from specterm.errors import SheetError, Span
from specterm.language.catalogue import refuse
from specterm.language.entry import parse
from specterm.language.nodes import Definition, Number, Sheet, Unary
from specterm.language.suggest import nearest

_DIGITS = re.compile(r"[0-9.]+(?:[eE][+-]?[0-9]+)?")
_SIGNS = re.compile(r"[-+−\s]*")
_AGREE = Decimal("1e-12")
_WIDEST = (-4, 7)
"""Powers of ten between which a number may lie beside its written exponent before it gets one of its own."""


@dataclass(frozen=True, slots=True)
class NumberPlace:
    """The number of a plain definition: the characters it takes, sign included, its value, and these characters.

    `flipped` says that a minus stands outside, before a bracket: the sheet then means minus what the characters say. `value`
    is what the sheet means; `unit` is the text in the brackets behind the number, "" without any.
    """

    span: Span
    value: float
    text: str
    unit: str = ""
    flipped: bool = False


def plain_numbers(sheet: Sheet | str) -> dict[str, NumberPlace]:
    """Return where the number of each plain definition stands, by name, in the order written.

    Raises SheetError where a text cannot be read.
    """
    sheet = parse(sheet) if isinstance(sheet, str) else sheet
    found = ((item.name, _place(item, sheet.text)) for item in sheet.definitions)
    return {name: place for name, place in found if place is not None}


def _place(definition: Definition, text: str) -> NumberPlace | None:
    """Return where the number of a definition stands, None where it is no plain number."""
    node, starts, minus = definition.expression, [], False
    while isinstance(node, Unary) and node.operator in "+-":
        starts.append((node.span.start, minus))
        minus ^= node.operator == "-"
        node = node.operand
    digits = _DIGITS.match(text, node.span.start)
    if not isinstance(node, Number) or digits is None:
        return None
    begin, flipped = digits.start(), minus
    for start, outside in reversed(starts):
        if not _SIGNS.fullmatch(text, start, digits.start()):
            break
        begin, flipped = start, outside
    span = Span(begin, digits.end())
    value = -node.value if minus else node.value
    return NumberPlace(span, value, text[span.start : span.end], node.unit or "", flipped)


def with_number(text: str, name: str, value: float | Decimal | str) -> str:
    """Return the sheet `text` with the number of the plain definition `name` replaced, and nothing else.

    A string is put in as it is, a number in the style of the one it replaces (`number_text`). Raises SheetError where there is
    no such plain definition, the value is not finite, or the text cannot be read.
    """
    places = plain_numbers(text)
    if name not in places:
        raise refuse("not-plain", None, name=name, near=nearest(name, places))
    place = places[name]
    if place.flipped:
        value = -Decimal(value) if isinstance(value, str | Decimal) else -value
    written = value if isinstance(value, str) else number_text(value, place.text)
    return text[: place.span.start] + written + text[place.span.end :]


def step_of(text: str) -> Decimal:
    """Return one unit of the last digit written: 0.1 for `7.2`, 1 for `20`, 0.0001 for `1.5e-3`."""
    exponent = _decimal(text).as_tuple().exponent
    return Decimal(1).scaleb(int(exponent))


def number_text(value: float | Decimal, like: str) -> str:
    """Return a number with the decimals and the exponent that `like` has, more decimals only where it needs them.

    A Decimal is written exactly; what is written of a float agrees with it to 1e-12 of it, or of the step of `like` where that
    is more. Raises SheetError where the value is not finite.
    """
    if not math.isfinite(value):
        raise SheetError(f"{value} cannot be written into a sheet", mend="give a finite number")
    exact, slack = value if isinstance(value, Decimal) else Decimal(repr(float(value))), Decimal(0)
    if isinstance(value, float):
        slack = _AGREE * max(abs(exact), step_of(like))
    mark = re.search(r"[eE]([+-]?[0-9]+)", like)
    shift, top, bottom = int(mark[1]) if mark else 0, _decimal(like).adjusted(), int(step_of(like).adjusted())
    decimals = max(0, shift - bottom)
    size = exact.adjusted() - shift
    if abs(exact) > slack and not _WIDEST[0] - decimals <= size <= max(_WIDEST[1], top - shift + 3):
        shift, decimals = exact.adjusted(), max(0, top - bottom)
    behind = f"{'E' if 'E' in like else 'e'}{shift}" if mark or shift else ""
    return _shortest(exact.scaleb(-shift), decimals, slack.scaleb(-shift)) + behind


def _shortest(value: Decimal, decimals: int, slack: Decimal) -> str:
    """Return a number with `decimals` or just as many more as bring it within `slack`."""
    while True:
        rounded = round(value, decimals)
        if abs(rounded - value) <= slack:
            return f"{rounded if rounded else abs(rounded):.{decimals}f}"
        decimals += 1


def _decimal(text: str) -> Decimal:
    """Return the number a text of signs and digits says."""
    signs = _SIGNS.match(text)
    begin = signs.end() if signs else 0
    found = _DIGITS.fullmatch(text, begin)
    if found is None:
        raise SheetError(f"`{text[:40]}` is no number", mend="write it as 7.2 or 1.5e-3")
    minus = (text[:begin].count("-") + text[:begin].count("−")) % 2
    return -Decimal(found[0]) if minus else Decimal(found[0])
