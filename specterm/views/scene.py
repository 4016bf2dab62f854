"""What a level figure shows, sampled: potential, levels and eigenstates in a sensible window, still without a size in cells."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from specterm.spectrum.result import Level, Spectrum
from specterm.views.window import Window, energy_window, extents, x_window, zoomed

Floats = NDArray[np.float64]
MODES = ("psi", "density", "levels")


@dataclass(frozen=True, slots=True)
class Axes:
    """The coordinate's name, the units of length and energy ("" when dimensionless), and the domain's ends.

    An end is "wall", "free", "open" or "ring", as in the model.
    """

    coordinate: str = "x"
    length: str = ""
    energy: str = ""
    left: float = -np.inf
    right: float = np.inf
    left_end: str = "open"
    right_end: str = "open"


@dataclass(frozen=True)
class Prepared:
    """A prepared state to draw at its mean energy; `wave` maps places (n,) to complex values (n,)."""

    name: str
    mean: float
    wave: Callable[[Floats], NDArray[Any]]


@dataclass(frozen=True)
class Behind:
    """A pinned spectrum to draw faintly behind: its potential, the chosen level there and the wave of its state, if any.

    `potential` and `wave` map places (n,) to (n,); outside its own domain the potential is nan and the wave 0.
    """

    potential: Callable[[Floats], Floats]
    value: float | None = None
    wave: Callable[[Floats], NDArray[Any]] | None = None


@dataclass(frozen=True)
class Source:
    """A spectrum with what its figures need besides: the potential, the axes, and where each state lives, shape (levels, 2)."""

    spectrum: Spectrum | None
    potential: Callable[[Floats], Floats]
    axes: Axes
    found: Floats


@dataclass(frozen=True)
class Scene:
    """A figure ready to be drawn.

    x (n,), potential (n,) in the unit of energy, levels and waves (levels, n) real or complex, `chosen` a place in `levels` or
    None, `window` the places and `energies` the energies shown.
    """

    axes: Axes
    x: Floats
    potential: Floats
    levels: tuple[Level, ...]
    waves: NDArray[Any]
    chosen: int | None
    threshold: float | None
    window: Window
    energies: Window
    from_top: bool = False
    prepared: tuple[str, float, NDArray[Any]] | None = None
    behind: tuple[Floats, float | None, NDArray[Any] | None] | None = None

    @property
    def is_complex(self) -> bool:
        """Whether any eigenstate shown is truly complex."""
        return bool(np.iscomplexobj(self.waves)) and bool(np.abs(self.waves.imag).max(initial=0.0) > 0)


def source(spectrum: Spectrum | None, potential: Callable[[Floats], Floats], axes: Axes) -> Source:
    """Return the source of figures of one spectrum; done once a spectrum, the scene once a step."""
    if spectrum is None or not spectrum.levels:
        return Source(spectrum, potential, axes, np.empty((0, 2)))
    evaluate: Any = spectrum.states

    def density(places: Floats) -> Floats:
        return np.asarray(np.abs(evaluate.evaluate(places)) ** 2, dtype=np.float64)

    return Source(spectrum, potential, axes, extents(density, spectrum.left, spectrum.right))


def scene(
    origin: Source,
    chosen: int | None,
    *,
    samples: int = 800,
    only: tuple[int, ...] | None = None,
    prepared: Prepared | None = None,
    behind: Behind | None = None,
    zoom: bool = True,
) -> Scene:
    """Return the scene for the chosen level (its place in the spectrum, or None); `only` keeps levels with these indices.

    `zoom` shows crowded levels around the chosen one alone, else all are in view.
    """
    spectrum, axes = origin.spectrum, origin.axes
    left, right = _ends(axes, spectrum)
    levels = spectrum.levels if spectrum else ()
    kept = [place for place, level in enumerate(levels) if only is None or level.index in only or place == chosen]
    ring = axes.left_end == "ring"
    closed = (np.isfinite(axes.left) and axes.left_end != "open", np.isfinite(axes.right) and axes.right_end != "open")
    focus = kept.index(chosen) if chosen is not None and chosen in kept else None
    shown = x_window(_telling(origin.found, levels, kept, chosen), focus, left, right, closed, whole=ring)
    x = np.linspace(max(shown[0], left), min(shown[1], right), max(2, samples))
    potential = np.asarray(origin.potential(x), dtype=np.float64)
    states: Any = spectrum.states if spectrum else None
    waves = np.asarray(states.evaluate(x))[kept] if kept else np.empty((0, len(x)))
    values = np.array([levels[place].value for place in kept] + ([prepared.mean] if prepared else []))
    threshold = spectrum.threshold if spectrum else None
    from_top = spectrum.from_top if spectrum else False
    energies = energy_window(values, potential, threshold, from_top=from_top)
    if zoom and focus is not None:
        energies = zoomed(values, values[focus], energies)
    return Scene(
        axes, x, potential, tuple(levels[place] for place in kept), waves, focus, threshold, shown,
        energies, from_top,
        (prepared.name, prepared.mean, np.asarray(prepared.wave(x))) if prepared else None,
        (behind.potential(x), behind.value, np.asarray(behind.wave(x)) if behind.wave else None) if behind else None,
    )


def _telling(found: Floats, levels: tuple[Level, ...], kept: list[int], chosen: int | None) -> Floats:
    """Return where the kept states live, NaN for those that fill the box only because there is one; the chosen one counts."""
    told = found[kept]
    real = np.array([levels[place].kind != "box" or place == chosen for place in kept], dtype=bool)
    return np.where(real[:, None], told, np.nan) if real.any() else told


def _ends(axes: Axes, spectrum: Spectrum | None) -> Window:
    """Return finite ends: those computed on, else those of the domain, else a unit interval."""
    left, right = (spectrum.left, spectrum.right) if spectrum else (axes.left, axes.right)
    left = left if np.isfinite(left) else (min(-10.0, right - 20) if np.isfinite(right) else -10.0)
    right = right if np.isfinite(right) else max(10.0, left + 20)
    return (left, right) if left < right else (left, left + 1.0)
