"""One computation for the screen: from the text of a sheet to everything the panes show. Knows nothing of the screen."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from specterm.errors import PhysicsError, SpectermError, WorkStopped
from specterm.spectrum.result import Spectrum
from specterm.views.level_table import Weighing
from specterm.views.scene import Prepared, Source, source
from specterm.views.status import MomentsText, Units


class Engine(Protocol):
    """What the screen asks of the parts below; `BuiltIn` is the real one."""

    def build(self, text: str, folder: Path, overrides: Mapping[str, str]) -> Any:  # noqa: ANN401 - a model, opaque here
        """Return the model a sheet describes; raises SpectermError."""

    def solve(self, model: Any, **options: Any) -> Spectrum:  # noqa: ANN401 - a model, opaque here
        """Return the spectrum; raises SpectermError."""

    def potential(self, model: Any, x: NDArray[np.float64]) -> NDArray[np.float64]:  # noqa: ANN401 - a model, opaque here
        """Return the effective potential at x (n,)."""

    def moments(self, model: Any, spectrum: Spectrum, index: int) -> Any:  # noqa: ANN401 - attributes x, spread_x, p, spread_p
        """Return expectation and spread of place and momentum."""

    def project(self, model: Any, spectrum: Spectrum, name: str, folder: Path) -> Any:  # noqa: ANN401 - the analysis part's weights
        """Return the projection weights of a prepared state or of `level(n)`; other sheets are looked for from `folder` on."""


class BuiltIn:
    """The parts of specterm below the screen, imported when first used."""

    def build(self, text: str, folder: Path, overrides: Mapping[str, str]) -> Any:  # noqa: ANN401 - a model
        """Return the model a sheet describes."""
        from specterm.language import parse  # noqa: PLC0415 - the first frame does not wait for it
        from specterm.model import build  # noqa: PLC0415 - as above

        return build(parse(text), folder=folder, overrides=overrides or None)

    def solve(self, model: Any, **options: Any) -> Spectrum:  # noqa: ANN401 - a model
        """Return the spectrum."""
        from specterm.analysis import solve  # noqa: PLC0415 - the first frame does not wait for it

        return solve(model, **options)

    def potential(self, model: Any, x: NDArray[np.float64]) -> NDArray[np.float64]:  # noqa: ANN401 - a model
        """Return the effective potential at x (n,)."""
        from specterm.analysis import potential_curve  # noqa: PLC0415 - the first frame does not wait for it

        return potential_curve(model, x)

    def moments(self, model: Any, spectrum: Spectrum, index: int) -> Any:  # noqa: ANN401 - a model
        """Return expectation and spread of place and momentum."""
        from specterm.analysis import moments  # noqa: PLC0415 - the first frame does not wait for it

        return moments(model, spectrum, index)

    def project(self, model: Any, spectrum: Spectrum, name: str, folder: Path) -> Any:  # noqa: ANN401 - a model
        """Return the projection weights of a prepared state or of a level."""
        from specterm.analysis import project  # noqa: PLC0415 - the first frame does not wait for it

        return project(model, spectrum, name, folder)


@dataclass(frozen=True)
class Request:
    """One computation asked for; the one with the highest `number` counts."""

    number: int
    text: str
    folder: Path = field(default_factory=Path)
    count: int | None = None
    near: float | None = None
    tolerance: float = 1e-8
    overrides: Mapping[str, str] = field(default_factory=dict)


def digest_of(request: Request) -> str:
    """Return a short text that differs between requests for different sheets."""
    whole = "\0".join([request.text, *(f"{name}={value}" for name, value in sorted(request.overrides.items()))])
    return hashlib.sha256(whole.encode("utf-8", "surrogateescape")).hexdigest()[:12]


@dataclass(frozen=True, eq=False)
class Outcome:
    """What came of a request: `origin` holds the spectrum and what its figure needs, `error` why there is none.

    `model` is None when the sheet could not be understood; then `origin` is None too and what was shown before stays.
    """

    request: Request
    model: Any = None
    origin: Source | None = None
    units: Units = field(default_factory=Units)
    states: tuple[str, ...] = ()
    error: SpectermError | None = None
    notes: tuple[str, ...] = ()

    @property
    def spectrum(self) -> Spectrum | None:
        """The spectrum, or None."""
        return self.origin.spectrum if self.origin else None


def compute(engine: Engine, request: Request, should_stop: Callable[[], bool], progress: Callable[[str], None]) -> Outcome:
    """Return the outcome of a request; every failure is an error in it, nothing is raised."""
    try:
        model = engine.build(request.text, request.folder, request.overrides)
        return _computed(engine, model, request, should_stop, progress)
    except SpectermError as error:
        return Outcome(request, error=error)
    except Exception as error:  # the edge of the screen: a defect below must not end the session
        return Outcome(request, error=defect(error))


def _computed(
    engine: Engine,
    model: Any,  # noqa: ANN401 - a model
    request: Request,
    should_stop: Callable[[], bool],
    progress: Callable[[str], None],
) -> Outcome:
    """Return the outcome for a model; an error of the solution leaves the potential to show."""
    spectrum: Spectrum | None = None
    origin: Source | None = None
    failure: SpectermError | None = None
    try:
        options = {"count": request.count, "near": request.near, "tolerance": request.tolerance}
        spectrum = engine.solve(model, **options, should_stop=should_stop, progress=progress)
        origin = _origin(engine, model, spectrum)
    except SpectermError as error:
        failure, origin = error, _origin_without(engine, model, error)
    except Exception as error:  # as above
        failure = defect(error)
    from specterm.views.of_model import units_of  # noqa: PLC0415 - it brings the engine, the first frame does not wait for it

    notes = (*model.warnings, *(spectrum.notes if spectrum else ()))
    return Outcome(request, model, origin, units_of(model), tuple(model.states), failure, notes)


def defect(error: Exception) -> SpectermError:
    """Return a defect of specterm itself as an error a user can read."""
    words = f"specterm failed here ({type(error).__name__}: {error})"
    return PhysicsError(words, mend="this is a defect; save the sheet and report it")


def _origin(engine: Engine, model: Any, spectrum: Spectrum | None) -> Source:  # noqa: ANN401 - a model
    """Return what the figure needs."""
    from specterm.views.of_model import axes_of  # noqa: PLC0415 - it brings the engine, the first frame does not wait for it

    return source(spectrum, lambda x: engine.potential(model, x), axes_of(model))


def _origin_without(engine: Engine, model: Any, error: SpectermError) -> Source | None:  # noqa: ANN401 - a model
    """Return what a figure without levels needs, or None when there is no potential to show or the work was stopped."""
    if isinstance(error, WorkStopped):
        return None
    try:
        origin = _origin(engine, model, None)
        origin.potential(np.array([0.0]))
    except Exception:  # the reason why there are no levels is what the user must see
        return None
    return origin


@dataclass(frozen=True, eq=False)
class Weighed:
    """The weights of a prepared state with its wave, or the error that stands in their way."""

    state: str
    weighing: Weighing | None = None
    prepared: Prepared | None = None
    mean: float = float("nan")
    spread: float = float("nan")
    notes: tuple[str, ...] = ()
    error: SpectermError | None = None


def weigh(engine: Engine, outcome: Outcome, name: str) -> Weighed:
    """Return the weights of the prepared state `name`; nothing is raised."""
    if outcome.spectrum is None:
        return Weighed(name)
    try:
        found = engine.project(outcome.model, outcome.spectrum, name, outcome.request.folder)
    except SpectermError as error:
        return Weighed(name, error=error)
    except Exception as error:  # the edge of the screen: a defect below must not end the session
        return Weighed(name, error=defect(error))
    from specterm.views.of_model import prepared_of, weighing_of  # noqa: PLC0415 - as above

    return Weighed(name, weighing_of(found), prepared_of(found), found.mean, found.spread, found.notes)


def moments_of(engine: Engine, outcome: Outcome, place: int) -> MomentsText | None:
    """Return expectation and spread of place and momentum in the level at `place`, or None; nothing is raised."""
    spectrum = outcome.spectrum
    if spectrum is None or place >= len(spectrum.levels):
        return None
    try:
        found = engine.moments(outcome.model, spectrum, spectrum.levels[place].index)
    except Exception:  # a line without moments is better than a session that ends
        return None
    unit = outcome.model.hbar if outcome.units.momentum else 1.0
    return MomentsText(found.x, found.spread_x, found.p / unit, found.spread_p / unit)
