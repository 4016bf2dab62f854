"""The three ways in: bytes of a file, the text of a sheet, the text of one expression."""

from __future__ import annotations

from specterm.language.catalogue import refuse
from specterm.language.cursor import Cursor
from specterm.language.lexer import MAX_TEXT, check_text, lines
from specterm.language.nodes import Node, Sheet
from specterm.language.parser import whole_expression
from specterm.language.statements import parse_sheet

_BOM = b"\xef\xbb\xbf"


def parse(text: str) -> Sheet:
    """Return the sheet that `text` says.

    Takes time linear in the length of the text. Raises SheetError, whose span points into `text`, at the first thing
    that cannot be understood, and at once where the text is beyond the limits (1 MB, nesting 200).
    """
    return parse_sheet(text)


def parse_expression(text: str, *, state: bool = False) -> Node:
    """Return the tree of one expression, as behind `--set NAME=` or for an observable; raise SheetError as `parse` does.

    With `state`, `level(n) of "other.sheet"` is allowed.
    """
    check_text(text)
    found = lines(text)
    first = next(found, None)
    if first is None:
        raise refuse("no-expression", None)
    node = whole_expression(Cursor(text, first.tokens), state=state)
    second = next(found, None)
    if second is not None:
        raise refuse("one-expression", second.tokens[0].span)
    return node


def decode(data: bytes) -> str:
    """Return the text of a sheet's bytes: UTF-8, a byte order mark dropped, CRLF made a plain newline.

    Raises SheetError where the data is too large or not UTF-8, naming line and column (in bytes) of the first bad byte.
    """
    if len(data) > MAX_TEXT:
        raise refuse("too-large", None, limit=f"{MAX_TEXT:,}")
    data = data.removeprefix(_BOM)
    try:
        text = data.decode("utf-8")
    except UnicodeDecodeError as error:
        before = data[: error.start]
        line, column = before.count(b"\n") + 1, error.start - before.rfind(b"\n")
        raise refuse("not-utf8", None, byte=f"0x{data[error.start]:02x}", line=line, column=column) from None
    return text.replace("\r\n", "\n")
