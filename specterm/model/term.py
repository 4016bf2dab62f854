"""Resolved expressions of the coordinate as a graph of terms, in a canonical form, with exact structural equality.

A term is never evaluated here. Two terms are equal when they are the same up to the order of sums and products; the test
compares 127-bit digests (a polynomial hash modulo 2^127 - 1).
"""

from __future__ import annotations

import struct
from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from specterm.model.scalar import ONE, ZERO, Scalar
from specterm.stopping import check

Data = Any
"""What a term carries beside its arguments; see the kinds in `Term`."""

_PRIME = 2**127 - 1
_BASE = 0x5BD1E995A3C59AC2F64E1B7D9F8C3D51


@dataclass(frozen=True, slots=True, eq=False)
class Term:
    """One node: its kind, the terms below it and its own data.

    Kinds: constant (Scalar), coordinate, sum (Scalar coefficients), product, quotient, power (int), raise (general power),
    call (name), compare (operator), logic (and, or, not), where, real, imaginary, pieces (Pieces), spline (Spline), edge
    (int: the order of the formal derivative of a function that jumps). `varies`: depends on the coordinate; `real`: real by
    construction; `broken`: contains an edge and cannot be evaluated.
    """

    kind: str
    args: tuple[Term, ...]
    data: Data
    digest: int
    varies: bool
    real: bool
    broken: bool

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Term) and self.digest == other.digest

    def __hash__(self) -> int:
        return self.digest & 0xFFFFFFFFFFFFFFF

    @property
    def scalar(self) -> Scalar | None:
        """The number, if this is one."""
        return self.data if self.kind == "constant" else None


def _mix(numbers: Iterable[int]) -> int:
    h = 1
    for number in numbers:
        h = (h * _BASE + number + 1) % _PRIME
    return h * (h ^ (h >> 64)) % _PRIME


def _code(data: Data) -> int:
    if isinstance(data, str):
        return int.from_bytes(data.encode(), "little") % _PRIME
    if isinstance(data, complex):
        return int.from_bytes(struct.pack("<dd", data.real + 0.0, data.imag + 0.0), "little") % _PRIME
    if isinstance(data, float):
        return int.from_bytes(struct.pack("<d", data + 0.0), "little")
    if isinstance(data, int):
        return data % _PRIME
    return 0 if data is None else int(data.digest)


def make(kind: str, args: tuple[Term, ...], data: Data = None, *, real: bool | None = None, key: int | None = None) -> Term:
    """Return a node; `key` replaces the digest of data and args where their order does not count."""
    if key is None:
        key = _mix([_code(data), *(a.digest for a in args)])
    is_real = all(a.real for a in args) if real is None else real
    varies = kind in ("coordinate", "pieces", "spline") or any(a.varies for a in args)
    return Term(kind, args, data, _mix([_code(kind), key]), varies, is_real, kind == "edge" or any(a.broken for a in args))


def constant(value: Scalar | complex | float) -> Term:
    """Return a constant term; a bare number counts as exact."""
    scalar = value if isinstance(value, Scalar) else Scalar(value)
    return make("constant", (), scalar, real=scalar.is_real, key=_code(scalar.value))


COORDINATE = make("coordinate", (), None, real=True)
UNIT = constant(1.0)
NIL = constant(0.0)


def split(term: Term) -> tuple[Scalar, Term]:
    """Return the constant factor of a term and the rest (1 for a constant)."""
    if term.kind == "constant":
        return term.data, UNIT
    if term.kind == "sum" and len(term.args) == 1:
        return term.data[0], term.args[0]
    return ONE, term


def linear(pairs: Iterable[tuple[Scalar, Term]]) -> Term:
    """Return the sum of coefficient times term, equal terms collected, inner sums with the coefficient +-1 opened."""
    found: dict[int, tuple[Scalar, Term]] = {}
    for coefficient, term in _opened(pairs):
        if coefficient.value == 0:
            continue
        before = found.get(term.digest)
        found[term.digest] = (coefficient, term) if before is None else (_collected(before[0], coefficient), term)
    kept = [(c, t) for c, t in found.values() if c.value != 0]
    if not kept:
        return NIL
    if len(kept) == 1:
        return scaled(*kept[0])
    return _sum(kept)


def _collected(a: Scalar, b: Scalar) -> Scalar:
    total = a + b
    return ZERO if abs(total.value) <= a.slack + b.slack else total


def _opened(pairs: Iterable[tuple[Scalar, Term]]) -> Iterable[tuple[Scalar, Term]]:
    for coefficient, term in pairs:
        if term.kind == "constant":
            yield coefficient * term.data, UNIT
        elif term.kind == "sum" and (len(term.args) == 1 or coefficient.value in (1, -1)):
            for inner, arg in zip(term.data, term.args, strict=True):
                yield coefficient * inner, arg
        else:
            yield coefficient, term


