"""Bounds on the errors of means and spreads of an evolving state, of which some may be missing from the levels computed."""

from __future__ import annotations

import numpy as np

from specterm.analysis.commutator import vanishing, vanishing_on_levels
from specterm.analysis.expectation import ROUNDING, STEEPER, expect
from specterm.analysis.matrix_elements import MatrixElements, elements
from specterm.analysis.missing_part import missing_of
from specterm.analysis.observables import Observable, of_operator
from specterm.analysis.prepared import Prepared, slips
from specterm.arrays import Array, Values
from specterm.errors import PhysicsError, SpectermError
from specterm.model import Model
from specterm.spectrum import Spectrum

Course = tuple[Array, Values, Array, Array]
"""Times (n,), the amplitudes held (levels,), and mean and spread in the part held at the times (n,)."""


def moment_errors(
    model: Model, spectrum: Spectrum, prepared: Prepared, asked: Observable, course: Course
) -> tuple[Array, Array]:
    """Return bounds on the errors of mean and spread at the times, (n,) each, nan where there is none.

    With psi = phi + chi, phi being held, <psi|A - m|psi> is at most 2 ||(A - m) phi|| ||chi|| + |<chi|A - m|chi>|, and the
    spread, the least ||(A - c) psi|| over c, moves by ||(A - m) chi|| and what phi lost of its norm. Errors of eigenstates and
    of phases count as missing too. What commutes with the operator keeps the mean it had in the prepared state.
    """
    times, amplitudes, mean, spread = course
    if _conserved(model, spectrum, asked):
        return _kept(model, prepared, asked, mean, spread)
    centre = float(np.median(mean))
    shifted = of_operator(asked.operator - centre, asked.text)
    missing = missing_of(model, spectrum, prepared, amplitudes)
    off = np.abs(mean - centre) * missing.size
    still = missing.bound(shifted, times)
    beyond, share = still + off, missing.share(shifted, still) + missing.size * off
    known = elements(shifted, spectrum, spectrum)
    size = np.abs(amplitudes)
    blur = _blurred(model, spectrum, times, amplitudes)
    strayed = np.linalg.norm(size * blur, axis=1)
    carried = (size * blur) @ _reach(known) * STEEPER[asked.order]
    held = min(1.0, float(np.linalg.norm(amplitudes)))
    with np.errstate(invalid="ignore"):
        steep = np.where(np.isfinite(spread), spread, np.linalg.norm(_reach(known) * size)) * held
        mean_error = 2 * steep * (missing.size + strayed) + share + strayed * carried
        mean_error = mean_error + float(size @ known.errors @ size)
        moved = beyond + carried + mean_error * missing.size
        spread_error = (1 - held) * spread + moved
    return _finite(mean_error), np.where(np.isfinite(spread), _finite(spread_error), np.nan)


def _finite(errors: Array) -> Array:
    return np.where(np.isfinite(errors), errors, np.nan)


def _reach(known: MatrixElements) -> Array:
    """Return ||A n|| for each level, as far as the other levels see it."""
    found: Array = np.linalg.norm(known.values, axis=0)
    return found


def _blurred(model: Model, spectrum: Spectrum, times: Array, amplitudes: Values) -> Array:
    """Return how far each level may be off in norm at each time, (times, levels): its state, and its phase."""
    blur = np.array([np.inf if level.error is None else level.error for level in spectrum.levels])
    own = blur[np.argmax(np.abs(amplitudes))]
    with np.errstate(invalid="ignore"):
        phase = np.abs(times)[:, None] / model.hbar * (blur + own)
    turned: Array = np.minimum(np.where(times[:, None] == 0, 0.0, phase), 2.0) + slips(spectrum) + ROUNDING
    return turned


def _conserved(model: Model, spectrum: Spectrum, asked: Observable) -> bool:
    """Say whether an observable commutes with the operator, at the ends of the domain too."""
    try:
        own = of_operator(model.operator, model.main)
        return vanishing(own.operator.commutator(asked.operator)) and vanishing_on_levels(spectrum, own, asked)
    except SpectermError:
        return False


def _kept(model: Model, prepared: Prepared, asked: Observable, mean: Array, spread: Array) -> tuple[Array, Array]:
    """Return how far mean and spread of a conserved observable are from those of the prepared state."""
    nothing = np.full(len(mean), np.nan)
    try:
        found = expect(model, asked, prepared)
    except PhysicsError:
        return nothing, nothing
    if found.error is None or found.spread_error is None:
        return nothing, nothing
    spread_error = np.abs(spread - found.spread) + found.spread_error if np.isfinite(found.spread) else nothing
    return np.abs(mean - found.mean) + found.error, spread_error
