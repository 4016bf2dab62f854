"""Walking a graph of terms from the leaves up, without recursion: depth costs nothing and shared terms are visited once."""

from __future__ import annotations

from collections.abc import Callable

from specterm.model.scalar import Scalar
from specterm.model.term import Term, constant, divide, linear, make, multiply
from specterm.stopping import check


def leaves_first(root: Term) -> list[Term]:
    """Return every distinct term at and below `root`, each after all those it is made of; the root comes last."""
    order: list[Term] = []
    done: set[int] = set()
    stack: list[tuple[Term, bool]] = [(root, False)]
    while stack:
        term, ready = stack.pop()
        if term.digest in done:
            continue
        if ready:
            done.add(term.digest)
            order.append(term)
            continue
        check()
        stack.append((term, True))
        stack.extend((arg, False) for arg in reversed(term.args) if arg.digest not in done)
    return order


def rebuild(root: Term, change: Callable[[Scalar], Scalar]) -> Term:
    """Return the term with every constant replaced by change(constant)."""
    new: dict[int, Term] = {}
    for term in leaves_first(root):
        args = [new[a.digest] for a in term.args]
        if term.kind == "constant":
            new[term.digest] = constant(change(term.data))
        elif term.kind == "sum":
            new[term.digest] = linear((change(c), a) for c, a in zip(term.data, args, strict=True))
        elif term.kind == "product":
            new[term.digest] = multiply(*args)
        elif term.kind == "quotient":
            new[term.digest] = divide(*args)
        elif term.real:
            new[term.digest] = term
        else:
            new[term.digest] = make(term.kind, tuple(args), term.data, real=False)
    return new[root.digest]
