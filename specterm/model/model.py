"""A sheet made ready: everything the engine needs."""

from __future__ import annotations

from dataclasses import dataclass, field

from specterm.errors import SheetError
from specterm.language import parse_expression
from specterm.language.nodes import Sheet
from specterm.model.domain import Domain
from specterm.model.function import Function
from specterm.model.operator import Operator
from specterm.model.resolve import forbid_levels
from specterm.model.scope import Scope
from specterm.model.state import State
from specterm.model.values import as_operator
from specterm.units import UnitSystem


@dataclass(frozen=True)
class Model:
    """A resolved sheet. Numbers are in the coherent system `units` (dimensionless without one).

    `coordinate_unit` is the name of the unit of length, "" where the coordinate is known to be a plain number (an angle).
    `parameters`: the real constants of the sheet in the order written; `plain`: those written as plain numbers, perhaps with
    unit and sign; `functions`: what depends on the coordinate, and complex constants; `operators`: what contains a
    derivative, and `main`, the name of the operator to diagonalise; `warnings`: what is odd but no error.
    """

    sheet: Sheet
    units: UnitSystem
    domain: Domain
    coordinate_unit: str
    hbar: float
    parameters: dict[str, float]
    plain: tuple[str, ...]
    functions: dict[str, Function]
    operators: dict[str, Operator]
    states: dict[str, State]
    main: str
    warnings: tuple[str, ...]
    scope: Scope = field(repr=False, compare=False)

    @property
    def operator(self) -> Operator:
        """The operator to diagonalise."""
        return self.operators[self.main]

    def observable(self, text: str) -> Operator:
        """Return a name of the sheet or an expression over its names as an operator (functions multiply).

        Raises SheetError, without a place in the sheet, where the text cannot be understood.
        """
        try:
            node = parse_expression(text)
            forbid_levels(node)
            return as_operator(self.scope.value(node), self.scope.setting, node.span)
        except SheetError as error:
            shown = " ".join(text.split())[:60]
            raise SheetError(f"in the observable `{shown}`: {error.message}", mend=error.mend) from None
