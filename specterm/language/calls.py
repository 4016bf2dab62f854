"""The two calls with a shape of their own: `table("file", ...)` and `level(n) of "file"`."""

from __future__ import annotations

from specterm.language.catalogue import refuse
from specterm.language.cursor import Cursor
from specterm.language.lexer import Token
from specterm.language.nodes import Call, ForeignLevel, Table
from specterm.language.suggest import nearest

MAX_COLUMN = 10_000

_OPTIONS = ("linear", "hold", "extend")


def parse_foreign(cursor: Cursor, call: Call) -> ForeignLevel:
    """Return `level(n) of "other.sheet"`; the cursor stands at `of`, behind the call."""
    word = cursor.take()
    if call.name != "level" or len(call.arguments) != 1:
        raise refuse("foreign-form", word.span)
    path = _path(cursor)
    return ForeignLevel(cursor.span_from(call.span.start), call.arguments[0], path)


def parse_table(cursor: Cursor, name: Token) -> Table:
    """Return the table whose name has been taken; the cursor stands at its open bracket."""
    cursor.take()
    path = _path(cursor)
    columns: list[tuple[str | int, str | None]] = []
    options: dict[str, Token] = {}
    while cursor.accept("op", ","):
        if cursor.sees("name"):
            token = cursor.take()
            _check_option(token, options)
            options[token.text] = token
        elif options:
            raise cursor.unexpected("`linear`, `hold` or `extend`")
        else:
            columns.append(_column(cursor))
    if not cursor.sees("op", ")"):
        raise cursor.unexpected("',' or ')'")
    cursor.take()
    span = cursor.span_from(name.start)
    if len(columns) not in {0, 2, 3}:
        raise refuse("table-columns", span, count=len(columns))
    outside = "hold" if "hold" in options else "extend" if "extend" in options else "error"
    return Table(span, path, tuple(columns) or ((1, None), (2, None)), "linear" not in options, outside)


def _path(cursor: Cursor) -> str:
    """Return the file's name that must stand here, in double quotes."""
    token = cursor.expect("string", "", "a file's name in double quotes")
    if not token.text.strip():
        raise refuse("empty-path", token.span)
    return token.text


def _column(cursor: Cursor) -> tuple[str | int, str | None]:
    """Return a column, given by its header or its number from 1, with the unit behind it."""
    token = cursor.now
    column: str | int
    if cursor.accept("string"):
        column = token.text
    elif cursor.accept("number"):
        if not token.text.isdigit() or len(token.text) > 5 or not 1 <= int(token.text) <= MAX_COLUMN:
            raise refuse("column-number", token.span, found=token.text)
        column = int(token.text)
    else:
        raise cursor.unexpected("a column (its header in double quotes, or its number)")
    return column, cursor.take().text if cursor.sees("unit") else None


def _check_option(token: Token, options: dict[str, Token]) -> None:
    """Refuse an option of a table that is unknown, repeated, or contradicts another."""
    if token.text not in _OPTIONS:
        raise refuse("table-option", token.span, found=token.text, near=nearest(token.text, _OPTIONS))
    if token.text in options or (token.text != "linear" and {"hold", "extend"} & set(options)):
        raise refuse("table-option-twice", token.span)
