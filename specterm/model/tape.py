"""Evaluating a term on an array: the graph becomes a straight list of numpy calls, each shared term computed once."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specterm.errors import PhysicsError
from specterm.model.arrays import Values
from specterm.model.compose import COMPARISONS
from specterm.model.elementary import FUNCTIONS
from specterm.model.term import UNIT, Term
from specterm.model.walk import leaves_first
from specterm.stopping import check


@dataclass(frozen=True)
class Instruction:
    """One call: `run(*inputs)` gives register `out`; `done` are the registers nobody needs afterwards."""

    run: Callable[..., Values]
    inputs: tuple[int, ...]
    out: int
    done: tuple[int, ...]


@dataclass(frozen=True)
class Tape:
    """A compiled term. Registers 0.. hold constants at the start; `place` is the register of the coordinate, or -1."""

    start: tuple[Values, ...]
    instructions: tuple[Instruction, ...]
    place: int
    result: int

    def __call__(self, x: NDArray[np.float64]) -> Values:
        """Return the values at x, or a number where nothing depends on x."""
        registers = list(self.start)
        if self.place >= 0:
            registers[self.place] = x
        with np.errstate(all="ignore"):
            for step in self.instructions:
                check()
                registers[step.out] = step.run(*[registers[k] for k in step.inputs])
                for k in step.done:
                    registers[k] = None
        return registers[self.result]


def compile_term(root: Term) -> Tape:
    """Return the tape of a term; a formal derivative at a jump cannot be evaluated (PhysicsError)."""
    if root.broken:
        raise PhysicsError(
            "a function that jumps is differentiated here, and its derivative has no values",
            mend="write the operator so that the jump is not differentiated, p*f*p instead of f*p^2",
        )
    order = leaves_first(root)
    place = {term.digest: k for k, term in enumerate(order)}
    last = {place[a.digest]: k for k, term in enumerate(order) for a in term.args if a.kind != "constant"}
    gone: dict[int, list[int]] = {}
    for register, user in last.items():
        gone.setdefault(user, []).append(register)
    start = tuple(t.data.value if t.kind == "constant" else None for t in order)
    instructions = tuple(
        Instruction(runner(t), tuple(place[a.digest] for a in t.args) or (-1,), k, tuple(gone.get(k, ())))
        for k, t in enumerate(order)
        if t.kind not in ("constant", "coordinate")
    )
    return _with_coordinate(order, start, instructions)


def _with_coordinate(order: Sequence[Term], start: tuple[Values, ...], instructions: tuple[Instruction, ...]) -> Tape:
    """Give the coordinate a register: its own, or one more where only tables and layers use it."""
    where = next((k for k, t in enumerate(order) if t.kind == "coordinate"), len(order))
    kept = tuple(
        Instruction(i.run, tuple(where if k == -1 else k for k in i.inputs), i.out, tuple(k for k in i.done if k != where))
        for i in instructions
    )
    return Tape((*start, None) if where == len(order) else start, kept, where, len(order) - 1)


def runner(term: Term) -> Callable[..., Values]:
    """Return the numpy call for one term: its arguments' values in, its values out (pieces and splines take the coordinate)."""
    return _RUNNERS[term.kind](term)


def _sum(term: Term) -> Callable[..., Values]:
    coefficients = tuple(c.value for c in term.data)
    constants = tuple(a == UNIT for a in term.args)

    def run(*values: Values) -> Values:
        total: Values = None
        for c, v, bare in zip(coefficients, values, constants, strict=True):
            if total is None:
                total = c if bare else (v if c == 1 else c * v)
            elif c == -1:
                total = total - v
            else:
                total = total + (c if bare else (v if c == 1 else c * v))
        return total

    return run


def _product(_term: Term) -> Callable[..., Values]:
    def run(*values: Values) -> Values:
        total = values[0]
        for v in values[1:]:
            total = total * v
        return total

    return run


def _power(term: Term) -> Callable[..., Values]:
    exponent = term.data

    def run(base: Values) -> Values:
        result, square, n = None, base, exponent
        while n:
            if n & 1:
                result = square if result is None else result * square
            n >>= 1
            if n:
                square = square * square
        return result

    return run


def _compare(term: Term) -> Callable[..., Values]:
    function = COMPARISONS[term.data]
    return lambda a, b: np.where(np.isnan(a) | np.isnan(b), np.nan, function(a, b))


def _logic(term: Term) -> Callable[..., Values]:
    functions: dict[str, Callable[..., Values]] = {
        "and": lambda a, b: np.logical_and(a != 0, b != 0).astype(float),
        "or": lambda a, b: np.logical_or(a != 0, b != 0).astype(float),
        "not": lambda a: np.equal(a, 0).astype(float),
    }
    return functions[term.data]


def _choice(_term: Term) -> Callable[..., Values]:
    return lambda c, a, b: np.where(np.isnan(c), np.nan, np.where(np.not_equal(c, 0), a, b))


_RUNNERS: dict[str, Callable[[Term], Callable[..., Values]]] = {
    "sum": _sum,
    "product": _product,
    "quotient": lambda _t: np.divide,
    "power": _power,
    "raise": lambda _t: np.power,
    "call": lambda t: FUNCTIONS[t.data].value,
    "compare": _compare,
    "logic": _logic,
    "where": _choice,
    "real": lambda _t: np.real,
    "imaginary": lambda _t: np.imag,
    "pieces": lambda t: t.data.values_at,
    "spline": lambda t: t.data.values_at,
}
