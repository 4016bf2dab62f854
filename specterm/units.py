"""Unit names -> one coherent system; dimensions.

Everything is kept as decimal numbers of 50 digits and rounded once, so a factor is right to the last bit of a double.
Constants: CODATA 2022 (P. J. Mohr, E. Tiesinga, D. B. Newell, B. N. Taylor; values as in scipy.constants of scipy 1.17).
"""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from decimal import Context, Decimal
from fractions import Fraction
from functools import lru_cache

from specterm.errors import SheetError, Span

_C = Context(prec=50, Emax=99_999, Emin=-99_999)
_PI = Decimal("3.1415926535897932384626433832795028841971693993751")
_MAX_POWER = 12
_MAX_TEXT = 200

UNIT_ERRORS: dict[str, tuple[str, str, tuple[str, ...]]] = {
    "unknown-unit": (
        "unknown unit '{unit}'",
        "{near}units are written like `meV`, `kV/cm`, `m/s^2`, `cm^-1`",
        ("units: energy eV, length nm, mass m_e\nx in (0, 1)\nH = p^2 + ‸3 [stone]",),
    ),
    "no-units": (
        "the unit [{unit}] means nothing here: the sheet has no units",
        "say `units: energy ..., length ..., mass ...` first, for instance `units: energy meV, length nm, mass m_e`",
        ("x in (0, 1)\nH = p^2 + ‸3 [meV]",),
    ),
    "unit-text": (
        "'{unit}' cannot be read as a unit",
        "units are written like `meV`, `kV/cm`, `m/s^2`, `cm^-1`",
        ("units: energy eV, length nm, mass m_e\nx in (0, 1)\nH = p^2 + ‸3 [nm/]",),
    ),
    "unit-kind": (
        "'{unit}' is {kind}, not {wanted}",
        "give {wanted}{hint}",
        ("‸units: energy nm, length nm, mass m_e\nx in (0, 1)\nH = p^2",),
    ),
    "units-missing": (
        "the units lack {wanted}",
        "give three of energy, length, mass and time: `units: energy meV, length nm, mass m_e`",
        ("‸units: energy eV\nx in (0, 1)\nH = p^2",),
    ),
    "units-inconsistent": (
        "the four units do not fit together: energy must be mass*length^2/time^2, which is {ratio} times the one given",
        "leave out the unit of time; it follows from the others",
        ("‸units: energy eV, length nm, mass m_e, time s\nx in (0, 1)\nH = p^2",),
    ),
}


class UnitError(SheetError):
    """A unit that is unknown or does not fit; `key` names its row in the table of errors."""

    def __init__(self, key: str, span: Span | None, *, near: str | None = None, **facts: str) -> None:
        """Fill the templates of row `key` with the facts."""
        message, mend, _ = UNIT_ERRORS[key]
        facts["near"] = f"did you mean `{near}`? Otherwise: " if near else ""
        super().__init__(message.format(**facts), mend=mend.format(**facts), span=span)
        self.key = key


@dataclass(frozen=True, slots=True)
class Dimension:
    """What kind of quantity a number is: its powers of mass, length, time, charge and temperature."""

    mass: Fraction = Fraction(0)
    length: Fraction = Fraction(0)
    time: Fraction = Fraction(0)
    charge: Fraction = Fraction(0)
    temperature: Fraction = Fraction(0)

    @property
    def powers(self) -> tuple[Fraction, ...]:
        """The five powers, in the order of the fields."""
        return self.mass, self.length, self.time, self.charge, self.temperature

    def __mul__(self, other: Dimension) -> Dimension:
        return Dimension(*(a + b for a, b in zip(self.powers, other.powers, strict=True)))

    def __truediv__(self, other: Dimension) -> Dimension:
        return Dimension(*(a - b for a, b in zip(self.powers, other.powers, strict=True)))

    def __pow__(self, power: int | Fraction) -> Dimension:
        return Dimension(*(a * power for a in self.powers))

    def __bool__(self) -> bool:
        """Say whether this is more than a plain number."""
        return any(self.powers)

    def __str__(self) -> str:
        """Return the kind in the user's words: "energy", "length", "energy/length^2", "plain number"."""
        return _KINDS.get(self) or _written(self, min(_BASES, key=lambda basis: sum(map(bool, _solve(self, basis)))))

    @property
    def phrase(self) -> str:
        """The kind with its article: "an energy", "a length"."""
        text = str(self)
        return f"an {text}" if text[0] in "aeio" else f"a {text}"


