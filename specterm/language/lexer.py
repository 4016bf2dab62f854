"""Text -> tokens, statement by statement, so that the first mistake in a sheet is the first one reported."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator
from typing import NamedTuple

from specterm.errors import SheetError, Span
from specterm.language.catalogue import refuse

MAX_TEXT = 1_000_000
MAX_NESTING = 200
MAX_TOKENS = 60_000
MAX_DIGITS = 400

_SUPERSCRIPTS = "⁰¹²³⁴⁵⁶⁷⁸⁹"
_TOKEN = re.compile(
    rf"""(?P<blank>[ \t\r\u00a0\u2000-\u200a\u202f\u205f\u3000]+|\A\ufeff)
    |(?P<comment>\#[^\n]*)
    |(?P<newline>\n)
    |(?P<number>(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)
    |(?P<name>[^\W\d{_SUPERSCRIPTS}][^\W{_SUPERSCRIPTS}]*)
    |(?P<string>"[^"\n]*")
    |(?P<unit>\[[^\[\]\n]*\])
    |(?P<power>[⁺⁻]?[{_SUPERSCRIPTS}]+)
    |(?P<op>\*\*|==|!=|<=|>=|[-+*/^()=<>,:;−·⋅×≤≥≠∞∈])""",
    re.VERBOSE,
)
_CONTROL = re.compile(
    r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\xad\u061c\u180e\u200b-\u200f\u2028-\u202e\u2060-\u206f\ud800-\udfff\ufff9-\ufffb"
    r"\U000e0000-\U000e007f]|\r(?!\n)|(?<=[\s\S])\ufeff"
)
"""Control characters, and those that show nothing or turn the text around so that it reads other than it is."""
_OPERATORS = {"**": "^", "−": "-", "·": "*", "⋅": "*", "×": "*", "≤": "<=", "≥": ">=", "≠": "!="}
_NAMES = {"π": "pi", "ħ": "hbar"}
_SIGNS = {"∞": "inf", "∈": "in"}
_WORDS_FOR = {"&": "and", "|": "or`, or `abs(...)", "!": "not", "~": "not"}
_TO_DIGITS = str.maketrans(_SUPERSCRIPTS, "0123456789")


class Token(NamedTuple):
    """One token: `kind` is number, name, op, string, unit or end; `text` as the parser wants it; the place in the sheet."""

    kind: str
    text: str
    start: int
    end: int

    @property
    def span(self) -> Span:
        """The characters this token came from."""
        return Span(self.start, self.end)


class Line(NamedTuple):
    """The tokens of one statement, closed by an `end` token, and its indentation (-1 where it does not start its line)."""

    tokens: list[Token]
    indent: int


def check_text(text: str) -> None:
    """Refuse a text that is too large or holds control characters, before any other work."""
    if len(text) > MAX_TEXT or (not text.isascii() and len(text.encode("utf-8", "surrogatepass")) > MAX_TEXT):
        raise refuse("too-large", None, limit=f"{MAX_TEXT:,}")
    found = _CONTROL.search(text)
    if found:
        raise refuse("control-character", Span(found.start(), found.end()), code=f"U+{ord(found[0]):04X}")


def lines(text: str) -> Iterator[Line]:
    """Yield the statements of `text`; they end at a newline or `;` outside brackets. Empty ones are left out."""
    tokens: list[Token] = []
    opened: list[Token] = []
    begin, fresh, indent, at = 0, True, 0, 0
    while at < len(text):
        match = _TOKEN.match(text, at)
        if match is None:
            raise _bad_character(text, at, tokens)
        kind, start, at = match.lastgroup, at, match.end()
        if kind in {"blank", "comment"}:
            continue
        separator = kind == "newline" or match[0] == ";"
        if separator and opened and kind != "newline":
            raise refuse("unclosed-bracket", opened[-1].span)
        if separator:
            if tokens and not opened:
                yield _line(tokens, indent)
                tokens = []
            begin, fresh = (at, True) if kind == "newline" else (begin, False)
            continue
        if not tokens:
            indent = len(text[begin:start].expandtabs(8)) if fresh else -1
        fresh = False
        if kind == "op" and match[0] in "()=":
            _match_bracket(Token("op", match[0], start, at), opened, text)
        tokens += _tokens(str(kind), match[0], start, at)
        if len(tokens) > MAX_TOKENS:
            raise refuse("too-many-nodes", tokens[0].span, limit="10,000")
    if opened:
        raise refuse("unclosed-bracket", opened[-1].span)
    if tokens:
        yield _line(tokens, indent)


def _line(tokens: list[Token], indent: int) -> Line:
    """Close a statement with its `end` token, which stands right behind the last one."""
    last = tokens[-1].end
    return Line([*tokens, Token("end", "", last, last + 1)], indent)


def _tokens(kind: str, raw: str, start: int, end: int) -> list[Token]:
    """Return the token, or the tokens, that a piece of text stands for."""
    if kind == "power":
        return _power(raw, start, end)
    if kind == "op":
        kind, text = ("name", _SIGNS[raw]) if raw in _SIGNS else (kind, _OPERATORS.get(raw, raw))
    elif kind == "name":
        text = _name(raw, start)
    elif kind == "number":
        if len(raw) > MAX_DIGITS:
            raise refuse("number-too-long", Span(start, end), limit=MAX_DIGITS)
        text = raw
    else:
        text = raw[1:-1].strip() if kind == "unit" else raw[1:-1]
    return [Token(kind, text, start, end)]


def _power(raw: str, start: int, end: int) -> list[Token]:
    """Return the tokens of a raised number: `^`, the sign, the digits."""
    sign = {"⁺": "+", "⁻": "-"}.get(raw[0])
    digits = raw.lstrip("⁺⁻").translate(_TO_DIGITS)
    signs = [Token("op", sign, start, end)] if sign else []
    return [Token("op", "^", start, end), *signs, *_tokens("number", digits, start, end)]


def _name(raw: str, start: int) -> str:
    """Return a name in its canonical spelling; digits of other scripts are refused."""
    if raw.isascii():
        return raw
    for offset, character in enumerate(raw):
        if character.isdecimal() and not character.isascii():
            raise refuse("foreign-digit", Span(start + offset, start + offset + 1), found=character)
    name = unicodedata.normalize("NFKC", raw)
    return _NAMES.get(name, name)


def _match_bracket(token: Token, opened: list[Token], text: str) -> None:
    """Keep the stack of open brackets; refuse one that closes nothing, is never closed, or lies too deep."""
    if token.text == "(":
        opened.append(token)
        if len(opened) > MAX_NESTING:
            raise refuse("too-deep", token.span, limit=MAX_NESTING)
    elif token.text == ")":
        if not opened:
            raise refuse("stray-bracket", token.span)
        opened.pop()
    elif token.text == "=" and opened and "\n" in text[opened[-1].end : token.start]:
        raise refuse("unclosed-bracket", opened[-1].span)


def _bad_character(text: str, at: int, tokens: list[Token]) -> SheetError:
    """Return the error for a character that starts no token."""
    found, span = text[at], Span(at, at + 1)
    if found in _WORDS_FOR:
        return refuse("logic-sign", span, found=found, word=_WORDS_FOR[found])
    if found == "'" and tokens and tokens[-1].end == at:
        return refuse("prime", span, name=tokens[-1].text)
    key = {'"': "unclosed-quote", "[": "unclosed-unit"}.get(found, "foreign-digit" if found.isdigit() else "bad-character")
    if found == "[" and text[at + 1 :].lstrip(" \t\r\n")[:1] == "[":
        key = "channels"
    return refuse(key, span, found=found if found.isprintable() else f"U+{ord(found):04X}")
