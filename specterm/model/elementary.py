"""The functions a sheet may use: names, second names, argument counts, and how numpy or scipy evaluates them."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import reduce

import numpy as np

from specterm.model.arrays import Values


@dataclass(frozen=True)
class Elementary:
    """One function. `value` maps arrays (or numbers) to arrays; real arguments give real results, nan where there is none.

    `ulps` bounds the relative error of `value` in units of 2^-53; `holomorphic` is False where only real arguments make sense;
    `jumps` is True where the function is piecewise constant.
    """

    name: str
    fewest: int
    most: int
    value: Callable[..., Values]
    ulps: float = 4.0
    holomorphic: bool = True
    jumps: bool = False


def _special(name: str, which: int | None = None) -> Callable[..., Values]:
    def value(*arguments: Values) -> Values:
        from scipy import special  # noqa: PLC0415 - takes long to import, few sheets need it

        result = getattr(special, name)(*arguments)
        return result if which is None else result[which]

    return value


def _sech(x: Values) -> Values:
    if np.iscomplexobj(x):
        return 1 / np.cosh(x)
    small = np.exp(-np.abs(x))
    return 2 * small / (1 + small * small)


def _csch(x: Values) -> Values:
    if np.iscomplexobj(x):
        return 1 / np.sinh(x)
    size = np.abs(x)
    return np.copysign(2.0, x) * np.exp(-size) / -np.expm1(-2 * size)


def _acot(x: Values) -> Values:
    return np.pi / 2 - np.arctan(x) if np.iscomplexobj(x) else np.arctan2(1.0, x)


_TABLE = (
    Elementary("exp", 1, 1, np.exp),
    Elementary("expm1", 1, 1, np.expm1),
    Elementary("log", 1, 1, np.log),
    Elementary("log1p", 1, 1, np.log1p),
    Elementary("log10", 1, 1, np.log10),
    Elementary("log2", 1, 1, np.log2),
    Elementary("sqrt", 1, 1, np.sqrt),
    Elementary("cbrt", 1, 1, np.cbrt, holomorphic=False),
    Elementary("sin", 1, 1, np.sin),
    Elementary("cos", 1, 1, np.cos),
    Elementary("tan", 1, 1, np.tan, 8),
    Elementary("sec", 1, 1, lambda x: 1 / np.cos(x), 8),
    Elementary("csc", 1, 1, lambda x: 1 / np.sin(x), 8),
    Elementary("cot", 1, 1, lambda x: 1 / np.tan(x), 12),
    Elementary("asin", 1, 1, np.arcsin, 8),
    Elementary("acos", 1, 1, np.arccos, 8),
    Elementary("atan", 1, 1, np.arctan),
    Elementary("asec", 1, 1, lambda x: np.arccos(1 / x), 16),
    Elementary("acsc", 1, 1, lambda x: np.arcsin(1 / x), 16),
    Elementary("acot", 1, 1, _acot, 8),
    Elementary("sinh", 1, 1, np.sinh, 8),
    Elementary("cosh", 1, 1, np.cosh, 8),
    Elementary("tanh", 1, 1, np.tanh, 8),
    Elementary("sech", 1, 1, _sech, 16),
    Elementary("csch", 1, 1, _csch, 16),
    Elementary("coth", 1, 1, lambda x: 1 / np.tanh(x), 12),
    Elementary("asinh", 1, 1, np.arcsinh, 8),
    Elementary("acosh", 1, 1, np.arccosh, 8),
    Elementary("atanh", 1, 1, np.arctanh, 8),
    Elementary("asech", 1, 1, lambda x: np.arccosh(1 / x), 16),
    Elementary("acsch", 1, 1, lambda x: np.arcsinh(1 / x), 16),
    Elementary("acoth", 1, 1, lambda x: np.arctanh(1 / x), 16),
    Elementary("hypot", 2, 2, np.hypot, holomorphic=False),
    Elementary("atan2", 2, 2, np.arctan2, 8, holomorphic=False),
    Elementary("abs", 1, 1, np.abs, 0, holomorphic=False),
    Elementary("sign", 1, 1, np.sign, 0, holomorphic=False, jumps=True),
    Elementary("step", 1, 1, lambda x: np.where(np.isnan(x), x, np.greater_equal(x, 0)), 0, holomorphic=False, jumps=True),
    Elementary("floor", 1, 1, np.floor, 0, holomorphic=False, jumps=True),
    Elementary("ceil", 1, 1, np.ceil, 0, holomorphic=False, jumps=True),
    Elementary("min", 1, 64, lambda *a: reduce(np.minimum, a), 0, holomorphic=False),
    Elementary("max", 1, 64, lambda *a: reduce(np.maximum, a), 0, holomorphic=False),
    Elementary("erf", 1, 1, _special("erf"), 16),
    Elementary("erfc", 1, 1, _special("erfc"), 64),
    Elementary("gamma", 1, 1, _special("gamma"), 64, holomorphic=False),
    Elementary("lgamma", 1, 1, _special("gammaln"), 64, holomorphic=False),
    Elementary("digamma", 1, 1, _special("digamma"), 64, holomorphic=False),
    Elementary("polygamma", 2, 2, _special("polygamma"), 256, holomorphic=False),
    Elementary("besselj", 2, 2, _special("jv"), 1024, holomorphic=False),
    Elementary("bessely", 2, 2, _special("yv"), 1024, holomorphic=False),
    Elementary("besseli", 2, 2, _special("iv"), 1024, holomorphic=False),
    Elementary("besselk", 2, 2, _special("kv"), 1024, holomorphic=False),
    Elementary("airyai", 1, 1, _special("airy", 0), 64, holomorphic=False),
    Elementary("airyaiprime", 1, 1, _special("airy", 1), 64, holomorphic=False),
    Elementary("airybi", 1, 1, _special("airy", 2), 64, holomorphic=False),
    Elementary("airybiprime", 1, 1, _special("airy", 3), 64, holomorphic=False),
)

FUNCTIONS: dict[str, Elementary] = {f.name: f for f in _TABLE}
"""Every function by its first name. `step(0)` is 1 (continuous from the right), `sign(0)` is 0, `acot` runs from 0 to pi."""

ORDERED = frozenset({"polygamma", "besselj", "bessely", "besseli", "besselk"})
"""Functions whose first argument is an order: it must be a real constant."""

SECOND_NAMES: dict[str, str] = {
    "ln": "log",
    "sgn": "sign",
    "heaviside": "step",
    "minimum": "min",
    "maximum": "max",
    "loggamma": "lgamma",
    "psi": "digamma",
    **{"arc" + name[1:]: name for name in FUNCTIONS if name[0] == "a" and name[1:] in FUNCTIONS},
    **{"ar" + name[1:]: name for name in FUNCTIONS if name[0] == "a" and name.endswith("h") and name[1:] in FUNCTIONS},
}

COMPOSED = ("where", "re", "im", "arg", "conj", "mod")
"""Functions made of others when the sheet is built."""


def first_name(name: str) -> str | None:
    """Return the function's first name, or None where there is no such function."""
    name = SECOND_NAMES.get(name, name)
    return name if name in FUNCTIONS or name in COMPOSED else None
