"""The dimension check: terms of different dimension are refused where both are really known.

A number written without a unit is free: it takes the dimension its place needs, and so does everything it is a factor of. It
is better to miss a mismatch than to refuse a right sheet. The coordinate is a length where units say so, or where a term with
the coordinate or a momentum in it would come out as an energy if it were one.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from functools import partial

from specterm.errors import SheetError, Span
from specterm.language.catalogue import refuse
from specterm.language.kinds import GUESSED, INFERRED, LITERAL, PURE, SAID, Kind, exponent, power, product, settled, total
from specterm.language.nodes import Binary, Call, Compare, LayersBlock, Name, Node, Number, Sheet, Table, Unary
from specterm.language.order import bottom_up, children, in_order
from specterm.language.printing import format_expression
from specterm.units import ACTION, ENERGY, LENGTH, TEMPERATURE, Dimension, UnitSystem

_CIRCULAR = ("sin", "cos", "tan", "sec", "csc", "cot")
_BOTH = (*_CIRCULAR, *(name + "h" for name in _CIRCULAR))
_OF_NUMBERS = frozenset(
    {*_BOTH, *(prefix + name for prefix in ("a", "arc", "ar") for name in _BOTH)}
    | {"exp", "log", "ln", "log10", "log2", "erf", "erfc", "gamma", "lgamma"}
)
_SIGNS = frozenset({"sign", "step"})
_SUMS = frozenset({"min", "max", "hypot", "abs"})
_PURE_NAMES = frozenset({"pi", "i", "inf"})
_ROOTS = {"sqrt": Fraction(1, 2), "cbrt": Fraction(1, 3), "dagger": Fraction(1)}

Part = tuple[Node, Kind | None]


class Dimensions:
    """What is known about the dimensions in one sheet; nothing in a sheet without units. Made by `check_dimensions`."""

    def __init__(self, sheet: Sheet, units: UnitSystem, sure: int) -> None:
        """Work out the whole sheet; `sure` says how sure it is that a coordinate without units is a length."""
        self.units = units
        self.sure = sure
        self.evidence = False
        self.kinds: dict[str, Kind | None] = {}
        if units.energy:
            self._work_out(sheet)

    def of(self, node: Node) -> Dimension | None:
        """Return the dimension of an expression over the sheet's names, None where it is free; refuse a mismatch in it."""
        return _known(self._term(node)) if self.units.energy else None

    def carries(self, node: Node) -> bool:
        """Say whether an expression has a unit in it already, so that the unit of its column must not be applied again.

        True where it would have a dimension if all numbers without a unit were plain: `5 [nm]`, `2*gap` with `gap = 5 [nm]`.
        """
        kind = self._term(node) if self.units.energy else None
        return kind is not None and bool(kind.dimension)

    def named(self, name: str) -> Dimension | None:
        """Return the dimension of a name of the sheet, None where it is free."""
        return _known(self.kinds.get(name))

    def _work_out(self, sheet: Sheet) -> None:
        """Fill `kinds` in an order in which every name stands behind those it uses; then check what has no name."""
        rules: dict[str, Callable[[], Kind | None]] = {}
        uses: dict[str, list[Node]] = {}
        ends = {domain.coordinate: [end for end in (domain.left, domain.right) if end] for domain in sheet.domains}
        for block in sheet.layers:
            ends.setdefault(block.coordinate, []).extend([block.start] if block.start else [])
        for coordinate in ends:
            for letter in ("p", "D", "p" + coordinate, "D" + coordinate):
                rules[letter], uses[letter] = partial(self._derivative, letter[0], coordinate), [Name(Span(0, 0), coordinate)]
        for coordinate, nodes in ends.items():
            rules[coordinate], uses[coordinate] = partial(self._coordinate, coordinate, nodes, sheet.layers), nodes
        for name, unit, span in (column for block in sheet.layers for column in block.columns[1:]):
            rules[name], uses[name] = partial(self._unit, unit, span), []
        for item in sheet.definitions:
            rules[item.name], uses[item.name] = partial(self._term, item.expression), [item.expression]
        for name in in_order(uses)[0]:
            self.kinds[name] = rules[name]()
        self._check_rest(sheet)

    def _check_rest(self, sheet: Sheet) -> None:
        """Check states, Bloch phases and the cells of layers."""
        for state in sheet.states:
            self._term(state.expression)
        for domain in sheet.domains:
            if domain.phase is not None:
                self._check_plain("phase", domain.phase, self._term(domain.phase))
        for block in sheet.layers:
            for (name, unit, span), *cells in zip(block.columns, *block.rows, strict=True):
                kind = self._unit(unit, span)
                for cell in cells:
                    self._check_pair(Name(span, name), kind, cell, self._term(cell))

    def _unit(self, unit: str | None, span: Span) -> Kind | None:
        """Return the kind of a column with this unit."""
        return None if unit is None else Kind(self.units.parse(unit, span)[1])

    def _coordinate(self, name: str, ends: list[Node], layers: tuple[LayersBlock, ...]) -> Kind:
        """Return the kind of a coordinate: from an end with a unit or the thickness of its layers, else perhaps a length."""
        said = [(end, self._term(end)) for end in ends]
        for block in layers:
            if block.coordinate == name:
                column, unit, span = block.columns[0]
                said.append((Name(span, column), self._unit(unit, span)))
        first: tuple[Node, Kind] | None = None
        for node, kind in said:
            if kind is not None and kind.known:
                first = first or (node, kind)
                self._check_pair(*first, node, kind)
        return Kind(first[1].dimension, SAID, reach=Fraction(1)) if first else Kind(LENGTH, self.sure, reach=Fraction(1))

    def _derivative(self, sign: str, coordinate: str) -> Kind | None:
        """Return the kind of D or p."""
        over = product(PURE, self.kinds.get(coordinate), -1)
        if over is None:
            return None
        moving = Kind(over.dimension, over.sure, order=1, reach=over.reach)
        return moving if sign == "D" else product(Kind(ACTION), moving)

    def _term(self, node: Node) -> Kind | None:
        """Return the kind of a whole expression; what is inside is worked out first, so that no tree makes Python recurse."""
        found: dict[int, Kind | None] = {}
        for inner in bottom_up(node):
            found[id(inner)] = self._kind(inner, [(child, found[id(child)]) for child in children(inner)])
        return self._settled(found[id(node)])

    def _settled(self, kind: Kind | None) -> Kind | None:
        """Return the kind of a whole term, and note what it says about the coordinate."""
        if kind is not None and kind.reach and kind.dimension == ENERGY:
            self.evidence = True
        return settled(kind)

    def _kind(self, node: Node, inside: list[Part]) -> Kind | None:  # noqa: PLR0911 - one for each node
        """Return the kind of an expression from the kinds of those inside it."""
        match node:
            case Number(unit=unit):
                return LITERAL if unit is None else self._unit(unit, node.span)
            case Name(name=name):
                return self._name(name)
            case Table(columns=columns):
                return self._unit(columns[1][1], node.span)
            case Binary(operator="+" | "-"):
                return self._alike(inside)
            case Binary(operator="*" | "/" as operator):
                return product(inside[0][1], inside[1][1], 1 if operator == "*" else -1)
            case Binary(operator="^", right=right):
                self._check_plain("^", *inside[1])
                return power(inside[0][1], exponent(right))
            case Binary() | Unary(operator="not"):
                return PURE
            case Unary():
                return inside[0][1]
            case Compare():
                self._alike(inside)
                return PURE
            case Call(name=name):
                return self._call(name, inside)
        return None

    def _name(self, name: str) -> Kind | None:
        """Return the kind of a name: the user's, a constant, or free."""
        if name in self.kinds:
            return self.kinds[name]
        if name in _PURE_NAMES:
            return PURE
        constant = self.units.constant(name)
        return None if constant is None else Kind(constant[1])

    def _call(self, name: str, inside: list[Part]) -> Kind | None:
        """Return the kind of a call."""
        if name in _SUMS:
            return self._alike(inside)
        if name == "where" and len(inside) == 3:
            return self._alike(inside[1:])
        if name in _ROOTS:
            return power(inside[0][1], _ROOTS[name])
        numbers = name in _OF_NUMBERS or name.startswith(("bessel", "airy"))
        if numbers:
            self._check_plain(name, *inside[-1])
        return PURE if numbers or name in _SIGNS else None

    def _alike(self, parts: list[Part]) -> Kind | None:
        """Return the kind of things that are added or compared; refuse two that are known to differ."""
        kinds = [self._settled(kind) for _, kind in parts]
        known = [(node, kind) for (node, _), kind in zip(parts, kinds, strict=True) if kind is not None and kind.known]
        for node, kind in known[1:]:
            self._check_pair(*known[0], node, kind)
        return total(kinds)

    def _check_pair(self, left: Node, left_kind: Kind | None, right: Node, right_kind: Kind | None) -> None:
        """Refuse two things whose dimensions are both known and differ."""
        if left_kind is None or right_kind is None or not (left_kind.known and right_kind.known):
            return
        if left_kind.dimension != right_kind.dimension:
            raise _mismatch(left, left_kind, right, right_kind)

    def _check_plain(self, name: str, argument: Node, kind: Kind | None) -> None:
        """Refuse an argument that units say is no plain number."""
        if kind is not None and kind.sure == SAID and not kind.bare and kind.dimension:
            shown = format_expression(argument)
            raise refuse("unit-argument", argument.span, name=name, argument=shown, kind=kind.dimension.phrase)


