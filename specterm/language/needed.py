"""Dimensions that numbers without a unit take from their places in the main operator, all other such numbers being plain."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

from specterm.errors import SheetError
from specterm.language.dimensions import Dimensions
from specterm.language.kinds import PURE, Kind, exponent
from specterm.language.nodes import Binary, Name, Node, Number, Sheet, Unary
from specterm.language.order import bottom_up
from specterm.units import ENERGY, PLAIN, Dimension, UnitSystem


class Settled(Dimensions):
    """What is known where numbers in expressions are plain; `given` are the dimensions of names, `free` names have none."""

    def __init__(self, sheet: Sheet, units: UnitSystem, sure: int, given: dict[str, Dimension], free: frozenset[str]) -> None:
        """Work out the whole sheet; raises SheetError where two terms are then known not to fit."""
        self.given, self.free = given, free
        super().__init__(sheet, units, sure)

    def _kind(self, node: Node, inside: list[tuple[Node, Kind | None]]) -> Kind | None:
        if isinstance(node, Number) and node.unit is None:
            return PURE
        return super()._kind(node, inside)

    def factor(self, node: Node) -> Dimension | None:
        """Return the dimension of a factor, a plain number for what is made of them, None where it is free."""
        kind = self._term(node)
        return None if kind is None else PLAIN if kind.bare else kind.dimension if kind.known else None

    def _check_plain(self, name: str, argument: Node, kind: Kind | None) -> None:
        """Let every argument pass: the numbers in it take what dimension it needs."""

    def _name(self, name: str) -> Kind | None:
        if name in self.given:
            return Kind(self.given[name])
        return None if name in self.free else super()._name(name)


def settled_dimensions(sheet: Sheet, units: UnitSystem, main: str, plain: Dimensions) -> Dimensions:
    """Return what is known when every number of the sheet has the dimension that its place in the operator `main` needs.

    A number that has a name and whose place does not tell it stays free, and so does all it is a factor of. `plain` is what is
    known without this. Raises SheetError where the sheet does not fit together then.
    """
    bare = frozenset(item.name for item in sheet.definitions if _numeric(item.expression))
    bodies = {item.name: item.expression for item in sheet.definitions}
    given: dict[str, Dimension] = {}
    before = -1
    while len(given) > before:
        before = len(given)
        here = Settled(sheet, units, plain.sure, given, bare - set(given))
        for name, dimension in _needs(here, bodies, main):
            if name in bare:
                given.setdefault(name, dimension)
    if here.named(main) not in (None, ENERGY):
        raise SheetError(f"`{main}` is no energy where its numbers are plain", mend="give them units")
    return here


def _numeric(expression: Node) -> bool:
    """Say whether an expression is made of numbers without a unit only."""
    return all(not isinstance(node, Name) and getattr(node, "unit", None) is None for node in bottom_up(expression))


def _needs(here: Settled, bodies: dict[str, Node], main: str) -> Iterator[tuple[str, Dimension]]:
    """Yield names of the sheet with the dimensions that their places in the main operator need."""
    waiting: list[tuple[Node, Dimension]] = [(bodies[main], ENERGY)] if main in bodies else []
    seen = {main}
    while waiting:
        node, wanted = waiting.pop()
        match node:
            case Binary(operator="+" | "-", left=left, right=right):
                waiting += [(left, wanted), (right, wanted)]
            case Unary(operator="-" | "+", operand=inner):
                waiting.append((inner, wanted))
            case Name(name=name):
                yield name, wanted
                if name in bodies and name not in seen:
                    seen.add(name)
                    waiting.append((bodies[name], wanted))
            case Binary():
                waiting += _only_unknown(here, node, wanted)


def _only_unknown(here: Settled, node: Node, wanted: Dimension) -> list[tuple[Node, Dimension]]:
    """Return the only factor of a product whose dimension is not known, with the one it needs; nothing for none or several."""
    rest, unknown = wanted, []
    for factor, power in _factors(node):
        dimension = here.factor(factor)
        if dimension is None:
            unknown.append((factor, power))
        else:
            rest = rest / dimension**power
    return [(factor, rest ** (1 / power)) for factor, power in unknown] if len(unknown) == 1 else []


def _factors(node: Node) -> list[tuple[Node, Fraction]]:
    """Return the factors of a product with their powers."""
    found: list[tuple[Node, Fraction]] = []
    waiting = [(node, Fraction(1))]
    while waiting:
        one, power = waiting.pop()
        match one:
            case Binary(operator="*" | "/" as operator, left=left, right=right):
                waiting += [(left, power), (right, power if operator == "*" else -power)]
            case Binary(operator="^", left=left, right=right) if exponent(right):
                waiting.append((left, power * (exponent(right) or 1)))
            case Unary(operator="-" | "+", operand=inner):
                waiting.append((inner, power))
            case _:
                found.append((one, power))
    return found
