"""Operators: sums of words, a word being a product of functions and derivatives D = d/dx in a definite order."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property

from specterm.model.form import Form, Sturm, form, sturm
from specterm.model.function import Function, as_term
from specterm.model.hermitian import NotHermitian, hermitian
from specterm.model.normal import Normal, normal_order, vanishes
from specterm.model.scalar import ONE, Scalar
from specterm.model.setting import Setting
from specterm.model.term import COORDINATE, UNIT, Term, linear, multiply
from specterm.model.word import Word, check_size, gathered, word


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
        return Operator(tuple(w.negative() for w in self.words), self.setting)

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
        return normal_order((w.coefficient, w.slots) for w in self.words)

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
        return hermitian(self.words, self.setting)

    def form(self) -> Form:
        """Return the weak form (see `specterm.model.form.form`)."""
        return form(self.words, self.setting)

    def sturm(self) -> Sturm:
        """Return the real functions K, B and V of a Hermitian operator of order <= 2 (see `specterm.model.form.sturm`)."""
        return self._sturm

    @cached_property
    def _sturm(self) -> Sturm:
        """K, B and V, found once."""
        return sturm(self.words, self.setting)


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
    words = [w if sign > 0 else w.negative() for sign, o in operators for w in o.words]
    check_size(len(words), 0)
    return Operator(gathered(words), setting)
