"""The one indented block of the language: `layers`."""

from __future__ import annotations

from specterm.errors import Span
from specterm.language.catalogue import refuse
from specterm.language.cursor import Cursor
from specterm.language.lexer import Line, Token, lines
from specterm.language.nodes import LayersBlock, Node
from specterm.language.parser import WORDS, expression, leftover, whole_expression

MAX_COLUMNS = 100


class Lines:
    """The statements of a sheet with one of them in sight before it is taken."""

    def __init__(self, text: str) -> None:
        """Look at the first statement only when it is asked for."""
        self.text = text
        self._rest = lines(text)
        self._next: Line | None = None

    def peek(self) -> Line | None:
        """Return the next statement, or None at the end of the sheet."""
        if self._next is None:
            self._next = next(self._rest, None)
        return self._next

    def take(self) -> Line | None:
        """Return the next statement and go on behind it."""
        line, self._next = self.peek(), None
        return line


def parse_layers(cursor: Cursor, stream: Lines) -> LayersBlock:
    """Return the block whose header is at the cursor; its rows, indented more than the header, are taken from `stream`."""
    begin = cursor.take()
    coordinate = cursor.take()
    if coordinate.text in WORDS:
        raise refuse("reserved-word", coordinate.span, name=coordinate.text)
    start = expression(cursor) if cursor.accept("name", "from") else None
    if not cursor.accept("op", ":"):
        wanted = "':' and the names of the columns"
        raise cursor.unexpected(wanted) if start is None else leftover(cursor, wanted)
    columns = _columns(cursor)
    rows: list[tuple[Node, ...]] = []
    end = cursor.before.end
    base = _indent_of_line(cursor.text, begin.start)
    while (line := stream.peek()) is not None and line.indent > base:
        stream.take()
        rows.append(_row(cursor.text, line.tokens, len(columns)))
        end = line.tokens[-2].end
    if not rows:
        raise refuse("no-rows", Span(begin.start, end))
    return LayersBlock(coordinate.text, start, tuple(columns), tuple(rows), Span(begin.start, end))


def _indent_of_line(text: str, offset: int) -> int:
    """Return the indentation, in columns, of the line that holds a character."""
    line = text[text.rfind("\n", 0, offset) + 1 : offset]
    return len(line.expandtabs(8)) - len(line.expandtabs(8).lstrip())


def _columns(cursor: Cursor) -> list[tuple[str, str | None, Span]]:
    """Read the names of the columns, each with the unit behind it."""
    columns: list[tuple[str, str | None, Span]] = []
    while True:
        name = cursor.expect("name", "", "the name of a column")
        if name.text in WORDS:
            raise refuse("reserved-word", name.span, name=name.text)
        unit = cursor.take().text if cursor.sees("unit") else None
        columns.append((name.text, unit, name.span))
        if len(columns) > MAX_COLUMNS:
            raise refuse("too-many-columns", name.span, limit=MAX_COLUMNS)
        if not cursor.accept("op", ","):
            break
    if not cursor.done():
        raise cursor.unexpected("',' or the end of the header")
    if columns[0][0] != "thickness":
        raise refuse("first-column", columns[0][2], found=columns[0][0])
    return columns


def _row(text: str, tokens: list[Token], wanted: int) -> tuple[Node, ...]:
    """Return the cells of one row: expressions separated by blanks (inside brackets blanks do not count)."""
    cells = _cells(tokens)
    if len(cells) != wanted:
        span = Span(tokens[0].start, tokens[-2].end)
        raise refuse("row-length", span, found=len(cells), wanted=wanted)
    return tuple(whole_expression(Cursor(text, cell)) for cell in cells)


def _cells(tokens: list[Token]) -> list[list[Token]]:
    """Cut a row's tokens at the blanks outside brackets; each cell is closed by an `end` token."""
    cells: list[list[Token]] = [[]]
    depth = 0
    for token in tokens[:-1]:
        if cells[-1] and depth == 0 and token.start > cells[-1][-1].end:
            cells.append([])
        depth += {"(": 1, ")": -1}.get(token.text, 0) if token.kind == "op" else 0
        cells[-1].append(token)
    return [[*cell, Token("end", "", cell[-1].end, cell[-1].end + 1)] for cell in cells]
