"""Expectation and spread of an observable in a level or a prepared state, with errors."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from specterm.analysis.commutator import vanishing
from specterm.analysis.near_levels import LOST, mixing_with_others, near_rows, ranges
from specterm.analysis.observables import HIGHEST, Observable, observable, weak
from specterm.analysis.prepared import Prepared, prepare
from specterm.analysis.quadrature import POINTS, Rule
from specterm.analysis.regularity import natural_size, rule_for, tiny_share, why_infinite
from specterm.analysis.unit_names import unit_of
from specterm.arrays import Values
from specterm.errors import PhysicsError
from specterm.model import Model
from specterm.spectrum import Spectrum

ROUNDING = 1e-12
"""Rounding of an eigenstate in norm; the largest seen against closed forms is half of it."""
SUMMED = 1e-14
"""Rounding of an integral beside the integral of the modulus; ten times the largest seen."""
ROUGHNESS = 1e4
"""By how much the error of a state may be rougher than the state itself, in the term of second order in it."""
ALIVE = 1e-6
"""Where a state is below this share of its largest value its error is taken to fall as it does."""
STEEPER = (3.0, 30.0, 900.0)
"""By how much a derivative of order 0, 1, 2 may enlarge the error of a state beside the state's own."""
DIVERGES = 1e-3
"""A mean that gets this share from the last pieces at a singular place has no finite value."""
PRESSED = 1e-9
"""Share of |(A - mean) psi|^2 in the piece at the cut of an open domain from which on the value hangs on the cut."""


@dataclass(frozen=True)
class Expectation:
    """Mean and spread of an observable, in its `unit`, with bounds on their errors (None where nothing is known).

    `spread` is infinite where the state bends or jumps so that A psi cannot be normalised. `state` is a name or `level(n)`.
    """

    observable: str
    state: str
    mean: float
    spread: float
    error: float | None
    spread_error: float | None
    unit: str
    notes: tuple[str, ...]


def expectation(
    model: Model, spectrum: Spectrum, text: str, state: str = "level(0)", folder: Path | None = None
) -> Expectation:
    """Return mean and spread of the observable `text`, a name or an expression, in a state or in `level(n)`.

    Of an operator above order two its own levels are known all the same.

    Raises SheetError for what is not known; PhysicsError where the observable is not Hermitian, of an order above two, or has
    no finite mean in the state. The mean is the weak form (momenta act on either side); the spread is ||(A - mean) psi||, so
    nothing cancels. Checked against closed forms for wells, oscillators and hydrogen.
    """
    own = own_level(model, spectrum, text, state)
    if own is not None:
        return own
    asked = observable(model, text)
    return expected(model, spectrum, asked, prepare(model, spectrum, state, folder))


def own_level(model: Model, spectrum: Spectrum, text: str, state: str) -> Expectation | None:
    """Return the level itself where an operator of an order above two, the one diagonalised, is asked for in its level.

    None elsewhere, and for box levels, which are no eigenstates of the operator as written.
    """
    index = re.fullmatch(r"\s*level\(\s*(-?\d+)\s*\)\s*", state)
    if index is None or model.operator.order <= HIGHEST or state in model.states:
        return None
    level = next((one for one in spectrum.levels if one.index == int(index[1])), None)
    if level is None or level.kind == "box" or not vanishing(model.observable(text) - model.operator):
        return None
    return Expectation(text, state.strip(), level.value, 0.0, level.error, 0.0, unit_of(model, text), ())


def expected(model: Model, spectrum: Spectrum, asked: Observable, wave: Prepared) -> Expectation:
    """Return mean and spread of an observable in a state; for a level among near ones the errors cover every mixture of them.

    The true states of levels too near to be told apart are some mixtures of those computed: the mean then lies between the
    lowest and the highest eigenvalue of the observable among them. Levels whose neighbours were not computed keep no error.
    """
    found = expect(model, asked, wave)
    level = re.fullmatch(r"level\(\s*(-?\d+)\s*\)", wave.name)
    if found.error is not None or level is None or spectrum.states is None or wave.slip <= LOST:
        return found
    rows = near_rows(spectrum, int(level[1]))
    off = mixing_with_others(spectrum, rows)
    if len(rows) < 2 or off > LOST:
        return found
    firm = expect(model, asked, replace(wave, slip=off))
    if firm.error is None or firm.spread_error is None:
        return found
    mean, spread = ranges(spectrum, asked, rows, firm.mean)
    told = f"{len(rows)} levels are too near to be told apart: the errors cover every mixture of their states"
    wide = max(abs(mean[0]), abs(mean[1]))
    loose = max(firm.spread - spread[0], spread[1] - firm.spread, 0.0)
    return replace(firm, error=firm.error + wide, spread_error=firm.spread_error + loose, notes=(*firm.notes, told))


