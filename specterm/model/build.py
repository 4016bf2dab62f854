"""A sheet -> a model: names resolved, units applied, the domain and the operator to diagonalise found."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING

from specterm.errors import SheetError
from specterm.language.catalogue import refuse
from specterm.language.dimensions import check_dimensions
from specterm.language.nodes import DomainStatement, Name, Node, Number, Sheet, Unary
from specterm.language.suggest import nearest
from specterm.model.domain import Domain
from specterm.model.ends import build_domain
from specterm.model.function import Function
from specterm.model.model import Model
from specterm.model.operator import Operator, multiplication
from specterm.model.overrides import overridden
from specterm.model.scalar import Scalar
from specterm.model.scope import Scope
from specterm.model.state import State, build_state
from specterm.model.term import Term
from specterm.units import UnitSystem

if TYPE_CHECKING:
    from pathlib import Path


def build(
    sheet: Sheet, *, folder: Path | None = None, overrides: Mapping[str, str] | None = None, like: Model | None = None
) -> Model:
    """Return the model a sheet stands for.

    `folder` is where relative paths start; `overrides` replaces the expressions of definitions (as `--set NAME=VALUE` does;
    the text is read like the sheet's own, a bare number is in the sheet's units). `like` is a model of the same sheet, or of a
    longer one, with other numbers in it: units and dimensions are taken over from it. Raises SheetError with the place of what
    is wrong.
    """
    sheet = overridden(sheet, overrides or {})
    statement = _domain_statement(sheet)
    units, carries, coordinate_unit = _checked(sheet, statement) if like is None else _taken(like)
    scope = Scope(sheet, units, folder, statement.coordinate, carries)
    _check_names(sheet, statement.coordinate)
    if "hbar" in scope.definitions:
        scope.set_hbar(_hbar(scope))
    domain = build_domain(statement, scope)
    scope.set_domain(domain)
    scope.ensure([*scope.definitions, *scope.blocks])
    return _model(sheet, units, scope, domain, coordinate_unit)


_Checked = tuple[UnitSystem, Callable[[Node], bool], str]


def _checked(sheet: Sheet, statement: DomainStatement) -> _Checked:
    """Return the units of a sheet, what says whether an expression has a unit in it, and the unit of the coordinate."""
    units = UnitSystem.dimensionless() if sheet.units is None else UnitSystem.make(sheet.units.pairs, sheet.units.span)
    dimensions = check_dimensions(sheet, units)
    kind = dimensions.named(statement.coordinate)
    angle = kind is not None and not kind
    return units, dimensions.carries, "" if angle else units.length


def _taken(like: Model) -> _Checked:
    """Return the same of a model."""
    return like.units, like.scope.carries, like.coordinate_unit


def _model(sheet: Sheet, units: UnitSystem, scope: Scope, domain: Domain, coordinate_unit: str) -> Model:
    operators = {name: v for name, v in scope.values.items() if isinstance(v, Operator)}
    terms = {name: v for name, v in scope.values.items() if isinstance(v, Term)}
    constants = {n: t.data for n, t in terms.items() if t.scalar is not None and t.scalar.is_real}
    functions = {n: Function(t) for n, t in terms.items() if n not in constants}
    main = _main(sheet, scope, operators)
    if main not in operators:
        operators[main] = multiplication(terms[main], scope.setting)
    states = _states(sheet, scope)
    return Model(
        sheet=sheet,
        units=units,
        domain=domain,
        coordinate_unit=coordinate_unit,
        hbar=float(scope.setting.hbar.value.real),
        parameters={d.name: float(constants[d.name].value) for d in sheet.definitions if d.name in constants},
        plain=tuple(d.name for d in sheet.definitions if d.name in constants and _is_plain(d.expression)),
        functions=functions,
        operators=operators,
        states=states,
        main=main,
        warnings=_warnings(sheet, scope, constants),
        scope=scope,
    )


def _domain_statement(sheet: Sheet) -> DomainStatement:
    if not sheet.domains:
        raise refuse("no-domain", None)
    if len(sheet.domains) > 1:
        raise refuse("several-coordinates", sheet.domains[1].coordinate_span)
    statement = sheet.domains[0]
    for block in sheet.layers:
        if block.coordinate != statement.coordinate:
            raise refuse("layers-coordinate", block.span, name=block.coordinate, coordinate=statement.coordinate)
    return statement


def _check_names(sheet: Sheet, coordinate: str) -> None:
    for block in sheet.layers:
        for name, _, span in block.columns[1:]:
            if name == coordinate:
                raise refuse("coordinate-defined", span, name=name, line=1)


def _hbar(scope: Scope) -> Scalar:
    node = scope.definitions["hbar"].expression
    value = scope.scalar(Name(node.span, "hbar"), "`hbar`")
    if not value.value.real > 0:
        raise refuse("not-positive", node.span, what="`hbar`", value=f"{value.value:g}")
    return value


def _main(sheet: Sheet, scope: Scope, operators: Mapping[str, Operator]) -> str:
    wanted = sheet.diagonalise
    if wanted is not None:
        if wanted.name not in scope.values:
            raise refuse("diagonalise-unknown", wanted.span, name=wanted.name, near=nearest(wanted.name, scope.values))
        return wanted.name
    if "H" in scope.values:
        return "H"
    if not operators:
        raise refuse("no-operator", None)
    if len(operators) > 1:
        raise refuse("which-operator", None, names=", ".join(operators))
    return next(iter(operators))


def _states(sheet: Sheet, scope: Scope) -> dict[str, State]:
    states = {}
    for s in sheet.states:
        try:
            states[s.name] = build_state(s.name, s.name_span, scope.value(s.expression), s.expression.span)
        except SheetError as error:
            error.span = error.span or s.name_span
            raise
    return states


def _is_plain(node: Node) -> bool:
    """Say whether an expression is a number, perhaps with a sign and a unit."""
    while isinstance(node, Unary) and node.operator in "+-":
        node = node.operand
    return isinstance(node, Number)


def _warnings(sheet: Sheet, scope: Scope, constants: Mapping[str, object]) -> tuple[str, ...]:
    unused = [d.name for d in sheet.definitions if d.name in constants and d.name not in scope.used and d.name != "hbar"]
    return tuple(f"the parameter `{name}` is never used" for name in unused)
