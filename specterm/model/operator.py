"""Operators: sums of words, a word being a product of functions and derivatives D = d/dx in a definite order."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

from specterm.errors import SheetError
from specterm.model.compose import conjugate
from specterm.model.function import Function, as_term
from specterm.model.normal import Normal, normal_order, vanishes
from specterm.model.scalar import ONE, Scalar
from specterm.model.setting import Setting
from specterm.model.term import COORDINATE, NIL, UNIT, Term, linear, multiply, split

if TYPE_CHECKING:
    from specterm.model.form import Form, Sturm
    from specterm.model.hermitian import NotHermitian

MOST_WORDS = 10_000
LARGEST_ORDER = 16


@dataclass(frozen=True, slots=True)
class Word:
    """coefficient times f0 D f1 D ... D fn; `slots` are f0..fn, each without constant factor."""

    coefficient: Scalar
    slots: tuple[Term, ...]

    @property
    def order(self) -> int:
        """The number of derivatives."""
        return len(self.slots) - 1

    def adjoint(self) -> Word:
        """Return the formal adjoint: reversed, conjugated, a sign for each derivative."""
        c = self.coefficient.conjugate()
        return Word(-c if self.order % 2 else c, tuple(conjugate(s) for s in reversed(self.slots)))


def word(coefficient: Scalar, slots: Iterable[Term]) -> Word:
    """Return a word with the constant factors of the slots gathered in front."""
    kept = []
    for slot in slots:
        inner, core = split(slot)
        coefficient = coefficient * inner
        kept.append(core)
    return Word(coefficient, tuple(kept))


def gathered(words: Iterable[Word]) -> tuple[Word, ...]:
    """Return the words with equal ones collected, zeros dropped and all plain functions made one."""
    pairs: dict[tuple[Term, ...], Scalar] = {}
    functions: list[tuple[Scalar, Term]] = []
    for w in words:
        if w.order == 0:
            functions.append((w.coefficient, w.slots[0]))
            continue
        before = pairs.get(w.slots)
        pairs[w.slots] = w.coefficient if before is None else before + w.coefficient
    kept = [Word(c, s) for s, c in pairs.items() if abs(c.value) > c.slack]
    potential = linear(functions)
    return (*kept, *([] if potential == NIL else [word(ONE, (potential,))]))


@dataclass(frozen=True)
class Operator:
    """A sum of words over one coordinate; `setting` carries hbar, the coordinate and the domain. Immutable."""

    words: tuple[Word, ...]
    setting: Setting

    def __add__(self, other: Operator | Function | complex) -> Operator:
        return Operator(gathered((*self.words, *self._lifted(other).words)), self.setting)

    def __radd__(self, other: Function | complex) -> Operator:
        return self._lifted(other) + self

    def __neg__(self) -> Operator:
        return Operator(tuple(Word(-w.coefficient, w.slots) for w in self.words), self.setting)

    def __sub__(self, other: Operator | Function | complex) -> Operator:
        return self + (-self._lifted(other))

    def __rsub__(self, other: Function | complex) -> Operator:
        return self._lifted(other) - self

    def __mul__(self, other: Operator | Function | complex) -> Operator:
        return self.compose(self._lifted(other))

    def __rmul__(self, other: Function | complex) -> Operator:
        return self._lifted(other).compose(self)

    def _lifted(self, other: Operator | Function | complex) -> Operator:
        return other if isinstance(other, Operator) else multiplication(other, self.setting)

    def compose(self, other: Operator) -> Operator:
        """Return the product, self applied after other.

        Raises SheetError above 10,000 terms or order 16, before the work is done.
        """
        check_size(len(self.words) * len(other.words), self.length + other.length)
        return Operator(
            gathered(
                word(a.coefficient * b.coefficient, (*a.slots[:-1], multiply(a.slots[-1], b.slots[0]), *b.slots[1:]))
                for a in self.words
                for b in other.words
            ),
            self.setting,
        )

    def power(self, exponent: int) -> Operator:
        """Return the product of `exponent` factors."""
        result = multiplication(1.0, self.setting)
        for _ in range(exponent):
            result = result.compose(self)
        return result

    def commutator(self, other: Operator) -> Operator:
        """Return self other - other self."""
        return self.compose(other) - other.compose(self)

    def adjoint(self) -> Operator:
        """Return the formal adjoint (boundary terms left out)."""
        return Operator(gathered(w.adjoint() for w in self.words), self.setting)

    @property
    def length(self) -> int:
        """The largest number of derivatives in a word, before any cancellation."""
        return max((w.order for w in self.words), default=0)

    @cached_property
    def normal(self) -> Normal:
        """The operator with all derivatives on the right: coefficient sums by power of D."""
        return normal_order(((w.coefficient, w.slots) for w in self.words))

    @cached_property
    def order(self) -> int:
        """The highest number of D in a word after normal ordering; 0 for a function."""
        top = self.length
        leading = [(w.coefficient, multiply(*w.slots)) for w in self.words if w.order == top]
        if top == 0 or not vanishes(leading, self.setting.domain):
            return top
        live = [k for k, pairs in self.normal.items() if not vanishes(pairs, self.setting.domain)]
        return max(live, default=0)

    @property
    def function(self) -> Function | None:
        """The function, if the operator is a multiplication, else None."""
        if self.order > 0:
            return None
        return Function(linear(self.normal.get(0, ())))

    def hermitian(self) -> NotHermitian | None:
        """Return None if the operator equals its formal adjoint, else why not and what to write instead."""
        from specterm.model.hermitian import hermitian

        return hermitian(self)

    def form(self) -> Form:
        """Return the weak form (see `specterm.model.form.form`)."""
        from specterm.model.form import form

        return form(self)

    def sturm(self) -> Sturm:
        """Return the real functions K, B and V of a Hermitian operator of order <= 2 (see `specterm.model.form.sturm`)."""
        from specterm.model.form import sturm

        return sturm(self)


def check_size(words: int, order: int) -> None:
    """Refuse an operator above the limits (SheetError) before it is expanded."""
    if words > MOST_WORDS:
        raise SheetError(f"too many terms: the operator would have {words} after expansion, the limit is {MOST_WORDS}",
                         mend="multiply fewer sums with each other")  # fmt: skip
    if order > LARGEST_ORDER:
        raise SheetError(f"the order of the operator is {order}, the limit is {LARGEST_ORDER}",
                         mend="use lower powers of p or D")  # fmt: skip


def multiplication(value: Function | Term | Scalar | complex, setting: Setting) -> Operator:
    """Return multiplication by a function or a number."""
    term = value if isinstance(value, Term) else as_term(value)
    return Operator(gathered([word(ONE, (term,))]), setting)


def differentiation(setting: Setting) -> Operator:
    """Return D = d/dx."""
    return Operator((Word(ONE, (UNIT, UNIT)),), setting)


def momentum(setting: Setting) -> Operator:
    """Return p = -i hbar d/dx."""
    return Operator((Word(Scalar(-1j) * setting.hbar, (UNIT, UNIT)),), setting)


def position(setting: Setting) -> Operator:
    """Return multiplication by the coordinate."""
    return multiplication(COORDINATE, setting)


def total(operators: Iterable[tuple[int, Operator]], setting: Setting) -> Operator:
    """Return the sum of operators with signs +1 or -1."""
    words = [Word(w.coefficient if sign > 0 else -w.coefficient, w.slots) for sign, o in operators for w in o.words]
    check_size(len(words), 0)
    return Operator(gathered(words), setting)
