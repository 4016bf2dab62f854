"""What is known about the dimension of an expression, and how it combines."""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction

from specterm.language.nodes import Binary, Node, Number, Unary
from specterm.units import ENERGY, PLAIN, Dimension

GUESSED, INFERRED, SAID = 0, 1, 2
_MAX_POWER = 100


@dataclass(frozen=True, slots=True)
class Kind:
    """What is known about the dimension of an expression; nothing at all is None, said of a free expression.

    `dimension` is what it would be if the numbers written without a unit were plain; `sure` says whether that is GUESSED (such
    a number is a factor of it), INFERRED (from how the coordinate is used) or SAID (by units); a `bare` one is made of numbers
    only and takes the dimension its place needs. `order` counts derivatives, `reach` is the power of the coordinate.
    """

    dimension: Dimension
    sure: int = SAID
    bare: bool = False
    order: int = 0
    reach: Fraction = Fraction(0)

    @property
    def known(self) -> bool:
        """Whether the dimension is really known, so that a mismatch is an error."""
        return self.sure >= INFERRED and not self.bare


LITERAL = Kind(PLAIN, GUESSED, bare=True)
PURE = Kind(PLAIN, SAID, bare=True)


def product(left: Kind | None, right: Kind | None, sign: int = 1) -> Kind | None:
    """Return the kind of `left*right`, or of `left/right` for sign -1; free if either is."""
    if left is None or right is None:
        return None
    dimension = left.dimension * right.dimension if sign > 0 else left.dimension / right.dimension
    sure, bare = min(left.sure, right.sure), left.bare and right.bare
    return Kind(dimension, sure, bare, left.order + right.order, left.reach + sign * right.reach)


def power(base: Kind | None, exponent: Fraction | None) -> Kind | None:
    """Return the kind of a power whose exponent is a number (None where it is no number as written)."""
    if base is None:
        return None
    if base.bare or exponent is None:
        return base if base.bare else None
    return replace(base, dimension=base.dimension**exponent, order=int(base.order * exponent), reach=base.reach * exponent)


def total(kinds: list[Kind | None]) -> Kind | None:
    """Return the kind of a sum whose terms fit together."""
    terms = [kind for kind in kinds if kind is not None and not kind.bare]
    sure = [kind for kind in terms if kind.known]
    if sure:
        return max(sure, key=lambda kind: (kind.sure, kind.order))
    if None in kinds or len({kind.dimension for kind in terms}) > 1:
        return None
    if terms:
        return max(terms, key=lambda kind: kind.order)
    return LITERAL if LITERAL in kinds else PURE


def settled(kind: Kind | None) -> Kind | None:
    """Return the kind of a whole term: one with derivatives that comes out as an energy is one (its numbers are plain)."""
    if kind is not None and kind.order and kind.reach and kind.dimension == ENERGY and kind.sure == GUESSED:
        return replace(kind, sure=INFERRED)
    return kind


def exponent(node: Node) -> Fraction | None:
    """Return the number that an exponent is as written (`2`, `-1`, `0.5`, `1/3`), or None."""
    match node:
        case Number(value=value, unit=None) if abs(value) <= _MAX_POWER:
            found = Fraction(value)
        case Unary(operator="-", operand=operand):
            inner = exponent(operand)
            return None if inner is None else -inner
        case Binary(operator="/", left=Number(value=above, unit=None), right=Number(value=below, unit=None)) if below:
            found = Fraction(above) / Fraction(below)
        case _:
            return None
    return found if found.denominator <= _MAX_POWER and abs(found) <= _MAX_POWER else None
