"""Evolution of a prepared state by the exact phases of its levels: survival, means and spreads, densities, revivals."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from specterm.analysis.matrix_elements import elements, jets, shared_rule
from specterm.analysis.moment_errors import moment_errors
from specterm.analysis.observables import Observable, observable
from specterm.analysis.prepared import prepare
from specterm.analysis.unit_names import Scaled
from specterm.analysis.weights import Weights, project
from specterm.arrays import Array, Values
from specterm.errors import PhysicsError
from specterm.model import Model
from specterm.spectrum import Spectrum
from specterm.spectrum.result import States

TRUSTED = 1 - 1e-6
"""A captured share below this is told, and below `NEEDED` refused."""
NEEDED = 0.5
NEARLY_ALL = 1 - 1e-9
"""The share of a state that levels are computed for where nobody says how many, and how many there are at most."""
MOST_LEVELS = 300
MISMATCH = 1e-6
"""Where the mean taken on the wave differs from that of the matrix by this share, the wave bends and the spread is infinite."""
BLURRED = 1e-3
"""Phases off by more than this on the mean are told."""
BLOCK = 2_000


@dataclass(frozen=True)
class Packet:
    """A state as a sum of eigenstates: complex `amplitudes` and `energies` (levels,), the `states`, and hbar."""

    states: States
    amplitudes: Values
    energies: Array
    hbar: float

    def at(self, times: Array) -> Values:
        """Return the amplitudes at the times, shape (times, levels), up to a common phase."""
        middle = self.energies - self.energies[np.argmax(np.abs(self.amplitudes))]
        turned: Values = self.amplitudes * np.exp(-1j * np.outer(times, middle) / self.hbar)
        return turned

    def wave(self, x: Array, times: Array) -> Values:
        """Return psi(x, t), shape (times, n), up to a phase common to all places."""
        psi: Values = self.at(times) @ self.states.evaluate(x)
        return psi


def packet_of(model: Model, spectrum: Spectrum, weights: Weights) -> Packet:
    """Return the captured part of a state as a packet; PhysicsError without levels."""
    if spectrum.states is None:
        raise PhysicsError("there is no level to evolve with", mend="the operator binds nothing")
    amplitudes = np.array([w.amplitude for w in weights.weights])
    return Packet(spectrum.states, amplitudes, np.array([w.value for w in weights.weights]), model.hbar)


@dataclass(frozen=True)
class Evolution:
    """What becomes of a state: arrays over `times` (n,), in the sheet's unit of time.

    `survival` is |<psi(0)|psi(t)>|^2 with bounds on its error; `mean` and `spread` are those of `observable` in the captured
    part, `mean_error` and `spread_error` bound how far those of the whole state are from them, nan where nothing does;
    `observable_unit` is theirs, or that in `shown` after division by the number there; `classical` and `revival` are the
    period 2 pi hbar/|E'| and the revival time 4 pi hbar/|E''| at the mean level number, None where they mean nothing.
    """

    state: str
    observable: str
    times: Array
    survival: Array
    survival_error: Array
    mean: Array
    spread: Array
    mean_error: Array
    spread_error: Array
    captured: float
    classical: float | None
    revival: float | None
    unit: str
    observable_unit: str
    shown: Scaled
    notes: tuple[str, ...]


def evolve(
    model: Model,
    spectrum: Spectrum,
    state: str,
    times: Sequence[float],
    observed: str | None = None,
    folder: Path | None = None,
) -> Evolution:
    """Return survival probability, mean and spread of an observable (default: the coordinate) at the times given.

    The phases exp(-i E t/hbar) are exact: there are no time steps. Raises PhysicsError where the levels computed hold less than
    half of the state, or the observable is not Hermitian or above order two.
    """
    weights = project(model, spectrum, state, folder)
    if weights.captured < NEEDED:
        raise PhysicsError(
            f"the levels computed hold only {weights.captured:.3g} of {state}: its evolution cannot be told from them",
            mend="ask for more levels with -n; what lies in the continuum stays out of reach",
        )
    at = np.asarray(times, dtype=float)
    _refuse_endless(model, spectrum, at)
    packet = packet_of(model, spectrum, weights)
    survival, error = _survival(model, spectrum, weights, at)
    asked = observable(model, observed or model.domain.coordinate)
    mean, spread = _moments(spectrum, packet, asked, at)
    prepared = prepare(model, spectrum, state, folder)
    errors = moment_errors(model, spectrum, prepared, asked, (at, packet.amplitudes, mean, spread))
    notes = list(weights.notes)
    if weights.captured < TRUSTED:
        notes.append(f"mean and spread are those of the {weights.captured:.7g} of the state that the levels hold")
    blurred = at[_phase_slip(model, spectrum, weights, at) > BLURRED]
    if len(blurred):
        first = blurred[np.argmin(np.abs(blurred))]
        notes.append(f"from time {first:.6g} on the levels are not sure enough for the phases: trust no means there")
    if np.isnan(errors[0]).any():
        notes.append(f"no bound on the error of the mean of `{asked.text}`: what is not captured may hold any value of it")
    if np.isinf(spread).any():
        notes.append(f"the spread of `{asked.text}` is infinite: the wave bends where it cannot be applied twice")
    return Evolution(
        state, asked.text, at, survival, error, mean, spread, *errors, weights.captured, *revivals(model, weights),
        model.units.time, asked.unit, asked.shown, tuple(notes),
    )  # fmt: skip


def _refuse_endless(model: Model, spectrum: Spectrum, times: Array) -> None:
    """Raise PhysicsError for times whose phases are beyond all numbers."""
    reach = max((abs(level.value) for level in spectrum.levels), default=0.0) / model.hbar
    with np.errstate(over="ignore", invalid="ignore"):
        if not np.isfinite(4 * times * reach).all():
            raise PhysicsError("the phases at such times are beyond all numbers", mend="ask for shorter times")


def _survival(model: Model, spectrum: Spectrum, weights: Weights, times: Array) -> tuple[Array, Array]:
    """Return |sum of w exp(-i E t/hbar)|^2 and a bound on its error: what is not captured, errors of weights and of phases."""
    w = np.array([weight.weight for weight in weights.weights])
    values = np.array([level.value for level in spectrum.levels])
    turns = np.outer(times, values - values[np.argmax(w)]) / model.hbar
    amplitude = np.exp(-1j * turns) @ w
    slip = _phase_slip(model, spectrum, weights, times)
    off = max(0.0, 1 - weights.captured) + slip + sum(weight.error for weight in weights.weights)
    size = np.abs(amplitude)
    return size**2, np.minimum(2 * size * off + off**2, 1.0)


def _phase_slip(model: Model, spectrum: Spectrum, weights: Weights, times: Array) -> Array:
    """Return bounds on the mean error of the phase factors at each time, from the errors of the levels and rounding."""
    w = np.array([weight.weight for weight in weights.weights])
    values = np.array([level.value for level in spectrum.levels])
    blur = np.array([np.inf if level.error is None else level.error for level in spectrum.levels])
    turns = np.outer(times, values - values[np.argmax(w)]) / model.hbar
    with np.errstate(invalid="ignore"):
        phase = np.abs(times)[:, None] / model.hbar * (blur + blur[np.argmax(w)]) + 4 * np.finfo(float).eps * np.abs(turns)
    slip: Array = np.minimum(np.where(times[:, None] == 0, 0.0, phase), 2.0) @ w
    return slip


def _moments(spectrum: Spectrum, packet: Packet, asked: Observable, times: Array) -> tuple[Array, Array]:
    """Return mean and spread of the observable at each time, in the normalised captured part."""
    turned = packet.at(times)
    norm = (np.abs(turned) ** 2).sum(axis=1)
    matrix = elements(asked, spectrum, spectrum).values
    mean = np.real(np.einsum("tm,mn,tn->t", turned.conj(), matrix, turned, optimize=True)) / norm
    rule = shared_rule(asked, packet.states, packet.states)
    square, strong = np.zeros(len(times)), np.zeros(len(times))
    for start in range(0, len(rule.x), BLOCK):
        x, w = rule.x[start : start + BLOCK], rule.w[start : start + BLOCK]
        jet = jets(packet.states, x, asked.order)
        psi, moved = turned @ jet(x, 0), turned @ asked.apply(jet, x)
        square += (w * np.abs(moved - mean[:, None] * psi) ** 2).sum(axis=1) / norm
        strong += np.real((w * psi.conj() * moved).sum(axis=1)) / norm
    bends = asked.order > 1 and bool((np.abs(strong - mean) > MISMATCH * (np.abs(mean) + np.sqrt(square))).any())
    return mean, np.full(len(times), np.inf) if bends else np.sqrt(square)


def revivals(model: Model, weights: Weights) -> tuple[float | None, float | None]:
    """Return the classical period and the revival time of a state, from the levels around its mean level number.

    With E(n) as the parabola through the three levels nearest to the mean number: 2 pi hbar/|E'| and 4 pi hbar/|E''|
    (Averbukh and Perelman 1989, from memory). Two levels only: their beat period and None.
    """
    w = np.array([weight.weight for weight in weights.weights])
    values = np.array([weight.value for weight in weights.weights])
    if len(w) < 2 or w.sum() == 0:
        return None, None
    first, second = np.sort(np.argsort(w)[-2:])
    if w[first] + w[second] > (1 - 1e-9) * w.sum():
        gap = abs(values[second] - values[first])
        both = w[[first, second]].min() > 1e-9 * w.sum()
        return (2 * math.pi * model.hbar / gap if gap > 0 and both else None), None
    numbers = np.array([weight.index for weight in weights.weights], dtype=float)
    mean = float((w * numbers).sum() / w.sum())
    row = int(np.clip(np.argmin(np.abs(numbers - mean)), 1, len(w) - 2))
    bend = values[row + 1] - 2 * values[row] + values[row - 1]
    slope = (values[row + 1] - values[row - 1]) / 2 + bend * (mean - numbers[row])
    flat = 1e-9 * float(np.abs(slope))
    return (
        2 * math.pi * model.hbar / abs(slope) if slope else None,
        4 * math.pi * model.hbar / abs(bend) if abs(bend) > flat else None,
    )


def places_of(packet: Packet, times: Array, ends: tuple[float, float], count: int, *, finer: int, least: float) -> Array:
    """Return `count` places where |psi|^2 rises above `least` of its largest, looked for on `finer` times as many."""
    wide = np.linspace(*ends, finer * count)
    size = (np.abs(packet.wave(wide, times)) ** 2).max(axis=0)
    alive = wide[size > least * size.max()]
    return np.linspace(alive[0], alive[-1], count)


def usual_times(model: Model, weights: Weights) -> tuple[float, float, int]:
    """Return times worth looking at, as start, end and count: two classical periods, or a unit of time without one."""
    classical, _ = revivals(model, weights)
    return 0.0, 2 * classical if classical and math.isfinite(classical) else 1.0, 241
