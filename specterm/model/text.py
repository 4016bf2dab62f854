"""Terms and words as text, the way a sheet would write them."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence

from specterm.model.scalar import Scalar
from specterm.model.term import UNIT, Term
from specterm.model.walk import leaves_first

LONGEST = 60
_SUM, _PRODUCT, _SIGN, _POWER, _ATOM = range(5)


def show(root: Term, coordinate: str = "x", labels: Mapping[int, str] | None = None) -> str:
    """Return the term as an expression, names of the user's where there are, "..." where it is too long."""
    return _shown(root, coordinate, labels or {})[0]


def show_factor(root: Term, coordinate: str, labels: Mapping[int, str]) -> str:
    """Return the term as a factor of a product, in parentheses where it needs them."""
    return _wrap(_shown(root, coordinate, labels), _SIGN)


def _shown(root: Term, coordinate: str, labels: Mapping[int, str]) -> tuple[str, int]:
    texts: dict[int, tuple[str, int]] = {}
    for term in leaves_first(root):
        named = labels.get(term.digest)
        text, level = (named, _ATOM) if named else _one(term, [texts[a.digest] for a in term.args], coordinate)
        texts[term.digest] = ("...", _ATOM) if len(text) > LONGEST else (text, level)
    return texts[root.digest]


Shown = tuple[str, int]
"""A text and how tightly it binds."""


def _one(term: Term, args: Sequence[Shown], coordinate: str) -> Shown:
    if term.kind == "coordinate":
        return coordinate, _ATOM
    return _RULES.get(term.kind, _call)(term, args)


def _constant(term: Term, _args: Sequence[Shown]) -> Shown:
    return show_number(term.data), _SIGN if str(term.data.value).startswith("-") else _ATOM


def _sum(term: Term, args: Sequence[Shown]) -> Shown:
    parts = [_scaled(c, a, bare=t == UNIT) for c, a, t in zip(term.data, args, term.args, strict=True)]
    return " + ".join(parts).replace("+ -", "- "), _SUM if len(parts) > 1 else _PRODUCT


def _raise(_term: Term, args: Sequence[Shown]) -> Shown:
    return f"{_wrap(args[0], _ATOM)}^{_wrap(args[1], _ATOM)}", _POWER


def _truth(term: Term, args: Sequence[Shown]) -> Shown:
    if len(args) == 1:
        return f"not {_wrap(args[0], _ATOM)}", _SUM
    return f" {term.data} ".join(_wrap(a, _PRODUCT) for a in args), _SUM


def _call(term: Term, args: Sequence[Shown]) -> Shown:
    name = {"real": "re", "imaginary": "im", "where": "where"}.get(term.kind, str(term.data))
    return f"{name}({', '.join(a[0] for a in args)})", _ATOM


_RULES: dict[str, Callable[[Term, Sequence[Shown]], Shown]] = {
    "constant": _constant,
    "sum": _sum,
    "product": lambda _t, args: ("*".join(_wrap(a, _PRODUCT) for a in args), _PRODUCT),
    "quotient": lambda _t, args: (f"{_wrap(args[0], _PRODUCT)}/{_wrap(args[1], _POWER)}", _PRODUCT),
    "power": lambda t, args: (f"{_wrap(args[0], _ATOM)}^{t.data}", _POWER),
    "raise": _raise,
    "compare": _truth,
    "logic": _truth,
    "pieces": lambda t, _args: (t.data.name, _ATOM),
    "spline": lambda t, _args: (t.data.name, _ATOM),
    "edge": lambda t, args: (f"({args[0][0]})" + "'" * t.data, _ATOM),
}


def _wrap(part: tuple[str, int], least: int) -> str:
    return part[0] if part[1] >= least else f"({part[0]})"


def _scaled(coefficient: Scalar, part: tuple[str, int], *, bare: bool) -> str:
    if bare:
        return show_number(coefficient)
    if coefficient.value == 1:
        return _wrap(part, _PRODUCT)
    if coefficient.value == -1:
        return "-" + _wrap(part, _PRODUCT)
    return f"{show_number(coefficient)}*{_wrap(part, _PRODUCT)}"


def show_number(scalar: Scalar) -> str:
    """Return a number with at most 6 digits; imaginary ones with `i`."""
    value = scalar.value
    if not isinstance(value, complex):
        return f"{value:.6g}"
    if value.real:
        return f"({value.real:.6g} + {value.imag:.6g}*i)".replace("+ -", "- ")
    return {1.0: "i", -1.0: "-i"}.get(value.imag, f"{value.imag:.6g}*i")