def _dimension(*powers: int) -> Dimension:
    """Return the dimension with whole powers."""
    return Dimension(*(Fraction(power) for power in powers))


PLAIN = Dimension()
MASS = _dimension(1)
LENGTH = _dimension(0, 1)
TIME = _dimension(0, 0, 1)
CHARGE = _dimension(0, 0, 0, 1)
TEMPERATURE = _dimension(0, 0, 0, 0, 1)
ENERGY = MASS * LENGTH**2 / TIME**2
ACTION = ENERGY * TIME
_VOLTAGE = ENERGY / CHARGE
_FIELD = _VOLTAGE * TIME / LENGTH**2

_KINDS = {PLAIN: "plain number", ACTION: "action", MASS * LENGTH / TIME: "momentum", TIME**-1: "1/time"}
_BASES = (
    (("energy", ENERGY), ("length", LENGTH), ("time", TIME)),
    (("energy", ENERGY), ("length", LENGTH), ("mass", MASS)),
    (("mass", MASS), ("length", LENGTH), ("time", TIME)),
    (("energy", ENERGY), ("mass", MASS), ("time", TIME)),
)


def _written(dimension: Dimension, basis: tuple[tuple[str, Dimension], ...]) -> str:
    """Return a dimension as powers of three mechanical kinds, charge and temperature."""
    names = [name for name, _ in basis] + ["charge", "temperature"]
    powers = [*_solve(dimension, basis), dimension.charge, dimension.temperature]
    above = [_power(name, power) for name, power in zip(names, powers, strict=True) if power > 0]
    below = [_power(name, -power) for name, power in zip(names, powers, strict=True) if power < 0]
    return "/".join(["*".join(above) or "1", *below])


def _power(name: str, power: Fraction) -> str:
    """Return `name`, `name^2` or `name^(1/2)`."""
    return name if power == 1 else f"{name}^{power}" if power.denominator == 1 else f"{name}^({power})"


def _solve(dimension: Dimension, basis: tuple[tuple[str, Dimension], ...]) -> list[Fraction]:
    """Return the powers of three kinds that make up the mechanical part of a dimension (Cramer's rule)."""
    rows = [kind.powers[:3] for _, kind in basis]
    whole = _determinant(rows)
    return [_determinant([*rows[:k], dimension.powers[:3], *rows[k + 1 :]]) / whole for k in range(3)]


def _determinant(rows: list[tuple[Fraction, ...]]) -> Fraction:
    """Return the determinant of three rows of three."""
    (a, b, c), (d, e, f), (g, h, i) = rows
    return a * (e * i - f * h) - b * (d * i - f * g) + c * (d * h - e * g)


def _times(*factors: Decimal | str) -> Decimal:
    """Return a product to 50 digits."""
    product = Decimal(1)
    for factor in factors:
        product = _C.multiply(product, Decimal(factor))
    return product


_H, _E, _LIGHT = Decimal("6.62607015e-34"), Decimal("1.602176634e-19"), Decimal("299792458")
_HBAR = _C.divide(_H, _times("2", _PI))
_N_A, _K_B = Decimal("6.02214076e23"), Decimal("1.380649e-23")

