"""Statements -> a sheet: definitions, states, units, domains, layers, the operator to diagonalise."""

from __future__ import annotations

from specterm.errors import SheetError, Span, position
from specterm.language.blocks import Lines, parse_layers
from specterm.language.catalogue import refuse
from specterm.language.cursor import Cursor
from specterm.language.domains import parse_domain
from specterm.language.lexer import check_text
from specterm.language.nodes import (
    Definition,
    DomainStatement,
    LayersBlock,
    Name,
    Node,
    Sheet,
    StateStatement,
    UnitsStatement,
)
from specterm.language.parser import WORDS, whole_expression
from specterm.language.suggest import nearest

MAX_STATEMENTS = 20_000

QUANTITIES = ("energy", "length", "mass", "time")
_DIAGONALISE = ("diagonalise", "diagonalize")
_KEYWORDS = ("units", "layers", "state", *_DIAGONALISE)


class SheetBuilder:
    """Collects the statements of one sheet and refuses what is said twice."""

    def __init__(self, text: str) -> None:
        """Begin with nothing said."""
        self.text = text
        self.units: UnitsStatement | None = None
        self.definitions: list[Definition] = []
        self.domains: list[DomainStatement] = []
        self.layers: list[LayersBlock] = []
        self.states: list[StateStatement] = []
        self.diagonalise: Name | None = None
        self.said: dict[tuple[str, str], Span] = {}

    def sheet(self) -> Sheet:
        """Return what was collected; refuse an empty sheet and names that clash with a coordinate or the units."""
        if not self.said:
            raise refuse("empty", None)
        self._check_clashes()
        return Sheet(
            self.text,
            self.units,
            tuple(self.definitions),
            tuple(self.domains),
            tuple(self.layers),
            tuple(self.states),
            self.diagonalise,
        )

    def claim(self, kind: str, name: str, span: Span) -> None:
        """Note that `name` is now taken; refuse it where it was taken before."""
        first = self.said.setdefault((kind, name), span)
        if first is not span:
            line = position(self.text, first.start)[0]
            raise refuse(f"{kind}-twice", span, name=name, line=line)

    def _check_clashes(self) -> None:
        """Refuse a definition that shadows a coordinate, and `hbar =` together with units."""
        for (kind, name), span in self.said.items():
            domain = self.said.get(("domain", name)) or self.said.get(("layers", name))
            if kind == "name" and domain is not None:
                raise refuse("coordinate-defined", span, name=name, line=position(self.text, domain.start)[0])
            if kind == "name" and name == "hbar" and self.units is not None:
                raise refuse("hbar-with-units", span, line=position(self.text, self.units.span.start)[0])


def parse_sheet(text: str) -> Sheet:
    """Return the sheet that `text` says; raise SheetError at the first thing that cannot be understood."""
    check_text(text)
    stream = Lines(text)
    builder = SheetBuilder(text)
    count = 0
    while (line := stream.take()) is not None:
        count += 1
        cursor = Cursor(text, line.tokens)
        if count > MAX_STATEMENTS:
            raise refuse("too-many-statements", cursor.now.span, limit=f"{MAX_STATEMENTS:,}")
        _statement(cursor, stream, builder)
    return builder.sheet()


def _statement(cursor: Cursor, stream: Lines, builder: SheetBuilder) -> None:
    """Read one statement, told apart by its first two tokens."""
    first, second = cursor.now, cursor.ahead(1)
    if first.kind != "name":
        raise _no_statement(cursor)
    if second.kind == "op" and second.text == "=":
        _definition(cursor, builder)
    elif second.kind == "name" and second.text == "in":
        domain = parse_domain(cursor)
        builder.claim("domain", domain.coordinate, domain.coordinate_span)
        builder.domains.append(domain)
    elif first.text == "units" and second.text == ":":
        _units(cursor, builder)
    elif first.text == "layers" and second.kind == "name":
        block = parse_layers(cursor, stream)
        builder.claim("layers", block.coordinate, block.span)
        for name, _unit, span in block.columns[1:]:
            builder.claim("name", name, span)
        builder.layers.append(block)
    elif first.text == "state" and second.kind == "name":
        _state(cursor, builder)
    elif first.text in _DIAGONALISE and second.kind in {"name", "end"}:
        _diagonalise(cursor, builder)
    else:
        raise _no_statement(cursor)


