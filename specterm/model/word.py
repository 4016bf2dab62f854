"""Words: products of functions and derivatives in a definite order, the parts of an operator."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from specterm.language.catalogue import refuse
from specterm.model.compose import conjugate
from specterm.model.scalar import ONE, Scalar
from specterm.model.term import NIL, Term, linear, split

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

    def negative(self) -> Word:
        """Return minus the word."""
        return Word(-self.coefficient, self.slots)

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


def check_size(words: int, order: int) -> None:
    """Refuse an operator above the limits (SheetError) before it is expanded."""
    if words > MOST_WORDS:
        raise refuse("too-many-terms", None, limit=MOST_WORDS)
    if order > LARGEST_ORDER:
        raise refuse("order-too-high", None, found=order, limit=LARGEST_ORDER)