CONSTANTS: dict[str, tuple[Decimal, Dimension]] = {
    "e": (_E, CHARGE),
    "m_e": (Decimal("9.1093837139e-31"), MASS),
    "m_p": (Decimal("1.67262192595e-27"), MASS),
    "m_n": (Decimal("1.67492750056e-27"), MASS),
    "u": (Decimal("1.66053906892e-27"), MASS),
    "k_B": (_K_B, ENERGY / TEMPERATURE),
    "c": (_LIGHT, LENGTH / TIME),
    "h": (_H, ACTION),
    "hbar": (_HBAR, ACTION),
    "a_0": (Decimal("5.29177210544e-11"), LENGTH),
    "E_h": (Decimal("4.3597447222060e-18"), ENERGY),
    "eps_0": (Decimal("8.8541878188e-12"), CHARGE**2 / ENERGY / LENGTH),
    "mu_0": (Decimal("1.25663706127e-6"), MASS * LENGTH / CHARGE**2),
    "N_A": (_N_A, PLAIN),
    "alpha": (Decimal("7.2973525643e-3"), PLAIN),
    "Phi_0": (_C.divide(_H, _times("2", _E)), ACTION / CHARGE),
    "mu_B": (Decimal("9.2740100657e-24"), ENERGY / _FIELD),
    "R_inf": (Decimal("10973731.568157"), LENGTH**-1),
}

_RYDBERG = _C.divide(CONSTANTS["E_h"][0], Decimal(2))
_UNITS: dict[str, tuple[Decimal, Dimension]] = {
    **{name: CONSTANTS[name] for name in ("e", "m_e", "m_p", "m_n", "u", "k_B", "c", "hbar", "a_0", "E_h", "Phi_0", "mu_B")},
    "me": CONSTANTS["m_e"],
    "Da": CONSTANTS["u"],
    "amu": CONSTANTS["u"],
    "a0": CONSTANTS["a_0"],
    "bohr": CONSTANTS["a_0"],
    "Eh": CONSTANTS["E_h"],
    "Ha": CONSTANTS["E_h"],
    "hartree": CONSTANTS["E_h"],
    "Ry": (_RYDBERG, ENERGY),
    "rydberg": (_RYDBERG, ENERGY),
    "eV": (_E, ENERGY),
    "J": (Decimal(1), ENERGY),
    "erg": (Decimal("1e-7"), ENERGY),
    "cal": (Decimal("4.184"), ENERGY),
    "mol": (_N_A, PLAIN),
    "Hz": (_H, ENERGY),
    "m": (Decimal(1), LENGTH),
    "angstrom": (Decimal("1e-10"), LENGTH),
    "Angstrom": (Decimal("1e-10"), LENGTH),
    "\N{LATIN CAPITAL LETTER A WITH RING ABOVE}": (Decimal("1e-10"), LENGTH),
    "g": (Decimal("1e-3"), MASS),
    "s": (Decimal(1), TIME),
    "K": (Decimal(1), TEMPERATURE),
    "C": (Decimal(1), CHARGE),
    "V": (Decimal(1), _VOLTAGE),
    "A": (Decimal(1), CHARGE / TIME),
    "F": (Decimal(1), CHARGE / _VOLTAGE),
    "H": (Decimal(1), _VOLTAGE * TIME**2 / CHARGE),
    "ohm": (Decimal(1), _VOLTAGE * TIME / CHARGE),
    "Ohm": (Decimal(1), _VOLTAGE * TIME / CHARGE),
    "\N{GREEK CAPITAL LETTER OMEGA}": (Decimal(1), _VOLTAGE * TIME / CHARGE),
    "T": (Decimal(1), _FIELD),
    "Wb": (Decimal(1), _VOLTAGE * TIME),
    "N": (Decimal(1), ENERGY / LENGTH),
    "Pa": (Decimal(1), ENERGY / LENGTH**3),
    "W": (Decimal(1), ENERGY / TIME),
    "debye": (_C.divide(Decimal("1e-21"), _LIGHT), CHARGE * LENGTH),
    "rad": (Decimal(1), PLAIN),
    "deg": (_C.divide(_PI, Decimal(180)), PLAIN),
    "\N{DEGREE SIGN}": (_C.divide(_PI, Decimal(180)), PLAIN),
    "percent": (Decimal("0.01"), PLAIN),
    "%": (Decimal("0.01"), PLAIN),
}
_UP = dict(zip("kMGTPEZYRQ", range(3, 31, 3), strict=True))
_DOWN = dict(zip("munpfazyrq", (-3, -6, *range(-9, -31, -3)), strict=True))
_PREFIXES = {"da": 1, "h": 2, **_UP, "d": -1, "c": -2, **_DOWN, "μ": -6}
_NEVER = {"au": "a_0", "AU": "a_0"}
_WAVENUMBER = (_times("100", _H, _LIGHT), ENERGY)

