"""Is an operator its own formal adjoint, and if not, what could be written instead."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from specterm.model.function import Function
from specterm.model.normal import normal_order, vanishes
from specterm.model.setting import Setting
from specterm.model.term import UNIT, Term, scaled
from specterm.model.text import show
from specterm.model.word import Word, gathered
from specterm.model.wordtext import show_word


@dataclass(frozen=True)
class NotHermitian:
    """Why an operator is not Hermitian (`reason`) and the form to use instead (`mend`)."""

    reason: str
    mend: str


def hermitian(words: Sequence[Word], setting: Setting) -> NotHermitian | None:
    """Return None where the sum of words equals its adjoint formally, boundary terms aside.

    Equal words cancel exactly first. The rest is normal ordered and compared at sample places, to 1e-10 of the sum of
    |terms|; functions that jump count as generic there: their formal derivatives take arbitrary values.
    """
    difference = gathered([*words, *(w.adjoint().negative() for w in words)])
    if not difference:
        return None
    normal = normal_order((w.coefficient, w.slots) for w in difference)
    if all(vanishes(pairs, setting.domain) for pairs in normal.values()):
        return None
    return _refusal(words, setting)


def _refusal(every: Sequence[Word], setting: Setting) -> NotHermitian:
    words = [w for w in every if w.adjoint() != w and not _partner(w, every)] or every
    bad = [w for w in words if w.order] or words
    complex_slots = [s for w in bad for s in _complex_slots(w)]
    if complex_slots:
        function = show(complex_slots[0], setting.coordinate, setting.labels)
        return NotHermitian(
            f"the operator is not Hermitian: the function {function} is complex",
            "use a real function, or add the conjugate: (A + dagger(A))/2 is Hermitian for every A",
        )
    shown = show_word(bad[0].coefficient, bad[0].slots, setting)
    return NotHermitian(f"the operator is not Hermitian: {shown} is not its own adjoint", _mend(bad[0], setting))


def _partner(word: Word, every: Sequence[Word]) -> bool:
    """Say whether the adjoint of the word stands in the sum with the same weight."""
    mirror = word.adjoint()
    for w in every:
        if w.slots == mirror.slots:
            gap = w.coefficient - mirror.coefficient
            return abs(gap.value) <= gap.slack
    return False


def _complex_slots(word: Word) -> list[Term]:
    found = [s for s in word.slots if not s.broken and not Function(s).is_real]
    if not word.order and not word.coefficient.is_real:
        found.append(scaled(word.coefficient, word.slots[0]))
    return found


def _mend(word: Word, setting: Setting) -> str:
    factors = [s for s in word.slots if s != UNIT]
    if _is_imaginary(word):
        return "its coefficient has the wrong phase: p and i*D are Hermitian, D and i*p are not"
    if word.order == 2 and len(factors) == 1 and factors[0] != word.slots[1]:
        return f"use the symmetric form {show_word(word.coefficient, (UNIT, factors[0], UNIT), setting)}"
    shown, mirror = show_word(word.coefficient, word.slots, setting), word.adjoint()
    return f"use the symmetric form ({shown} + {show_word(mirror.coefficient, mirror.slots, setting)})/2"


def _is_imaginary(word: Word) -> bool:
    """Say whether the coefficient turns its sign on taking the adjoint of a word of equal slots."""
    mirror = word.adjoint()
    total = word.coefficient + mirror.coefficient
    return mirror.slots == word.slots and abs(total.value) <= total.slack