def _sum(kept: Sequence[tuple[Scalar, Term]]) -> Term:
    coefficients = tuple(c for c, _ in kept)
    key = _mix(sorted(_mix([_code(c.value), t.digest]) for c, t in kept))
    real = all(c.is_real and t.real for c, t in kept)
    return make("sum", tuple(t for _, t in kept), coefficients, real=real, key=key)


def scaled(coefficient: Scalar, term: Term) -> Term:
    """Return coefficient times term."""
    inner, core = split(term)
    total = coefficient * inner
    if total.value == 0:
        return NIL
    if core is UNIT or core.kind == "constant":
        return constant(total)
    return core if total.value == 1 else _sum([(total, core)])


def spread(coefficient: Scalar, term: Term) -> list[tuple[Scalar, Term]]:
    """Return coefficient times term as pairs, an inner sum opened whatever the coefficient (for formal cancellation)."""
    if term.kind == "sum":
        return [(coefficient * c, t) for c, t in zip(term.data, term.args, strict=True)]
    return [(coefficient, term)]


def add(*terms: Term) -> Term:
    """Return the sum."""
    return linear((ONE, t) for t in terms)


def subtract(a: Term, b: Term) -> Term:
    """Return a - b."""
    return linear([(ONE, a), (-ONE, b)])


def negative(a: Term) -> Term:
    """Return -a."""
    return scaled(-ONE, a)


def multiply(*terms: Term) -> Term:
    """Return the product, constants pulled out in front, equal factors and reciprocals collected into whole powers."""
    check()
    coefficient = ONE
    powers: dict[int, tuple[Term, int]] = {}
    for term in terms:
        inner, core = split(term)
        coefficient = coefficient * inner
        for base, exponent in whole_powers(core):
            before = powers.get(base.digest, (base, 0))[1]
            powers[base.digest] = (base, before + exponent)
    if coefficient.value == 0:
        return NIL
    return scaled(coefficient, _product(powers.values()))


def whole_powers(core: Term) -> list[tuple[Term, int]]:
    """Return the factors of a term without constant factor, as bases with whole exponents, below 0 for 1/b; none for 1."""
    if core.kind == "constant":
        return []
    found: list[tuple[Term, int]] = []
    for factor in core.args if core.kind == "product" else (core,):
        if factor.kind == "power":
            found.append((factor.args[0], factor.data))
        elif factor.kind == "quotient" and factor.args[0] == UNIT:
            found += [(base, -n) for base, n in whole_powers(factor.args[1])]
        else:
            found.append((factor, 1))
    return found


def _product(powers: Collection[tuple[Term, int]]) -> Term:
    """Return the product of bases with whole exponents; those below 0 stand together in one reciprocal."""
    above = [base if n == 1 else make("power", (base,), n) for base, n in powers if n > 0]
    below = [base if n == -1 else make("power", (base,), -n) for base, n in powers if n < 0]
    factors = [*above, make("quotient", (UNIT, _gathered(below)))] if below else above
    return _gathered(factors)


def _gathered(factors: Sequence[Term]) -> Term:
    """Return the plain product of factors that have nothing in common."""
    if not factors:
        return UNIT
    if len(factors) == 1:
        return factors[0]
    return make("product", tuple(factors), key=_mix(sorted(f.digest for f in factors)))


def divide(a: Term, b: Term) -> Term:
    """Return a / b; stacked quotients are gathered into one, common factors cancel."""
    top, upper = split(a)
    bottom, lower = split(b)
    factor = top / bottom
    if lower.kind == "constant" or upper == lower:
        return scaled(factor, upper if lower.kind == "constant" else UNIT)
    if factor.value == 0:
        return NIL
    if lower.kind == "quotient":
        upper, lower = multiply(upper, lower.args[1]), lower.args[0]
        return scaled(factor, divide(upper, lower))
    if upper.kind == "quotient":
        upper, lower = upper.args[0], multiply(upper.args[1], lower)
        return scaled(factor, divide(upper, lower))
    above, below = _cancelled(upper, lower)
    return scaled(factor, above if below is UNIT else make("quotient", (above, below)))


def _cancelled(upper: Term, lower: Term) -> tuple[Term, Term]:
    """Return numerator and denominator without their common whole powers."""
    powers = {base.digest: (base, n) for base, n in whole_powers(upper)}
    below: list[tuple[Term, int]] = []
    for base, n in whole_powers(lower):
        held = powers.get(base.digest, (base, 0))[1]
        common = min(held, n)
        if common > 0:
            powers[base.digest] = (base, held - common)
        below.append((base, n - max(common, 0)))
    return _product(powers.values()), _product(below)