def expect(model: Model, asked: Observable, wave: Prepared) -> Expectation:
    """Return mean and spread of an observable made ready in a prepared state made ready."""
    rule = rule_for(asked, wave)
    psi = wave.jet(rule.x, 0)
    norm = float((rule.w * np.abs(psi) ** 2).sum())
    mean, size = _mean(asked, wave, rule, norm)
    moved = asked.apply(wave.jet, rule.x) - mean * psi
    spread = float(np.sqrt((rule.w * np.abs(moved) ** 2).sum() / norm))
    notes = why_infinite(model, asked, wave, rule)
    if notes:
        spread = float("inf")
    doubts = _doubts(model, wave, rule, moved)
    error: float | None
    spread_error: float | None
    error, spread_error = _errors(asked, wave, rule, (mean, spread, size))
    if doubts or not np.isfinite(error):
        error = spread_error = None
    return Expectation(asked.text, wave.name, mean, spread, error, spread_error, asked.unit, (*notes, *doubts))


def _doubts(model: Model, wave: Prepared, rule: Rule, moved: Values) -> list[str]:
    """Return why no error can be told: the state has none, or the value hangs on the cut of an open domain."""
    doubts = []
    if wave.slip > LOST:
        doubts.append("no error is known: the state is a box state, or shares its level with others")
    share = (rule.w * np.abs(moved) ** 2).reshape(-1, POINTS).sum(axis=1)
    kinds = (model.domain.left_end, model.domain.right_end)
    if any(end == "open" and share[piece] > PRESSED * share.sum() for end, piece in zip(kinds, (0, -1), strict=True)):
        doubts.append("the observable grows faster than the state falls: its value hangs on where the domain was cut")
    return doubts


def _mean(asked: Observable, wave: Prepared, rule: Rule, norm: float) -> tuple[float, float]:
    """Return the mean and the mean of the moduli of its parts; PhysicsError where it is not finite."""
    total, size = weak(asked.terms, wave.jet, wave.jet, rule.x, rule.w)
    mean = float(np.real(total)) / norm
    if not np.isfinite(mean) or tiny_share(asked, wave, rule) > DIVERGES:
        raise PhysicsError(
            f"the mean of `{asked.text}` in {wave.name} is not finite, or cannot be integrated",
            mend="choose another observable",
        )
    return mean, float(size) / norm


def _errors(asked: Observable, wave: Prepared, rule: Rule, found: tuple[float, float, float]) -> tuple[float, float]:
    """Return bounds on the errors of mean and spread: from the state's own error, the rule, and rounding.

    With psi + d for psi, the mean moves by 2 Re <(A - mean) psi, d> + <d, (A - mean) d>: the first is at most twice the spread
    times |d|, the second is small of second order.
    """
    mean, spread, size = found
    slip = wave.slip + ROUNDING
    psi = wave.jet(rule.x, 0)
    with np.errstate(all="ignore"):
        blur = sum(
            float(np.nansum(rule.w * c.rounding(rule.x) * np.abs(wave.jet(rule.x, j) * wave.jet(rule.x, k))))
            for (j, k), c in asked.terms
        )
    scale = size + abs(mean)
    steep = spread if np.isfinite(spread) else scale * STEEPER[asked.order]
    unseen = float(np.sqrt(rule.missed[0] + wave.missed)) * (steep + scale)
    largest = _largest(asked, rule, psi) if asked.order == 0 else 0.0
    natural = natural_size(asked, rule.places)
    second = slip**2 * (ROUGHNESS * scale + largest)
    unseen += tiny_share(asked, wave, rule) * scale
    error = 2 * steep * slip + second + 2 * unseen + blur + SUMMED * (scale + natural)
    spread_error = STEEPER[asked.order] * slip * (steep + scale + natural) + unseen + blur
    return error, spread_error


def _largest(asked: Observable, rule: Rule, psi: Values) -> float:
    """Return the largest modulus of a function observable where the wave is not negligible."""
    with np.errstate(all="ignore"):
        values = np.abs(np.nan_to_num(asked.parts[0](rule.x)))
    alive = np.abs(psi) > ALIVE * np.abs(psi).max()
    return float(values[alive].max(initial=0.0))
