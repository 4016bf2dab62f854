"""The weak form of an operator, and its reduction to a Sturm-Liouville form."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from specterm.errors import PhysicsError
from specterm.model.function import Function
from specterm.model.normal import Ordering, Pairs, collect, vanishes
from specterm.model.scalar import ONE, Scalar
from specterm.model.setting import Setting
from specterm.model.term import UNIT, Term, linear, multiply, spread
from specterm.model.word import Word

_NO_JUMPS = "write the operator so that the jump is not differentiated: p*f*p instead of f*p^2 or (f*p^2 + p^2*f)/2"


@dataclass(frozen=True)
class Form:
    """The sum over ((j, k), c) of the integrals of conj(D^j f) c(x) D^k g, sorted by (j, k); hbar is inside c."""

    terms: tuple[tuple[tuple[int, int], Function], ...]

    def __getitem__(self, key: tuple[int, int]) -> Function | None:
        """Return the coefficient of one pair of derivatives, None where there is none."""
        return dict(self.terms).get(key)


@dataclass(frozen=True)
class Sturm:
    """Real functions of the form: integral of K |f'|^2 - (i/2) B (f* f' - f*' f) + V |f|^2; B is None where it is zero."""

    K: Function
    B: Function | None
    V: Function


def form(words: Sequence[Word], setting: Setting) -> Form:
    """Return the weak form. Each word is split where no function that jumps is differentiated, then evenly, then cheaply.

    Two equally good splits are averaged, so that a Hermitian word has a Hermitian form. Boundary terms are left out: they
    vanish at walls and on rings and are the natural condition of free ends.
    """
    total: dict[tuple[int, int], Pairs] = {}
    ordering = Ordering()
    for word in words:
        choices = _best_splits(word, ordering)
        share = Scalar(1.0 / len(choices))
        for split in choices:
            for key, pairs in split.items():
                total.setdefault(key, []).extend((c * share * word.coefficient, t) for c, t in pairs)
    live = {key: kept for key, pairs in sorted(total.items()) if (kept := collect(pairs))}
    domain = setting.domain
    return Form(tuple((key, Function(linear(p))) for key, p in live.items() if len(p) == 1 or not vanishes(p, domain)))


Split = dict[tuple[int, int], Pairs]


def _best_splits(word: Word, ordering: Ordering) -> list[Split]:
    """Return the cheapest splits, tried from the even one outwards until one differentiates no jump."""
    best: tuple[tuple[int, int, int], list[Split]] | None = None
    for moved in sorted(range(word.order + 1), key=lambda m: max(m, word.order - m)):
        highest = max(moved, word.order - moved)
        if best is not None and best[0][0] == 0 and best[0][1] < highest:
            break
        split = _split(word.slots, moved, ordering)
        pairs = [t for part in split.values() for _, t in part]
        cost = (int(any(t.broken for t in pairs)), highest, len(pairs))
        if best is None or cost < best[0]:
            best = (cost, [split])
        elif cost == best[0]:
            best[1].append(split)
    return best[1] if best else []


def _split(slots: tuple[Term, ...], moved: int, ordering: Ordering) -> Split:
    """Return the word with its first `moved` derivatives taken to the left side by parts."""
    left = ordering.word((UNIT, *reversed(slots[:moved])))
    right = ordering.word((UNIT, *slots[moved + 1 :]))
    sign = Scalar((-1.0) ** moved)
    return {
        (j, k): [(sign * a * b, multiply(s, slots[moved], t)) for a, s in pairs for b, t in others]
        for j, pairs in left.items()
        for k, others in right.items()
    }


def sturm(words: Sequence[Word], setting: Setting) -> Sturm:
    """Return K, B and V of a Hermitian operator of order at most 2 (the caller has tested both).

    Raises PhysicsError where the jump of a function would have to be differentiated.
    """
    weak = dict(form(words, setting).terms)
    if any(max(key) > 1 for key in weak):
        raise PhysicsError("a function that jumps stands beside a second derivative", mend=_NO_JUMPS)
    zero = Function(linear([]))
    f, g = weak.get((0, 1), zero), weak.get((1, 0), zero)
    drift = _real(_combined([(Scalar(1j), f), (Scalar(-1j), g)]))
    slope = _combined([(Scalar(-0.5), f), (Scalar(-0.5), g)]).derivative()
    potential = _real(_combined([(ONE, weak.get((0, 0), zero)), (ONE, slope)]))
    if potential.has_edge or drift.has_edge:
        raise PhysicsError("the jump of a function is differentiated in this operator", mend=_NO_JUMPS)
    is_zero = drift.constant == 0 or vanishes(spread(ONE, drift.term), setting.domain)
    return Sturm(_real(weak.get((1, 1), zero)), None if is_zero else drift, potential)


def _combined(parts: Iterable[tuple[Scalar, Function]]) -> Function:
    return Function(linear(pair for c, f in parts for pair in spread(c, f.term)))


def _real(function: Function) -> Function:
    return function if function.term.real else function.real()
