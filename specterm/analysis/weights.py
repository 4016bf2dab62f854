"""Projection weights of a prepared state."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from specterm.analysis.near_levels import LOST, mixing_with_others, near_rows
from specterm.analysis.prepared import Prepared, prepare, slips
from specterm.arrays import Array, Values
from specterm.model import Model
from specterm.spectrum import Spectrum
from specterm.spectrum.result import States

ROUNDING = 1e-12
"""Rounding of an eigenstate in norm; the largest seen against closed forms is half of it."""

TOLD = 1e-6
"""A share of a state that is cut off, or that no level holds, is told from here on."""


@dataclass(frozen=True)
class Weight:
    """The weight of one level, |amplitude|^2, with a bound on its error; `value` is the level."""

    index: int
    value: float
    weight: float
    error: float
    amplitude: complex


@dataclass(frozen=True)
class Weights:
    """The weights of a state, how much of it they hold (`captured`), mean and spread of the operator over the levels held.

    `mean` and `spread` are those of the captured part, in the sheet's unit of energy; `wave` maps places (n,) to the state
    (n,).
    """

    state: str
    weights: tuple[Weight, ...]
    captured: float
    mean: float
    spread: float
    notes: tuple[str, ...]
    wave: Callable[[Array], Values]


def project(model: Model, spectrum: Spectrum, name: str, folder: Path | None = None) -> Weights:
    """Return the weights of a state of the sheet, or of a level written `level(3)`, on the computed levels.

    Raises SheetError for an unknown state or one that cannot be normalised. Checked against closed forms for displaced and
    squeezed oscillator states to 1e-12.
    """
    prepared = prepare(model, spectrum, name, folder)
    if spectrum.states is None:
        notes = ("no level to project on: all of the state lies in the continuum",)
        return Weights(name, (), 0.0, float("nan"), float("nan"), notes, prepared.wave)
    amplitudes = _amplitudes(spectrum.states, len(spectrum.levels), prepared)
    errors = _errors(spectrum, prepared, amplitudes)
    values = np.array([level.value for level in spectrum.levels])
    shares = np.abs(amplitudes) ** 2
    groups = _groups(spectrum)
    errors = _covered(spectrum, groups, shares, errors)
    weights = tuple(
        Weight(level.index, level.value, float(share), float(error), complex(amplitude))
        for level, share, error, amplitude in zip(spectrum.levels, shares, errors, amplitudes, strict=True)
    )
    captured = float(shares.sum())
    mean = float((shares * values).sum() / captured) if captured > 0 else float("nan")
    spread = float(np.sqrt(max(0.0, (shares * (values - mean) ** 2).sum() / captured))) if captured > 0 else float("nan")
    told = (*_notes(spectrum, prepared, shares), *_together(groups, spectrum, shares))
    return Weights(name, weights, captured, mean, spread, told, prepared.wave)


def _amplitudes(states: States, count: int, prepared: Prepared) -> Values:
    """Return <n|psi> for every level, in blocks of points."""
    total = np.zeros(count, dtype=complex)
    for start in range(0, len(prepared.x), 4096):
        part = slice(start, start + 4096)
        x = prepared.x[part]
        total += states.evaluate(x).conj() @ (prepared.w[part] * np.nan_to_num(prepared.wave(x)))
    return total


def _errors(spectrum: Spectrum, prepared: Prepared, amplitudes: Values) -> Array:
    """Return bounds on the errors of the weights: from the eigenstate's own error, the rule of integration and rounding."""
    size = np.abs(amplitudes)
    slip = slips(spectrum) + prepared.slip + np.sqrt(max(prepared.missed, 0.0)) + ROUNDING
    errors: Array = 2 * size * slip + slip**2
    return errors


def _groups(spectrum: Spectrum) -> list[list[int]]:
    """Return the rows of levels too near to be told apart, groups of two and more of which some state may be a mixture."""
    mixed = [level.index for level, off in zip(spectrum.levels, slips(spectrum), strict=True) if off > LOST]
    groups = {tuple(near_rows(spectrum, index)) for index in mixed}
    return sorted(list(group) for group in groups if len(group) > 1)


def _covered(spectrum: Spectrum, groups: list[list[int]], shares: Array, errors: Array) -> Array:
    """Return the errors with those of levels that may be mixed covering every mixture: each may hold nothing, or all of them.

    What the group holds together is sure but for what it may share with levels outside it.
    """
    found = errors.copy()
    for group in groups:
        off = mixing_with_others(spectrum, group) + ROUNDING
        whole = float(shares[group].sum())
        room = 2 * np.sqrt(whole) * off + off**2 + float(np.sqrt(len(group))) * ROUNDING
        found[group] = np.minimum(np.maximum(shares[group], whole - shares[group]) + room, 1.0)
    return found


def _together(groups: list[list[int]], spectrum: Spectrum, shares: Array) -> list[str]:
    """Return what to say of levels whose weights mean something only together."""
    notes = []
    for group in groups:
        if shares[group].sum() > TOLD and spectrum.levels[group[0]].kind != "box":
            first, last = spectrum.levels[group[0]].index, spectrum.levels[group[-1]].index
            named = f"{first} and {last}" if len(group) == 2 else f"{first} to {last}"
            total = f"the sum of their weights, {shares[group].sum():.6g}"
            notes.append(f"levels {named} are too near to be told apart: only {total}, means something")
    return notes


def _notes(spectrum: Spectrum, prepared: Prepared, shares: Array) -> tuple[str, ...]:
    notes = []
    captured = float(shares.sum())
    if prepared.cut > TOLD:
        notes.append("the walls of the domain cut into this state")
    rest, boxed = 1 - captured, sum(share for level, share in zip(spectrum.levels, shares, strict=True) if level.kind == "box")
    if rest + boxed > TOLD:
        notes.append(f"{rest + boxed:.3g} of the state lies {_where(spectrum)}")
    if boxed > TOLD:
        notes.append(f"box levels stand for {boxed:.3g} of the state in the continuum; one by one they mean nothing")
    return tuple(notes)


def _where(spectrum: Spectrum) -> str:
    """Return where the part of a state lies that no bound level computed holds."""
    if spectrum.threshold is None:
        return "above the levels computed"
    all_found = spectrum.bound is not None and len(spectrum.levels) >= spectrum.bound
    return "in the continuum" if all_found else "above the levels computed, or in the continuum"
