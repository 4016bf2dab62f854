"""Words of an operator as text, in terms of p."""

from __future__ import annotations

from collections.abc import Sequence

from specterm.model.scalar import Scalar
from specterm.model.setting import Setting
from specterm.model.term import UNIT, Term
from specterm.model.text import show_factor, show_number


def show_word(coefficient: Scalar, slots: Sequence[Term], setting: Setting) -> str:
    """Return a word in terms of p, the coefficient taken relative to (-i hbar)^order."""
    for _ in slots[1:]:
        coefficient = coefficient / (Scalar(-1j) * setting.hbar)
    powers: list[tuple[str, int]] = []
    for k, slot in enumerate(slots):
        if k:
            if powers and powers[-1][0] == "p":
                powers[-1] = ("p", powers[-1][1] + 1)
            else:
                powers.append(("p", 1))
        if slot != UNIT:
            powers.append((show_factor(slot, setting.coordinate, setting.labels), 1))
    body = "*".join(text if n == 1 else f"{text}^{n}" for text, n in powers) or "1"
    if body == "1":
        return _constant(coefficient, setting)
    if abs(coefficient.value - 1) <= coefficient.slack + 1e-12:
        return body
    if abs(coefficient.value + 1) <= coefficient.slack + 1e-12:
        return "-" + body
    return f"{show_number(coefficient)}*{body}"


def _constant(coefficient: Scalar, setting: Setting) -> str:
    """Return a number, as a multiple of hbar where it is a simple one and hbar is not 1."""
    ratio = coefficient / setting.hbar
    part = complex(ratio.value)
    fourfold = 4 * (part.imag or part.real)
    simple = 0 in (part.real, part.imag) and 0 < abs(fourfold) <= 64 and abs(fourfold - round(fourfold)) <= 1e-9
    if not simple or complex(setting.hbar.value) == 1:
        return show_number(coefficient)
    number = round(fourfold) / 4
    factors = (["i"] if part.imag else []) + ["hbar"]
    sign, size = "-" if number < 0 else "", abs(number)
    return sign + "*".join([*([] if size == 1 else [f"{size:g}"]), *factors])
