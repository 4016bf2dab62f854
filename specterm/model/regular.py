"""The pointwise derivative of a function: what is left of the formal one between the places where the function jumps."""

from __future__ import annotations

from specterm.model.function import Function
from specterm.model.term import NIL, Term, divide, linear, make, multiply
from specterm.model.walk import leaves_first


def regular_slope(function: Function) -> Function:
    """Return the derivative with the pulses at jumps left out, so that it has values on either side of every jump."""
    return regular_part(function.derivative())


def regular_part(function: Function) -> Function:
    """Return the function with formal derivatives of jumping parts, which are zero between the jumps, taken out."""
    return Function(_without_edges(function.term)) if function.has_edge else function


def _without_edges(root: Term) -> Term:
    new: dict[int, Term] = {}
    for term in leaves_first(root):
        new[term.digest] = _rebuilt(term, tuple(new[a.digest] for a in term.args)) if term.broken else term
    return new[root.digest]


def _rebuilt(term: Term, args: tuple[Term, ...]) -> Term:
    """Return one term over new arguments."""
    if term.kind == "edge":
        return NIL
    if term.kind == "sum":
        return linear(zip(term.data, args, strict=True))
    if term.kind == "product":
        return multiply(*args)
    if term.kind == "quotient":
        return divide(*args)
    return make(term.kind, args, term.data, real=term.real)