def check_dimensions(sheet: Sheet, units: UnitSystem) -> Dimensions:
    """Return what is known about the dimensions in a sheet; raise SheetError where two terms are known not to fit."""
    found = Dimensions(sheet, units, GUESSED)
    return Dimensions(sheet, units, INFERRED) if found.evidence else found


def lengthy(sheet: Sheet, units: UnitSystem) -> Dimensions:
    """Return what is known where the coordinate is a length; raise SheetError where two terms are then known not to fit."""
    return Dimensions(sheet, units, SAID)


def _known(kind: Kind | None) -> Dimension | None:
    """Return the dimension of a kind where it is really known."""
    return kind.dimension if kind is not None and kind.known else None


def _mismatch(left: Node, left_kind: Kind, right: Node, right_kind: Kind) -> SheetError:
    """Return the error for two terms that do not fit."""
    factor = right_kind.dimension / left_kind.dimension
    warm = factor in {ENERGY / TEMPERATURE, TEMPERATURE / ENERGY}
    return refuse(
        "unit-mismatch-kelvin" if warm else "unit-mismatch",
        right.span,
        left=format_expression(left),
        left_kind=left_kind.dimension.phrase,
        right=format_expression(right),
        right_kind=right_kind.dimension.phrase,
        factor=factor.phrase,
    )
