"""What a sheet says, as data: expressions and statements, each with its place in the text.

Nothing here evaluates anything. Every node is frozen and carries `span`, the characters it came from.
"""

from __future__ import annotations

from dataclasses import dataclass

from specterm.errors import Span


@dataclass(frozen=True, slots=True)
class Node:
    """The base of all expression nodes."""

    span: Span


@dataclass(frozen=True, slots=True)
class Number(Node):
    """A number as written; `unit` is the text between the brackets behind it (blanks stripped), or None."""

    value: float
    unit: str | None = None


@dataclass(frozen=True, slots=True)
class Name(Node):
    """A name: the user's, a coordinate, a momentum, a constant."""

    name: str


@dataclass(frozen=True, slots=True)
class Unary(Node):
    """`-a` or `+a` or `not a`; `operator` is "-", "+" or "not"."""

    operator: str
    operand: Node


@dataclass(frozen=True, slots=True)
class Binary(Node):
    """`a + b` and the like; `operator` is one of + - * / ^ and or (`**` reads as ^)."""

    operator: str
    left: Node
    right: Node


@dataclass(frozen=True, slots=True)
class Compare(Node):
    """A chain of comparisons, `0 < x < 2`; `operators` among < <= > >= == !=, one fewer than `operands`."""

    operators: tuple[str, ...]
    operands: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Call(Node):
    """`name(a, b, ...)`; `name` is as written, synonyms are resolved later. `level(2)` and `dagger(A)` are calls too."""

    name: str
    arguments: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class ForeignLevel(Node):
    """`level(n) of "other.sheet"`; `path` is relative to the sheet."""

    index: Node
    path: str


@dataclass(frozen=True, slots=True)
class Table(Node):
    """`table("scan.csv", "R" [angstrom], "E" [cm^-1], linear, hold)`.

    `columns` are (header or number from 1, unit or None): coordinate, values, and an imaginary part where there are three;
    `smooth` is False for `linear`;
    `outside` is "error", "hold" or "extend".
    """

    path: str
    columns: tuple[tuple[str | int, str | None], ...]
    smooth: bool = True
    outside: str = "error"


@dataclass(frozen=True, slots=True)
class UnitsStatement:
    """`units: energy meV, length nm, mass m_e`: pairs of (quantity, unit)."""

    pairs: tuple[tuple[str, str], ...]
    span: Span


@dataclass(frozen=True, slots=True)
class Definition:
    """`name = expression`; `name_span` is where the name stands, `span` the whole statement."""

    name: str
    expression: Node
    name_span: Span
    span: Span


@dataclass(frozen=True, slots=True)
class DomainStatement:
    """`x in (a, b), free` and its kin.

    `shape` is "interval", "ring" or "layers"; `left` and `right` are expressions (None for "layers"; `inf` and `-inf` are
    the name `inf`). `free_left`/`free_right` say which ends have zero slope; `phase` is the Bloch phase in units of 2 pi,
    or None.
    """

    coordinate: str
    shape: str
    left: Node | None
    right: Node | None
    free_left: bool
    free_right: bool
    phase: Node | None
    coordinate_span: Span
    span: Span


@dataclass(frozen=True, slots=True)
class LayersBlock:
    """`layers x from a: thickness, V, m` with rows of cells; `start` is None where the block starts at 0.

    `columns` are (name, unit or None, span); the first is the thickness. Every row has as many cells as there are columns.
    """

    coordinate: str
    start: Node | None
    columns: tuple[tuple[str, str | None, Span], ...]
    rows: tuple[tuple[Node, ...], ...]
    span: Span


@dataclass(frozen=True, slots=True)
class StateStatement:
    """`state NAME = expression`."""

    name: str
    expression: Node
    name_span: Span
    span: Span


@dataclass(frozen=True, slots=True)
class Sheet:
    """A whole sheet: its text and its statements, in the order written."""

    text: str
    units: UnitsStatement | None
    definitions: tuple[Definition, ...]
    domains: tuple[DomainStatement, ...]
    layers: tuple[LayersBlock, ...]
    states: tuple[StateStatement, ...]
    diagonalise: Name | None
