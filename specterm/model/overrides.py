"""`--set NAME=VALUE`: definitions of a sheet replaced before it is built."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import fields, replace

from specterm.errors import SheetError, Span
from specterm.language import parse_expression
from specterm.language.catalogue import refuse
from specterm.language.nodes import Definition, Node, Sheet
from specterm.language.suggest import nearest


def overridden(sheet: Sheet, overrides: Mapping[str, str]) -> Sheet:
    """Return the sheet with the named definitions replaced; places then point at the definition that was replaced."""
    if not overrides:
        return sheet
    known = {d.name: d for d in sheet.definitions}
    for name in overrides:
        if name not in known:
            raise refuse("set-unknown", None, name=name, near=nearest(name, known))
    return replace(sheet, definitions=tuple(_changed(d, overrides.get(d.name)) for d in sheet.definitions))


def _changed(definition: Definition, text: str | None) -> Definition:
    if text is None:
        return definition
    try:
        expression = parse_expression(text)
    except SheetError as error:
        message = f"in {definition.name} = {' '.join(text.split())[:60]}: {error.message}"
        raise SheetError(message, mend=error.mend) from None
    return replace(definition, expression=_moved(expression, definition.expression.span))


def _moved(node: Node, span: Span) -> Node:
    """Return the tree with every place set to `span` (trees are at most 256 deep)."""
    changes: dict[str, object] = {"span": span}
    for field in fields(node):
        value = getattr(node, field.name)
        if isinstance(value, Node):
            changes[field.name] = _moved(value, span)
        elif isinstance(value, tuple) and value and isinstance(value[0], Node):
            changes[field.name] = tuple(_moved(v, span) for v in value)
    return replace(node, **changes)  # type: ignore[arg-type]
