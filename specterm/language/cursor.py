"""A place in a statement's tokens, and what the statement parsers ask of it."""

from __future__ import annotations

from specterm.errors import SheetError, Span
from specterm.language.catalogue import refuse
from specterm.language.lexer import Token


class Cursor:
    """Walks the tokens of one statement; the last token is of kind `end` and is never passed."""

    __slots__ = ("at", "text", "tokens")

    def __init__(self, text: str, tokens: list[Token]) -> None:
        """Start at the first token; `text` is the whole sheet."""
        self.text = text
        self.tokens = tokens
        self.at = 0

    @property
    def now(self) -> Token:
        """The token not yet taken."""
        return self.tokens[self.at]

    @property
    def before(self) -> Token:
        """The token taken last (the first one, where none has been)."""
        return self.tokens[max(self.at - 1, 0)]

    def ahead(self, count: int) -> Token:
        """Return the token `count` places on, or the `end` token."""
        return self.tokens[min(self.at + count, len(self.tokens) - 1)]

    def take(self) -> Token:
        """Return the present token and go on to the next one."""
        token = self.tokens[self.at]
        if token.kind != "end":
            self.at += 1
        return token

    def sees(self, kind: str, *texts: str) -> bool:
        """Say whether the present token is of this kind and, if texts are given, has one of them."""
        return self.now.kind == kind and (not texts or self.now.text in texts)

    def accept(self, kind: str, *texts: str) -> bool:
        """Take the present token if it fits; say whether it did."""
        if self.sees(kind, *texts):
            self.take()
            return True
        return False

    def expect(self, kind: str, text: str, wanted: str) -> Token:
        """Take the present token if it fits, or refuse: `wanted` is what should stand here, in the user's words."""
        if not self.sees(kind, *([text] if text else [])):
            raise self.unexpected(wanted)
        return self.take()

    def unexpected(self, wanted: str) -> SheetError:
        """Return the error that `wanted` should stand here."""
        after = f" after '{self.shown(self.before)}'" if self.at else ""
        found = "" if self.now.kind == "end" else f", found '{self.shown(self.now)}'"
        how = f"put {wanted} there"
        if "the end" in wanted:
            how = "put ',' before it, or delete it" if wanted[0] == "'" else "delete it, or complete what stands before it"
        return refuse("expected", self.now.span, wanted=wanted, after=after, found=found, how=how)

    def shown(self, token: Token) -> str:
        """Return a token as the user wrote it."""
        return self.text[token.start : token.end]

    def done(self) -> bool:
        """Say whether the statement ends here."""
        return self.now.kind == "end"

    def span_from(self, start: int) -> Span:
        """Return the span from a character offset to the end of the last token taken."""
        return Span(start, self.before.end)
