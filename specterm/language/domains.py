"""The domain of the coordinate: `x in (a, b)` and its kin."""

from __future__ import annotations

from dataclasses import dataclass

from specterm.language.catalogue import refuse
from specterm.language.cursor import Cursor
from specterm.language.nodes import DomainStatement, Node
from specterm.language.parser import WORDS, expression, leftover
from specterm.language.suggest import nearest

_OPTIONS = ("free", "phase", "outgoing")
_SHAPES = ("ring", "layers", "lattice")


@dataclass(slots=True)
class _Options:
    """What is said behind the domain."""

    free_left: bool = False
    free_right: bool = False
    phase: Node | None = None


def parse_domain(cursor: Cursor) -> DomainStatement:
    """Return the domain whose statement starts at the cursor: the coordinate, `in`, and one of the forms."""
    coordinate = cursor.take()
    if coordinate.text in WORDS:
        raise refuse("reserved-word", coordinate.span, name=coordinate.text)
    cursor.take()
    shape, left, right = _shape(cursor)
    options = _Options()
    while cursor.accept("op", ","):
        _option(cursor, shape, options)
    if not cursor.done():
        raise cursor.unexpected("',' or the end of the statement")
    return DomainStatement(
        coordinate.text,
        shape,
        left,
        right,
        options.free_left,
        options.free_right,
        options.phase,
        coordinate.span,
        cursor.span_from(coordinate.start),
    )


def _shape(cursor: Cursor) -> tuple[str, Node | None, Node | None]:
    """Read `(a, b)`, `ring(a, b)` or `layers`; return the shape and the ends."""
    token = cursor.now
    if token.kind == "unit":
        raise refuse("square-domain", token.span, inside=token.text)
    if cursor.sees("op", "("):
        return ("interval", *_ends(cursor))
    if token.kind != "name":
        raise cursor.unexpected("a domain: `(a, b)`, `ring(a, b)` or `layers`")
    cursor.take()
    if token.text == "layers":
        return "layers", None, None
    if token.text == "lattice":
        raise refuse("not-yet", token.span, what="`lattice(...)`")
    if token.text == "ring":
        if not cursor.sees("op", "("):
            raise cursor.unexpected("'(' and the two ends of the ring")
        return ("ring", *_ends(cursor))
    raise refuse("unknown-domain", token.span, found=token.text, near=nearest(token.text, _SHAPES))


def _ends(cursor: Cursor) -> tuple[Node, Node]:
    """Read `(a, b)`."""
    cursor.take()
    left = expression(cursor)
    if not cursor.accept("op", ","):
        raise leftover(cursor, "',' and the right end of the domain")
    right = expression(cursor)
    if not cursor.accept("op", ")"):
        raise leftover(cursor, "')'")
    return left, right


def _option(cursor: Cursor, shape: str, options: _Options) -> None:
    """Read `free`, `free left`, `free right` or `phase EXPRESSION`."""
    token = cursor.expect("name", "", "`free`, `free left`, `free right` or `phase`")
    if token.text == "outgoing":
        raise refuse("not-yet", token.span, what="`outgoing`")
    if token.text == "phase":
        if shape != "ring":
            raise refuse("phase-without-ring", token.span)
        if options.phase is not None:
            raise refuse("option-twice", token.span, name="phase")
        options.phase = expression(cursor)
        if not (cursor.done() or cursor.sees("op", ",")):
            raise leftover(cursor, "',' or the end of the statement")
    elif token.text == "free":
        if shape == "ring":
            raise refuse("free-ring", token.span)
        _free(cursor, options)
    else:
        raise refuse("unknown-option", token.span, found=token.text, near=nearest(token.text, _OPTIONS))


def _free(cursor: Cursor, options: _Options) -> None:
    """Read which ends are free; both, where neither is named."""
    side = cursor.take().text if cursor.sees("name", "left", "right") else ""
    options.free_left |= side != "right"
    options.free_right |= side != "left"