_PART = re.compile(
    r"""(?P<blank>\s*)(?:(?P<close>\))|(?P<sign>[*/·⋅×])?\s*(?:(?P<open>\()|(?P<name>1(?![0-9.])|[^\W\d]\w*|[%°])))
    (?:(?:\^|\*\*)(?P<power>[+-]?[0-9]{1,4}(?:\.[0-9]{1,4})?|\([+-]?[0-9]{1,4}(?:/[0-9]{1,4})?\))|(?P<short>-[0-9]{1,4}))?""",
    re.VERBOSE,
)
_RAISED = re.compile("[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]+")
_TO_PLAIN = str.maketrans("⁺⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "+-0123456789")

Quantity = tuple[Decimal, Dimension]


@lru_cache(maxsize=512)
def _read(text: str, span: Span | None) -> Quantity:
    """Return the SI value and the dimension of a unit such as `kV/cm`; factors are taken from left to right.

    `cm^-1` is an energy (by hc) unless it multiplies something; `Hz` is one (by h); `K` is one (by k_B) where it stands above
    the line, and a temperature below it.
    """
    plain = _RAISED.sub(lambda raised: "^" + raised[0].translate(_TO_PLAIN), text.strip())
    plain = unicodedata.normalize("NFKC", plain).replace("−", "-")
    broken = UnitError("unit-text", span, unit=text[:60])
    if not plain or len(plain) > _MAX_TEXT:
        raise broken
    total: Quantity = (Decimal(1), PLAIN)
    outer: list[tuple[Quantity, int]] = []
    at, fresh, below = 0, True, False
    while at < len(plain):
        part = _PART.match(plain, at)
        if part is None:
            raise broken
        at = part.end()
        power = _exponent(part["power"] or part["short"] or "1", broken)
        if part["close"]:
            if fresh or not outer:
                raise broken
            before, sign = outer.pop()
            total = _joined(before, _raised(total, power * sign))
            continue
        if not fresh and not part["sign"] and not part["blank"]:
            raise broken
        if fresh and part["sign"]:
            raise broken
        sign = -1 if part["sign"] == "/" else 1
        if part["open"]:
            outer.append((total, sign))
            total, fresh, below = (Decimal(1), PLAIN), True, below ^ (sign < 0)
            continue
        above = (power * sign > 0) ^ below
        factor = _energy_for(part["name"], _named(part["name"], span), power, above=above, multiplies=sign > 0 and not fresh)
        total = _joined(total, _raised(factor, power * sign))
        fresh = False
    if outer or fresh:
        raise broken
    return total


def _exponent(text: str, broken: UnitError) -> Fraction:
    """Return the power as a fraction of reasonable size."""
    try:
        power = Fraction(text.strip("()"))
    except (ValueError, ZeroDivisionError):
        raise broken from None
    if abs(power) > _MAX_POWER or power.denominator > _MAX_POWER:
        raise broken
    return power


def _energy_for(name: str, quantity: Quantity, power: Fraction, *, above: bool, multiplies: bool) -> Quantity:
    """Return a unit as the energy that it stands for in its place: `cm^-1` (raised to the power -1 by the caller) and `K`."""
    if name == "cm" and power == -1 and not multiplies:
        return _raised(_WAVENUMBER, Fraction(-1))
    if quantity[1] == TEMPERATURE and above:
        return _C.multiply(quantity[0], _K_B), ENERGY
    return quantity


def _named(name: str, span: Span | None) -> Quantity:
    """Return the SI value and the dimension of a unit by name, with or without an SI prefix."""
    if name == "1":
        return Decimal(1), PLAIN
    if name in _UNITS:
        return _UNITS[name]
    for prefix, power in _PREFIXES.items():
        if name.startswith(prefix) and name[len(prefix) :] in _UNITS and name not in _NEVER:
            value, dimension = _UNITS[name[len(prefix) :]]
            return value.scaleb(power, _C), dimension
    raise UnitError("unknown-unit", span, unit=name[:60], near=_near(name))


def _near(name: str) -> str | None:
    """Return the unit a misspelt name most likely stands for."""
    import difflib  # noqa: PLC0415 - only in an error

    if name in _NEVER:
        return _NEVER[name]
    names = [*_UNITS, *(prefix + unit for prefix in _PREFIXES for unit in _UNITS)]
    same = [known for known in names if known.casefold() == name.casefold()]
    if same:
        return max(same, key=lambda known: sum(a == b for a, b in zip(known, name, strict=False)))
    found = difflib.get_close_matches(name[:30], [known for known in _UNITS if len(known) > 2], n=1, cutoff=0.7)
    return found[0] if found else None


def _raised(quantity: Quantity, power: Fraction) -> Quantity:
    """Return a quantity to a rational power."""
    value, dimension = quantity
    if power.denominator == 1:
        return _C.power(value, int(power)), dimension**power
    return _C.power(value, _C.divide(Decimal(power.numerator), Decimal(power.denominator))), dimension**power


def _joined(first: Quantity, second: Quantity) -> Quantity:
    """Return the product of two quantities."""
    return _C.multiply(first[0], second[0]), first[1] * second[1]


_WANTED = {"energy": ENERGY, "length": LENGTH, "mass": MASS, "time": TIME}
_HINTS = {("length", "A"): "; the angstrom is `angstrom`", ("energy", "1/cm"): "; the wavenumber as an energy is `cm^-1`"}


@dataclass(frozen=True, slots=True)
class UnitSystem:
    """A coherent system of units, or none at all.

    `energy`, `length`, `mass` and `time` are the names to print ("" without units; a derived one is a number with a unit);
    `hbar` is Planck's constant over 2 pi in this system, 1 without units. The unit of charge is the elementary charge and
    that of temperature the kelvin.
    """

    energy: str = ""
    length: str = ""
    mass: str = ""
    time: str = ""
    hbar: float = 1.0
    bases: tuple[Decimal, Decimal, Decimal] | None = None

    @staticmethod
    def dimensionless() -> UnitSystem:
        """Return the system of a sheet without units."""
        return UnitSystem()

    @staticmethod
    def make(pairs: tuple[tuple[str, str], ...], span: Span | None = None) -> UnitSystem:
        """Return the system that pairs of (quantity, unit) make: three of energy, length, mass and time, or all four.

        Raises UnitError, with `span`, where a unit is unknown or of the wrong kind, one is lacking, or the four contradict.
        """
        given = {quantity: _base(quantity, text, span) for quantity, text in pairs}
        lacking = [quantity for quantity in _WANTED if quantity not in given]
        if len(lacking) > 1:
            wanted = [quantity for quantity in lacking if quantity != "time"]
            raise UnitError("units-missing", span, wanted=" and ".join(wanted))
        names = {quantity: text.strip() for quantity, text in pairs}
        if lacking:
            given[lacking[0]] = _derived(lacking[0], given)
            names[lacking[0]] = _label(lacking[0], given[lacking[0]])
        else:
            _check_consistent(given, span)
        bases = (given["energy"], given["length"], given["mass"])
        hbar = UnitSystem(bases=bases).convert((_HBAR, ACTION))
        return UnitSystem(names["energy"], names["length"], names["mass"], names["time"], hbar, bases)

    def convert(self, quantity: Quantity) -> float:
        """Return an SI quantity as a number in this system, rounded once."""
        if self.bases is None:
            raise UnitError("no-units", None, unit=str(quantity[1]))
        return _converted(quantity, self.bases)

    def parse(self, text: str, span: Span | None = None) -> tuple[float, Dimension]:
        """Return (factor, dimension) of a unit: a number in that unit times the factor is the number in this system.

        Raises UnitError, with `span`, where the unit is unknown or the sheet has no units.
        """
        if self.bases is None:
            raise UnitError("no-units", span, unit=text[:60])
        quantity = _read(text, span)
        return self.convert(quantity), quantity[1]

    def constant(self, name: str) -> tuple[float, Dimension] | None:
        """Return (value, dimension) of a CODATA constant in this system; None for other names, and without units."""
        if self.bases is None or name not in CONSTANTS:
            return None
        return self.convert(CONSTANTS[name]), CONSTANTS[name][1]


@lru_cache(maxsize=512)
def _converted(quantity: Quantity, bases: tuple[Decimal, Decimal, Decimal]) -> float:
    """Return an SI quantity as a number in the system of these bases: sheets are built again and again with other numbers."""
    value, dimension = quantity
    energy, length, mass = bases
    powers = (-dimension.time / 2, dimension.length + dimension.time, dimension.mass + dimension.time / 2)
    for base, power in zip((energy, length, mass, _E), (*powers, dimension.charge), strict=True):
        value = _C.divide(value, _raised((base, PLAIN), power)[0])
    return float(value)


def _base(quantity: str, text: str, span: Span | None) -> Decimal:
    """Return the SI value of a base unit, which must be of the right kind."""
    value, dimension = _read(text, span)
    if dimension != _WANTED[quantity]:
        wanted = _WANTED[quantity].phrase
        hint = _HINTS.get((quantity, text.strip()), "")
        raise UnitError("unit-kind", span, unit=text[:60], kind=dimension.phrase, wanted=wanted, hint=hint)
    return value


def _derived(quantity: str, given: dict[str, Decimal]) -> Decimal:
    """Return the fourth base from the other three, by energy = mass*length^2/time^2."""
    powers = {"energy": 1, "mass": -1, "length": -2, "time": 2}
    product = Decimal(1)
    for name, value in given.items():
        product = _C.multiply(product, _C.power(value, -powers[name]))
    root = Fraction(1, powers[quantity])
    return _raised((product, PLAIN), root)[0]


def _check_consistent(given: dict[str, Decimal], span: Span | None) -> None:
    """Refuse four base units that contradict each other by more than 1e-8."""
    ratio = float(_C.divide(_derived("energy", {k: v for k, v in given.items() if k != "energy"}), given["energy"]))
    if abs(ratio - 1) > 1e-8:
        raise UnitError("units-inconsistent", span, ratio=f"{ratio:.6g}")


def _label(quantity: str, value: Decimal) -> str:
    """Return a derived base as a number with a unit, for printing."""
    choices = {"energy": ("eV",), "length": ("nm",), "mass": ("m_e",), "time": ("as", "fs", "ps", "ns", "us", "ms", "s")}
    units = choices[quantity]
    numbers = [float(_C.divide(value, _named(unit, None)[0])) for unit in units]
    chosen = max((k for k, number in enumerate(numbers) if number >= 1), default=0)
    return f"{numbers[chosen]:.6g} {units[chosen]}"
