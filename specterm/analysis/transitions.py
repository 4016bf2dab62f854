"""Lines between levels: energy, dipole, oscillator strength, sum rule, thermal populations."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from specterm.analysis.expectation import expect
from specterm.analysis.matrix_elements import MatrixElements, elements
from specterm.analysis.observables import Observable, dimension_of, observable, of_operator
from specterm.analysis.prepared import prepare
from specterm.arrays import Array
from specterm.errors import PhysicsError, SheetError
from specterm.model import Model
from specterm.spectrum import Spectrum
from specterm.units import CHARGE, LENGTH


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


@dataclass(frozen=True)
class Transitions:
    """Lines by starting level and end; `sums` has the sum of the strengths found for each starting level, None without them."""

    dipole: str
    lines: tuple[Line, ...]
    sums: dict[int, float | None]
    notes: tuple[str, ...]


def transitions(
    model: Model,
    spectrum: Spectrum,
    starts: tuple[int, ...] = (0,),
    dipole: str | None = None,
    *,
    temperature: float | None = None,
) -> Transitions:
    """Return the lines from the levels `starts` to all the levels computed, for a dipole observable (default: the coordinate).

    The strength is that of the operator as it stands: for p^2/(2 m) all strengths from a level sum to 1, and with a mass that
    varies the commutator brings in <1/m> (Thomas, Reiche and Kuhn; Burt, Foreman for varying masses, from memory).
    `temperature` is in kelvin, or in units of energy where the sheet has none; it gives each start its thermal share among the
    levels computed. Raises SheetError for levels not computed, PhysicsError for a dipole that is not Hermitian.
    """
    text = dipole or model.domain.coordinate
    asked = observable(model, text)
    rows = {level.index: row for row, level in enumerate(spectrum.levels)}
    missing = [start for start in starts if start not in rows]
    if missing:
        raise SheetError(f"level {missing[0]} is not among the {len(rows)} levels computed", mend="ask for more with -n")
    matrix = elements(asked, spectrum, spectrum)
    shares = populations(model, spectrum, temperature) if temperature is not None else np.ones(len(rows))
    lines: list[Line] = []
    sums: dict[int, float | None] = {}
    notes: list[str] = []
    for start in starts:
        scale, blur, why = sum_rule_scale(model, spectrum, asked, start)
        some = [_line(model, spectrum, matrix, (rows[start], to), (scale, blur), shares) for to in range(len(rows))]
        lines += some
        strengths = [line.strength for line in some]
        sums[start] = None if scale is None else float(sum(s for s in strengths if s is not None))
        notes += why
    notes += _doubts(model, spectrum)
    return Transitions(text, tuple(lines), sums, tuple(dict.fromkeys(notes)))


def sum_rule_scale(model: Model, spectrum: Spectrum, asked: Observable, start: int) -> tuple[float | None, float, list[str]]:
    """Return <a|[d,[H,d]]|a> for a level, a bound on its error, and notes; None where it vanishes or has no value."""
    d, H = asked.operator, model.operator
    double = d.commutator(H.commutator(d))
    try:
        found = expect(
            model,
            of_operator(double, f"[{asked.text},[{model.main},{asked.text}]]"),
            prepare(model, spectrum, f"level({start})"),
        )
    except PhysicsError as error:
        return None, 0.0, [f"no strengths: {error.message}"]
    size = abs(found.mean)
    if not size > 1e3 * (found.error or 0.0):
        return None, 0.0, [f"no strengths: `{asked.text}` commutes with `{model.main}`, or nearly so"]
    return found.mean, math.inf if found.error is None else found.error, []


def _line(
    model: Model,
    spectrum: Spectrum,
    matrix: MatrixElements,
    pair: tuple[int, int],
    rule: tuple[float | None, float],
    shares: Array,
) -> Line:
    """Return the line between two rows of the spectrum."""
    start, to = pair
    a, b = spectrum.levels[start], spectrum.levels[to]
    element, off = complex(matrix.values[to, start]), float(matrix.errors[to, start])
    energy = b.value - a.value
    known = a.error is not None and b.error is not None
    blur = (a.error or 0.0) + (b.error or 0.0) + 2.0**-52 * max(abs(a.value), abs(b.value))
    return made_line(
        model, (a.index, b.index), (energy if start != to else 0.0, blur if known else None), (element, off), rule, matrix.observable,
        float(shares[start]),
    )  # fmt: skip


def made_line(
    model: Model,
    ends: tuple[int, int],
    energy: tuple[float, float | None],
    dipole: tuple[complex, float],
    rule: tuple[float | None, float],
    text: str,
    population: float = 1.0,
) -> Line:
    """Return a line from its energy and dipole, each with its error, and the scale of its strength."""
    value, blur = energy
    element, off = dipole
    strength = strength_error = None
    scale, scale_off = rule
    if scale is not None:
        square = abs(element) ** 2
        strength = 2 * value * square / scale
        strength_error = 2 * ((blur or 0.0) * square + abs(value) * (2 * abs(element) * off + off**2)) / abs(scale) + abs(
            strength
        ) * scale_off / abs(scale)
        if blur is None or not math.isfinite(strength_error):
            strength_error = None
    wavelength, frequency, wavenumber = _spectral(model, value)
    rate = _einstein(model, text, value, abs(element))
    return Line(
        *ends, value, blur, element, off if math.isfinite(off) else None, strength, strength_error, wavelength, frequency,
        wavenumber, rate, population,
    )  # fmt: skip


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


def populations(model: Model, spectrum: Spectrum, temperature: float) -> Array:
    """Return the thermal shares of the levels computed, shape (levels,); temperature in kelvin, or in energy without units."""
    if not temperature > 0:
        raise SheetError(f"a temperature of {temperature:g} makes no sense", mend="give one above 0")
    boltzmann = model.units.constant("k_B")
    values = np.array([level.value for level in spectrum.levels])
    powers = (values - values.min()) / (temperature * (boltzmann[0] if boltzmann else 1.0))
    shares: Array = np.exp(-powers)
    return shares / shares.sum()


def _doubts(model: Model, spectrum: Spectrum) -> list[str]:
    """Return what limits the lines: levels of the box, a ring cut open by the coordinate."""
    notes = []
    if any(level.kind == "box" for level in spectrum.levels):
        notes.append("lines to box levels stand for parts of a continuum: only their sum over a range means something")
    return notes


def into_other(
    model: Model, spectrum: Spectrum, other: Model, found: Spectrum, starts: tuple[int, ...] = (0,), dipole: str | None = None
) -> Transitions:
    """Return the lines from levels of one sheet to those of another, whose dipole is 1 unless given: Franck-Condon factors.

    With a dipole the strength is scaled by the commutator on the first sheet, without one it is None and |dipole|^2 is the
    factor. Both sheets must have the same coordinate and units (`prepared.other_sheet`).
    """
    text = dipole or "1"
    asked = observable(model, text)
    rows = {level.index: row for row, level in enumerate(spectrum.levels)}
    missing = [start for start in starts if start not in rows]
    if missing:
        raise SheetError(f"level {missing[0]} is not among the {len(rows)} levels computed", mend="ask for more with -n")
    matrix = elements(asked, found, spectrum)
    lines: list[Line] = []
    sums: dict[int, float | None] = {}
    notes: list[str] = []
    for start in starts:
        scale, blur, why = (None, 0.0, []) if dipole is None else sum_rule_scale(model, spectrum, asked, start)
        a = spectrum.levels[rows[start]]
        some = []
        for row, b in enumerate(found.levels):
            off = None if a.error is None or b.error is None else a.error + b.error
            pair = (complex(matrix.values[row, rows[start]]), float(matrix.errors[row, rows[start]]))
            some.append(made_line(model, (start, b.index), (b.value - a.value, off), pair, (scale, blur), text))
        sums[start] = sum(line.strength if line.strength is not None else abs(line.dipole) ** 2 for line in some)
        lines += some
        notes += why
    return Transitions(text, tuple(lines), sums, tuple(dict.fromkeys([*notes, *_doubts(other, found)])))
