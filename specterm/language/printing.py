"""An expression tree -> text that reads back as the same tree."""

from __future__ import annotations

from specterm.language.nodes import Binary, Call, Compare, ForeignLevel, Name, Node, Number, Table, Unary

_LEVELS = {"or": 1, "and": 2, "+": 5, "-": 5, "*": 6, "/": 6, "^": 8}
_NOT, _COMPARE, _SUM, _SIGN, _ATOM = 3, 4, 5, 7, 9


def format_expression(node: Node) -> str:
    """Return the text of an expression, with no more brackets than needed.

    Parsing it gives the same tree wherever no chain of equal operators is longer than `chains.MAX_CHAIN`.
    """
    return _written(node, 0)


def _written(node: Node, floor: int) -> str:
    """Return the text of a node, in brackets where it binds looser than `floor`."""
    text, level = _text(node)
    return f"({text})" if level < floor else text


def _text(node: Node) -> tuple[str, int]:  # noqa: PLR0911 - one for each node
    """Return the text of a node and how tightly it binds."""
    match node:
        case Number(value=value, unit=unit):
            number = repr(value).removesuffix(".0")
            return (f"{number} [{unit}]" if unit is not None else number), _ATOM
        case Name(name=name):
            return name, _ATOM
        case Unary(operator="not", operand=operand):
            return f"not {_written(operand, _NOT)}", _NOT
        case Unary(operator=operator, operand=operand):
            return operator + _written(operand, _SIGN), _SIGN
        case Binary(operator=operator, left=left, right=right):
            return _binary(operator, left, right)
        case Compare(operators=operators, operands=operands):
            rest = (f" {o} {_written(n, _SUM)}" for o, n in zip(operators, operands[1:], strict=True))
            return _written(operands[0], _SUM) + "".join(rest), _COMPARE
        case Call(name=name, arguments=arguments):
            return f"{name}({', '.join(_written(argument, 0) for argument in arguments)})", _ATOM
        case ForeignLevel(index=index, path=path):
            return f'level({_written(index, 0)}) of "{path}"', _ATOM
        case Table():
            return _table(node), _ATOM
    raise TypeError(f"no expression: {type(node).__name__}")


def _binary(operator: str, left: Node, right: Node) -> tuple[str, int]:
    """Return the text of an operation: blanks around all but `*`, `/` and `^`."""
    level = _LEVELS[operator]
    if operator == "^":
        return f"{_written(left, _ATOM)}^{_written(right, _SIGN)}", level
    sign = operator if operator in "*/" else f" {operator} "
    return f"{_written(left, level)}{sign}{_written(right, level + 1)}", level


def _table(node: Table) -> str:
    """Return the text of a table."""
    parts = [f'"{node.path}"']
    for column, unit in node.columns:
        name = str(column) if isinstance(column, int) else f'"{column}"'
        parts.append(name if unit is None else f"{name} [{unit}]")
    if not node.smooth:
        parts.append("linear")
    if node.outside != "error":
        parts.append(node.outside)
    return f"table({', '.join(parts)})"
