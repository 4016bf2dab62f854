"""Tokens -> expression trees, by operator precedence on an explicit stack: no text makes Python recurse.

From loose to tight: `or`, `and`, `not`, comparisons, `+ -`, `* /`, the sign, `^` (to the right). Trees are never deeper
than `MAX_DEPTH`: chains of more than `MAX_CHAIN` terms or factors are built as balanced trees.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

from specterm.errors import SheetError, Span
from specterm.language.calls import parse_foreign, parse_table
from specterm.language.catalogue import refuse
from specterm.language.chains import Item, fold
from specterm.language.cursor import Cursor
from specterm.language.lexer import MAX_NESTING, Token
from specterm.language.nodes import Call, Name, Node, Number, Unary

MAX_NODES = 10_000
MAX_DEPTH = 256

_LEVELS = {"or": 1, "and": 2, "<": 4, "<=": 4, ">": 4, ">=": 4, "==": 4, "!=": 4, "+": 5, "-": 5, "*": 6, "/": 6, "^": 8}
_PREFIXES = {"not": 3, "-": 7, "+": 7}
WORDS = ("and", "or", "not", "in", "inf")


@dataclass(slots=True)
class _Chain:
    """Operators of one level waiting for their last operand: `a + b - c`."""

    level: int
    operators: list[str]


@dataclass(slots=True)
class _Prefix:
    """A sign or `not` waiting for its operand."""

    level: int
    token: Token


@dataclass(slots=True)
class _Open:
    """An open bracket: of a group, or of the call of `name`."""

    token: Token
    name: Token | None
    arguments: list[Item] = field(default_factory=list)
    level: int = 0


class ExpressionParser:
    """Reads one expression from a cursor and leaves the cursor behind it."""

    __slots__ = ("cursor", "nodes", "opened", "pending", "state", "values")

    def __init__(self, cursor: Cursor, *, state: bool = False) -> None:
        """`state` says whether `level(n) of "file"` may stand here."""
        self.cursor = cursor
        self.state = state
        self.values: list[Item] = []
        self.pending: list[_Chain | _Prefix | _Open] = []
        self.opened: list[_Open] = []
        self.nodes = 0

    def parse(self) -> Node:
        """Return the expression that starts here; it ends before the first token that cannot continue it."""
        while True:
            self._value()
            while self._closes():
                pass
            if not self._continues():
                break
        self._reduce()
        return self.values.pop().node

    def _value(self) -> None:
        """Read signs, open brackets and the number, name or call behind them."""
        cursor = self.cursor
        while True:
            token = cursor.now
            if token.text in _PREFIXES and token.kind in {"op", "name"}:
                self._prefix(cursor.take())
            elif token.kind == "op" and token.text == "(":
                self._open(cursor.take(), None)
            elif token.kind == "name" and token.text not in WORDS[:4]:
                if not self._name(cursor.take()):
                    return
            elif token.kind == "number":
                self._number(cursor.take())
                return
            else:
                raise self._no_value()

    def _no_value(self) -> SheetError:
        """Return the error for a token that stands where a value should."""
        cursor = self.cursor
        if cursor.sees("string"):
            return refuse("quoted-text", cursor.now.span)
        if cursor.sees("unit"):
            return refuse("unit-alone", cursor.now.span, unit=cursor.now.text)
        if cursor.sees("op", ")") and isinstance(self.pending[-1] if self.pending else None, _Open):
            return refuse("empty-brackets", cursor.now.span)
        return cursor.unexpected("a value")

    def _prefix(self, token: Token) -> None:
        """Put a sign or `not` on the stack."""
        level = _PREFIXES[token.text]
        if token.text == "not" and self.pending and self.pending[-1].level > level:
            raise refuse("loose-not", token.span)
        self.pending.append(_Prefix(level, token))

    def _open(self, bracket: Token, name: Token | None) -> None:
        """Put an open bracket on the stack."""
        self.opened.append(_Open(bracket, name))
        self.pending.append(self.opened[-1])

    def _name(self, token: Token) -> bool:
        """Read what a name begins; say whether a value must follow (the first argument of a call)."""
        cursor = self.cursor
        if not cursor.sees("op", "("):
            self._push(Name(token.span, token.text))
            return False
        if token.text == "matrix":
            raise refuse("not-yet", token.span, what="`matrix(...)`")
        if token.text == "table":
            self._push(parse_table(cursor, token))
            return False
        self._open(cursor.take(), token)
        return True

    def _number(self, token: Token) -> None:
        """Read a number and the unit behind it."""
        value = float(token.text)
        if not math.isfinite(value):
            raise refuse("number-too-large", token.span)
        if value == 0.0 and token.text.lower().partition("e")[0].strip("0."):
            raise refuse("number-too-small", token.span)
        unit = None
        if self.cursor.sees("unit"):
            unit = self.cursor.take().text
        self._push(Number(self.cursor.span_from(token.start), value, unit))

    def _closes(self) -> bool:
        """Take a closing bracket or a comma that belongs to an open one; say whether the value goes on behind it."""
        cursor = self.cursor
        if not self.opened or not cursor.sees("op", ")", ","):
            return False
        self._reduce()
        opened = self.opened[-1]
        if cursor.sees("op", ","):
            if opened.name is None:
                raise refuse("stray-comma", cursor.now.span)
            return False
        cursor.take()
        self.pending.pop()
        self.opened.pop()
        self._call_or_group(opened)
        return True

    def _call_or_group(self, opened: _Open) -> None:
        """Turn a closed bracket into a value."""
        if opened.name is None:
            return
        items = [*opened.arguments, self.values.pop()]
        call = Call(self.cursor.span_from(opened.name.start), opened.name.text, tuple(item.node for item in items))
        depth = 1 + max(item.depth for item in items)
        if self.cursor.sees("name", "of"):
            if not self.state:
                raise refuse("foreign-outside-state", self.cursor.now.span)
            self._push(parse_foreign(self.cursor, call), depth)
        else:
            self._push(call, depth)

    def _continues(self) -> bool:
        """Take the operator or comma that goes on with the expression; say whether there was one."""
        cursor = self.cursor
        token = cursor.now
        level = _LEVELS.get(token.text) if token.kind in {"op", "name"} else None
        if level is not None:
            cursor.take()
            self._operator(token.text, level)
            return True
        if not self.opened:
            return False
        if cursor.sees("op", ","):
            self.opened[-1].arguments.append(self.values.pop())
            cursor.take()
            return True
        raise leftover(cursor, "an operator or ')'")

    def _operator(self, operator: str, level: int) -> None:
        """Finish what binds tighter than `operator`, then go on with its chain or begin one."""
        self._reduce(level + 1)
        top = self.pending[-1] if self.pending else None
        if isinstance(top, _Chain) and top.level == level:
            top.operators.append(operator)
        else:
            self.pending.append(_Chain(level, [operator]))

    def _reduce(self, level: int = 1) -> None:
        """Finish all pending operators down to `level`, or to the innermost open bracket."""
        while self.pending and self.pending[-1].level >= level:
            top = self.pending.pop()
            if isinstance(top, _Prefix):
                operand = self.values.pop()
                span = Span(top.token.start, operand.node.span.end)
                self._push(Unary(span, top.token.text, operand.node), operand.depth + 1)
            elif isinstance(top, _Chain):
                count = len(top.operators) + 1
                items = self.values[-count:]
                del self.values[-count:]
                whole = fold(top.level, top.operators, items)
                self._push(whole.node, whole.depth)

    def _push(self, node: Node, depth: int = 1) -> None:
        """Put a value on the stack, within the limits."""
        self.nodes += 1
        if self.nodes > MAX_NODES:
            raise refuse("too-many-nodes", node.span, limit=f"{MAX_NODES:,}")
        if depth > MAX_DEPTH:
            raise refuse("too-deep", node.span, limit=MAX_NESTING)
        self.values.append(Item(node, depth))


def expression(cursor: Cursor, *, state: bool = False) -> Node:
    """Return the expression at the cursor, which is left behind it; raise SheetError where there is none."""
    return ExpressionParser(cursor, state=state).parse()


def whole_expression(cursor: Cursor, *, state: bool = False) -> Node:
    """Return the expression at the cursor, which must reach to the end of the statement."""
    node = expression(cursor, state=state)
    if not cursor.done():
        raise leftover(cursor, "an operator or the end of the statement")
    return node


def leftover(cursor: Cursor, wanted: str) -> SheetError:
    """Return the error for a token that cannot go on with the expression before it."""
    token, before = cursor.now, cursor.before
    if token.kind == "unit":
        return refuse("unit-place", token.span, unit=token.text)
    if token.kind == "op" and token.text in "=,":
        return refuse("second-equals" if token.text == "=" else "stray-comma", token.span)
    if token.kind in {"number", "name"} or (token.kind == "op" and token.text == "("):
        left, right = cursor.shown(before), cursor.shown(token)
        factor = f"{left}*{right}" + ("...)" if right == "(" else "")
        kinds = (before.kind, token.kind)
        key = "missing-operator" + {("number", "name"): "-unit", ("name", "name"): "-call", ("name", "number"): "-call"}.get(
            kinds, ""
        )
        return refuse(key, token.span, left=left, right=right, factor=factor)
    return cursor.unexpected(wanted)
