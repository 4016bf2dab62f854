"""A model with one number of its sheet moved a little, and what of it enters the Rayleigh quotient."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np

from specterm.arrays import Array
from specterm.discrete.reduce import integral
from specterm.errors import SheetError, Span
from specterm.language.edits import plain_numbers, step_of
from specterm.language.nodes import Definition, Name, Node, Number, Sheet, Unary
from specterm.language.order import names
from specterm.model import Function, Model, build
from specterm.model.function import number

SAME = 8 * float(np.finfo(float).eps)
"""Places that differ by this share of the largest are one place."""


@dataclass(frozen=True)
class Shape:
    """What the quotient of one model is made of.

    `terms`: ((j, k), c) for integrals of conj(D^j f) c D^k f; for operators of second order the first-order term has been taken
    into the others and into the `phase` psi collects around a ring (radians, not reduced; None off a ring). `anchors`: the
    finite ends and every place inside where something jumps, ascending. There is always a term (0, 0).
    """

    terms: tuple[tuple[tuple[int, int], Function], ...]
    anchors: Array
    ends: tuple[float, float]
    phase: float | None

    @property
    def highest(self) -> int:
        """The highest derivative taken on one side."""
        return max(max(key) for key, _ in self.terms)

    def same(self, other: Shape) -> bool:
        """Say whether the quotients are the same."""
        return self.terms == other.terms and self.ends == other.ends and self.phase == other.phase


def shape_of(model: Model) -> Shape:
    """Return the shape of a model whose main operator is of order two or more; PhysicsError where a jump is differentiated."""
    domain, operator = model.domain, model.operator
    ends = (domain.left, domain.right)
    turn = 2 * math.pi * (domain.phase or 0.0) if domain.is_ring else None
    terms, marked = operator.form().terms if operator.order > 2 else (), []
    if (0, 0) not in dict(terms):
        terms = (((0, 0), number(0.0)), *terms)
    if operator.order == 2:
        sturm = operator.sturm()
        potential = sturm.V
        if sturm.B is not None:
            potential = potential - sturm.B * sturm.B / (4 * sturm.K)
            twist = sturm.B / (-2 * sturm.K)
            marked = [twist]
            turn = None if turn is None else turn - integral(twist, *ends, twist.edges(*ends))
        terms = (((0, 0), potential), ((1, 1), sturm.K))
    edges = [f.edges(*ends) for f in (*(c for _, c in terms), *marked)]
    finite = np.array([end for end in ends if math.isfinite(end)])
    return Shape(terms, _apart(np.concatenate([finite, *edges])), ends, turn)


def _apart(places: Array) -> Array:
    """Return the places in ascending order, those that differ by rounding only taken once."""
    places = np.sort(places)
    kept = np.diff(places, prepend=-np.inf) > SAME * np.abs(places).max(initial=0.0)
    found: Array = places[kept]
    return found


@dataclass
class Displaced:
    """The models of one sheet with the number of definition `name` moved; each is built once."""

    like: Model
    sheet: Sheet
    folder: Path | None
    definition: Definition
    number: Written
    known: dict[float, Model | str] = field(default_factory=dict)

    def model(self, step: float) -> Model | str:
        """Return the model with the number moved by `step`, or why there is none."""
        if step not in self.known:
            try:
                self.known[step] = build(self._moved(step), folder=self.folder, like=self.like)
            except SheetError as error:
                self.known[step] = error.message
        return self.known[step]

    def _moved(self, step: float) -> Sheet:
        span, number = self.definition.expression.span, self.number
        changed = replace(self.definition, expression=Number(span, number.value + step, number.unit or None))
        return replace(
            self.sheet, definitions=tuple(changed if d is self.definition else d for d in self.sheet.definitions)
        )


@dataclass(frozen=True)
class Written:
    """A plain number as the sheet, or what overrides it, has it: value with sign, unit (or ""), a size to take steps by."""

    value: float
    unit: str
    size: float


def written_numbers(model: Model) -> dict[str, Written]:
    """Return the plain numbers of a model by name, in the order written."""
    places = plain_numbers(model.sheet)
    found = {}
    for definition in model.sheet.definitions:
        if definition.name in model.plain:
            node, sign = definition.expression, 1.0
            while isinstance(node, Unary):
                sign = -sign if node.operator == "-" else sign
                node = node.operand
            assert isinstance(node, Number)
            place = places.get(definition.name)
            step = float(step_of(place.text)) if place is not None else 1.0
            found[definition.name] = Written(sign * node.value, node.unit or "", abs(node.value) or step)
    return found


def displaced(model: Model, name: str, number: Written, folder: Path | None) -> Displaced:
    """Return the models around `model` along its plain number `name`."""
    sheet = needed(model)
    definition = next(d for d in sheet.definitions if d.name == name)
    return Displaced(model, sheet, folder, definition, number)


def needed(model: Model) -> Sheet:
    """Return the sheet without states and definitions that the main operator and the domain do not use.

    Plain numbers stay.
    """
    sheet = model.sheet
    kept = used_names(model).union(model.plain)
    return replace(
        sheet,
        definitions=tuple(d for d in sheet.definitions if d.name in kept),
        states=(),
        diagonalise=Name(Span(0, 0), model.main),
    )


def used_names(model: Model) -> set[str]:
    """Return the names that the main operator and the domain are made of."""
    sheet = model.sheet
    known = {d.name: d.expression for d in sheet.definitions}
    ask = [model.main, "hbar"]
    for statement in sheet.domains:
        ask += _used(node for node in (statement.left, statement.right, statement.phase) if node is not None)
    for block in sheet.layers:
        ask += _used([cell for row in block.rows for cell in row] + ([block.start] if block.start is not None else []))
    kept: set[str] = set()
    while ask:
        name = ask.pop()
        if name in known and name not in kept:
            kept.add(name)
            ask += _used([known[name]])
    return kept


def _used(nodes: Iterable[Node]) -> list[str]:
    return [name.name for node in nodes for name in names(node)]
