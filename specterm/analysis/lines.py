"""One spectral line: energy, dipole, oscillator strength and what follows from them in units."""

from __future__ import annotations

import math
from dataclasses import dataclass

from specterm.analysis.unit_names import dimension_of
from specterm.model import Model
from specterm.spectrum import Level
from specterm.units import CHARGE, LENGTH

ULP = 2.0**-52


@dataclass(frozen=True)
class Line:
    """One transition. Energies in the sheet's unit, positive upwards; errors are bounds, None where nothing is known.

    `dipole` is <to|d|from>; `strength` = 2 (E_to - E_from) |d|^2 / <from|[d,[H,d]]|from>, None where that commutator vanishes
    or has no value; `wavelength` = h c/|E| in the sheet's unit of length, None without units; `frequency` in THz and
    `wavenumber` in cm^-1 likewise; `einstein` is the rate of spontaneous emission in 1/s, where the dipole is a length (times
    e) or a charge times a length; `population` is the thermal share of the level it starts from (1 without a temperature).
    """

    start: int
    to: int
    energy: float
    energy_error: float | None
    dipole: complex
    dipole_error: float | None
    strength: float | None
    strength_error: float | None
    wavelength: float | None
    frequency: float | None
    wavenumber: float | None
    einstein: float | None
    population: float = 1.0

    @property
    def intensity(self) -> float:
        """How strong the line is drawn: population times |strength|, or times |dipole|^2 where there is no strength."""
        return self.population * (abs(self.strength) if self.strength is not None else abs(self.dipole) ** 2)


def made_line(
    model: Model,
    start: Level,
    end: Level,
    dipole: tuple[complex, float],
    rule: tuple[float | None, float],
    text: str,
    population: float = 1.0,
) -> Line:
    """Return the line between two levels from its dipole `text` and the scale of strengths, each with its error."""
    element, off = dipole
    energy = end.value - start.value
    blur = None
    if start.error is not None and end.error is not None:
        blur = start.error + end.error + ULP * max(abs(start.value), abs(end.value))
    strength, strength_error = _strength((energy, blur), dipole, rule)
    wavelength, frequency, wavenumber = _spectral(model, energy)
    rate = _einstein(model, text, energy, abs(element))
    return Line(
        start.index, end.index, energy, blur, element, off if math.isfinite(off) else None, strength, strength_error,
        wavelength, frequency, wavenumber, rate, population,
    )  # fmt: skip


def _strength(
    energy: tuple[float, float | None], dipole: tuple[complex, float], rule: tuple[float | None, float]
) -> tuple[float | None, float | None]:
    """Return 2 E |d|^2/scale and a bound on its error."""
    (value, blur), (element, off), (scale, scale_off) = energy, dipole, rule
    if scale is None:
        return None, None
    square = abs(element) ** 2
    strength = 2 * value * square / scale
    if blur is None:
        return strength, None
    own = blur * square + abs(value) * (2 * abs(element) * off + off**2)
    error = (2 * own + abs(strength) * scale_off) / abs(scale) + 4 * ULP * abs(strength)
    return strength, error if math.isfinite(error) else None


def _spectral(model: Model, energy: float) -> tuple[float | None, float | None, float | None]:
    """Return wavelength (the sheet's length), frequency (THz) and wavenumber (cm^-1); None without units, or at energy 0."""
    units = model.units
    light = units.constant("c")
    if light is None or energy == 0:
        return None, None, None
    size = abs(energy)
    return 2 * math.pi * units.hbar * light[0] / size, size / units.parse("THz")[0], size / units.parse("cm^-1")[0]


def _einstein(model: Model, text: str, energy: float, dipole: float) -> float | None:
    """Return 4 alpha w^3 |d|^2/(3 c^2) in 1/s for a dipole e*d (Bethe and Salpeter, section 59, from memory)."""
    units = model.units
    light, fine = units.constant("c"), units.constant("alpha")
    dimension = dimension_of(model, text)
    if light is None or fine is None or dimension not in (LENGTH, LENGTH * CHARGE):
        return None
    rate = 4 * fine[0] * (abs(energy) / units.hbar) ** 3 * dipole**2 / (3 * light[0] ** 2)
    return rate * units.parse("s")[0]
