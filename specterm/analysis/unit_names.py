"""The names of units of observables: products of powers of the sheet's own units and hbar."""

from __future__ import annotations

from fractions import Fraction

from specterm.errors import SheetError
from specterm.language import parse_expression
from specterm.language.dimensions import check_dimensions, lengthy
from specterm.language.needed import settled_dimensions
from specterm.model import Model
from specterm.units import CHARGE, LENGTH, MASS, TEMPERATURE, Dimension, UnitSystem

Scaled = tuple[float, str]
"""What numbers in the sheet's coherent system are divided by to be shown, and the unit they are shown in."""


def unit_of(model: Model, text: str) -> str:
    """Return the name of the unit that numbers of an observable are in, "" where it is not known or has no name of its own."""
    scale, unit = shown_unit(model, text)
    return unit if scale == 1 else ""


def shown_unit(model: Model, text: str) -> Scaled:
    """Return what numbers of an observable are divided by to be shown, and in what unit; (1, "") where it is not known.

    What has a time in it is shown with hbar: a momentum in hbar over the unit of length; what is per time, by the time itself.
    """
    plain = text.strip()
    if plain == model.main:
        return 1.0, model.units.energy
    if plain == model.domain.coordinate:
        return 1.0, model.coordinate_unit
    dimension = dimension_of(model, text)
    return (1.0, "") if dimension is None else named(model, dimension)


def dimension_of(model: Model, text: str) -> Dimension | None:
    """Return the dimension of an expression over the sheet's names, None where it is not known or there are no units.

    Numbers without a unit are taken to have what their place in the main operator needs, and to be plain elsewhere.
    """
    if not model.units.energy:
        return None
    if text.strip() == model.domain.coordinate and model.coordinate_unit:
        return LENGTH
    try:
        expression = parse_expression(text)
        known = (lengthy if model.coordinate_unit else check_dimensions)(model.sheet, model.units)
        found = known.of(expression)
        return found if found is not None else settled_dimensions(model.sheet, model.units, model.main, known).of(expression)
    except SheetError:
        return None


def named(model: Model, dimension: Dimension) -> Scaled:
    """Return what numbers of a dimension are divided by, and the name of their unit."""
    units = model.units
    charge, warmth = dimension.charge, dimension.temperature
    bare = dimension / CHARGE**charge / TEMPERATURE**warmth
    others = [("e", charge), ("K", warmth)]
    if bare == MASS**bare.mass:
        return 1.0, _joined([(units.mass, bare.mass), *others])
    # a mass is an energy times a time squared over a length squared
    energy, length, time = bare.mass, bare.length - 2 * bare.mass, bare.time + 2 * bare.mass
    if time > 0 and (energy or length):
        scale = units.hbar ** float(time)
        return scale, _joined([("hbar", time), (units.energy, energy - time), (units.length, length), *others])
    size, name = _clock(units)
    return size ** float(time), _joined([(units.energy, energy), (units.length, length), (name, time), *others])


def _clock(units: UnitSystem) -> Scaled:
    """Return the size, in the sheet's unit of time, of the one named in it: `fs` where that is `75.4 fs`."""
    _, _, name = units.time.partition(" ")
    return (units.parse(name)[0], name) if name else (1.0, units.time)


def _joined(powers: list[tuple[str, Fraction]]) -> str:
    """Return a product of powers of units as text: `nm^2`, `hbar/nm`, `meV/(e nm)`, `1/fs`."""
    above = [_power(name, power) for name, power in powers if power > 0]
    below = [_power(name, -power) for name, power in powers if power < 0]
    under = f"({' '.join(below)})" if len(below) > 1 else "".join(below)
    return (" ".join(above) or ("1" if below else "")) + (f"/{under}" if below else "")


def _power(name: str, power: Fraction) -> str:
    name = f"({name})" if power != 1 and not name.isidentifier() else name
    return name if power == 1 else f"{name}^{power}" if power.denominator == 1 else f"{name}^({power})"