def _definition(cursor: Cursor, builder: SheetBuilder) -> None:
    """Read `name = expression`."""
    name = cursor.take()
    if name.text in WORDS:
        raise refuse("reserved-word", name.span, name=name.text)
    expression = _right_side(cursor, state=False)
    builder.claim("name", name.text, name.span)
    builder.definitions.append(Definition(name.text, expression, name.span, cursor.span_from(name.start)))


def _right_side(cursor: Cursor, *, state: bool) -> Node:
    """Take the `=` and return the expression behind it."""
    cursor.take()
    if cursor.sees("name", "lattice") and cursor.ahead(1).text == "(":
        raise refuse("not-yet", cursor.now.span, what="`lattice(...)`")
    return whole_expression(cursor, state=state)


def _state(cursor: Cursor, builder: SheetBuilder) -> None:
    """Read `state NAME = expression`."""
    start = cursor.take().start
    name = cursor.take()
    if name.text in WORDS:
        raise refuse("reserved-word", name.span, name=name.text)
    if not cursor.sees("op", "="):
        raise cursor.unexpected("'='")
    expression = _right_side(cursor, state=True)
    builder.claim("name", name.text, name.span)
    builder.states.append(StateStatement(name.text, expression, name.span, cursor.span_from(start)))


def _diagonalise(cursor: Cursor, builder: SheetBuilder) -> None:
    """Read `diagonalise NAME`."""
    word = cursor.take()
    name = cursor.expect("name", "", "the name of an operator")
    if not cursor.done():
        raise cursor.unexpected("the end of the statement")
    builder.claim("diagonalise", "", word.span)
    builder.diagonalise = Name(name.span, name.text)


def _units(cursor: Cursor, builder: SheetBuilder) -> None:
    """Read `units: energy meV, length nm, mass m_e`."""
    start = cursor.take().start
    cursor.take()
    pairs: list[tuple[str, str]] = []
    while True:
        quantity = cursor.expect("name", "", "a quantity (energy, length, mass or time)")
        if quantity.text not in QUANTITIES:
            near = nearest(quantity.text, QUANTITIES)
            raise refuse("unknown-quantity", quantity.span, found=quantity.text, near=near)
        if quantity.text in dict(pairs):
            raise refuse("quantity-twice", quantity.span, name=quantity.text)
        pairs.append((quantity.text, _unit_text(cursor)))
        if not cursor.accept("op", ","):
            break
    span = cursor.span_from(start)
    builder.claim("units", "", span)
    builder.units = UnitsStatement(tuple(pairs), span)


def _unit_text(cursor: Cursor) -> str:
    """Return the text of the unit that stands here, with or without brackets, up to a comma or the end."""
    if cursor.done() or cursor.sees("op", ","):
        raise cursor.unexpected("a unit")
    if cursor.sees("unit"):
        text = cursor.take().text
    else:
        start = cursor.now.start
        while not cursor.done() and not cursor.sees("op", ","):
            cursor.take()
        text = cursor.text[start : cursor.before.end]
    if not (cursor.done() or cursor.sees("op", ",")):
        raise cursor.unexpected("',' or the end of the statement")
    return text


def _no_statement(cursor: Cursor) -> SheetError:
    """Return the error for a line that is no statement, guessing what was meant."""
    first, second = cursor.now, cursor.ahead(1)
    if first.kind != "name":
        return refuse("loose-number" if first.kind == "number" else "no-statement", first.span)
    shown, near = cursor.shown(first), nearest(first.text, _KEYWORDS)
    if first.text in {"units", "layers", "state"}:
        return refuse(f"{first.text}-form", first.span)
    if first.text in QUANTITIES and second.kind == "name":
        return refuse("units-form", first.span)
    if second.kind == "name":
        if cursor.ahead(2).text == "in" or near is None:
            return refuse("name-with-blank", first.span, found=f"{shown} {cursor.shown(second)}")
        return refuse("unknown-statement", first.span, found=shown, near=near)
    return _no_definition(cursor, near)


def _no_definition(cursor: Cursor, near: str | None) -> SheetError:
    """Return the error for a name with something behind it that makes no statement."""
    first, second = cursor.take(), cursor.now
    shown = cursor.shown(first)
    if second.text == "==":
        return refuse("double-equals", second.span, name=shown)
    if second.text == ":" and near is not None:
        return refuse("unknown-statement", first.span, found=shown, near=near)
    if second.text == "(" and any(token.text == "=" for token in cursor.tokens):
        return refuse("function-definition", first.span, name=shown)
    if second.text in {"", ":", ",", "<", ">"}:
        return cursor.unexpected("'=' or 'in'")
    return refuse("no-statement", first.span)
