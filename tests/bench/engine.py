"""Time the engine against dense solves tuned by hand and against 3-point differences, all to 1e-8 for ten levels.

Run: python tests/bench/engine.py [--repeats 9] [--cap 400000]. Not collected by pytest; nothing is asserted. One thread.

Errors are shares of the level's distance to the potential's minimum (of the level itself for Coulomb), against closed forms
or, where there is none, the largest dense rival. The dense rival's size is the least that reaches 1e-8, found before timing.
"""

from __future__ import annotations

import one_thread  # noqa: F401 - before numpy

# isort: split
import argparse
import statistics
import time
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

import numpy as np
from rivals import COUNT, differences, laguerre, pieces, ring_differences, sinc, waves
from scipy import optimize

from specterm.language import parse
from specterm.model import build
from specterm.spectrum import solve

GOAL = 1e-8
LAYERS = """layers x: thickness, V, m
    10 300 0.092
    7.2 0 0.067
    1.8 300 0.092
    5.4 0 0.067
    10 300 0.092
x in layers
H = p*(1/(2*m))*p + V"""
MASSES = np.array([0.092, 0.067, 0.092, 0.067, 0.092])
HEIGHTS = [300.0, 0.0, 300.0, 0.0, 300.0]


@dataclass(frozen=True)
class Case:
    """A sheet, closed-form levels or None, the lowest potential, dense rivals by increasing size, and 3-point differences."""

    name: str
    sheet: str
    exact: np.ndarray | None
    bottom: float
    dense: tuple[tuple[str, Callable[[], np.ndarray]], ...]
    three: Callable[[int], np.ndarray]
    start: int = 2000


def sized(potential: Callable, spans: list[tuple[float, float]]) -> tuple[tuple[str, Callable[[], np.ndarray]], ...]:
    """Return sinc solves of increasing size on several spans."""
    return tuple(
        (f"sinc {points} on {a:g}..{b:g}", partial(sinc, potential, a, b, points))
        for points in range(20, 241, 2)
        for a, b in spans
    )


def square_well(strength: float) -> np.ndarray:
    """Return levels of -f'' - strength on (-1, 1): k tan k = q and -k cot k = q (matching at the edge)."""

    def phase(k: float, n: int) -> float:
        return 2 * k - n * np.pi - 2 * np.arctan2(np.sqrt(max(0.0, strength - k * k)), k)

    top = np.sqrt(strength)
    return np.array([optimize.brentq(phase, 1e-9, top, args=(n,), xtol=1e-15) ** 2 for n in range(COUNT)]) - strength


def stack(x: np.ndarray, values: list[float] | np.ndarray) -> np.ndarray:
    """Return a piecewise-constant function over the layers."""
    return np.asarray(values)[np.clip(np.searchsorted([10, 17.2, 19.0, 24.4], x, side="right"), 0, 4)]


def cases() -> list[Case]:
    """Return all cases."""
    one, n = np.ones_like, np.arange(COUNT)

    def quartic(x: np.ndarray) -> np.ndarray:
        return x**4

    def double(x: np.ndarray) -> np.ndarray:
        return (x * x - 9) ** 2

    def morse(x: np.ndarray) -> np.ndarray:
        return 400 * (1 - np.exp(-x)) ** 2

    def well(x: np.ndarray) -> np.ndarray:
        return np.where(np.abs(x) < 1, -300.0, 0.0)

    corners = [7.0, 10.0, 17.2, 19.0, 24.4, 27.4]
    return [
        Case("quartic", "H = p^2 + x^4; x in (-inf, inf)", None, 0.0,
             sized(quartic, [(-a, a) for a in (3.6, 3.8, 4.0, 4.2, 4.4)]),
             lambda steps: differences(one, quartic, -4.6, 4.6, steps)),
        Case("deep double well", "H = p^2 + (x^2 - 9)^2; x in (-inf, inf)", None, 0.0,
             sized(double, [(-a, a) for a in (4.6, 4.8, 5.0, 5.2)]),
             lambda steps: differences(one, double, -5.4, 5.4, steps)),
        Case("Morse", "H = p^2 + 400*(1 - exp(-x))^2; x in (-inf, inf)", 400 - (20 - n - 0.5) ** 2.0, 0.0,
             sized(morse, [(-a, b) for a in (0.85, 0.9) for b in (2.5, 3.0, 3.5)]),
             lambda steps: differences(one, morse, -1.0, 4.0, steps)),
        Case("square well", "H = p^2 - where(abs(x) < 1, 300, 0); x in (-inf, inf)", square_well(300.0), -300.0,
             tuple((f"3 polynomials to {d}, tail {b}",
                    partial(pieces, [-1 - b, -1, 1, 1 + b], [1] * 3, [0, -300, 0], [c, d, c]))
                   for d in range(16, 40, 2) for c in (d // 2, 2 * d // 3, d) for b in (0.8, 1.0, 1.3)),
             lambda steps: differences(one, well, -3.0, 3.0, steps), 3000),
        Case("layered mass", LAYERS, None, 0.0,
             tuple((f"5 polynomials to {d}", partial(pieces, corners, list(0.5 / MASSES), HEIGHTS, [c, d, c, d, c]))
                   for d in range(12, 40, 2) for c in (d // 2, 2 * d // 3, d)),
             lambda steps: differences(lambda x: stack(x, 0.5 / MASSES), lambda x: stack(x, HEIGHTS), 7.0, 27.4, steps), 1020),
        Case("radial Coulomb", "H = p^2 - 2/r; r in (0, inf)", -1.0 / (n + 1) ** 2, 0.0,
             tuple((f"Laguerre mesh {points}, scale {h}", partial(laguerre, h, points))
                   for points in range(20, 121, 2) for h in (1.5, 2.0, 2.5, 3.0, 4.0)),
             lambda steps: differences(one, lambda r: -2 / r, 0.0, 320.0, steps), 8000),
        Case("cosine on a ring", "H = p^2 + 20*cos(x); x in ring(0, 2*pi)", None, -20.0,
             tuple((f"{2 * m + 1} exponentials", partial(waves, 20.0, m)) for m in range(6, 40)),
             lambda steps: ring_differences(20.0, steps), 1000),
    ]  # fmt: skip


def timed(work: Callable[[], object], repeats: int) -> float:
    """Return the median seconds of a piece of work."""
    seconds = []
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        seconds.append(time.perf_counter() - start)
    return statistics.median(seconds)


def engine_seconds(case: Case, repeats: int) -> tuple[float, float]:
    """Return median seconds of the solve alone on a model made anew each time, and of parse, build and solve."""
    alone, whole = [], []
    for _ in range(repeats):
        start = time.perf_counter()
        model = build(parse(case.sheet))
        built = time.perf_counter()
        solve(model, count=COUNT)
        end = time.perf_counter()
        alone.append(end - built)
        whole.append(end - start)
    return statistics.median(alone), statistics.median(whole)


def tuned(case: Case, off: Callable[[np.ndarray], float]) -> tuple[str, Callable[[], np.ndarray], float]:
    """Return the smallest dense rival that reaches the goal, or the best of all."""
    best = ("", case.dense[0][1], np.inf)
    for name, work in case.dense:
        error = off(work())
        if error < best[2]:
            best = (name, work, error)
        if error <= GOAL:
            break
    return best


def refined(case: Case, off: Callable[[np.ndarray], float], cap: int) -> tuple[int, float, float]:
    """Return steps, seconds and error of 3-point differences doubled until the goal, the cap, or rounding stops them."""
    steps, best = case.start, (case.start, 0.0, np.inf)
    while steps <= cap:
        start = time.perf_counter()
        error = off(case.three(steps))
        seconds = time.perf_counter() - start
        if error > best[2]:
            break
        best = (steps, seconds, error)
        if error <= GOAL:
            break
        steps *= 2
    return best


def measure(case: Case, repeats: int, cap: int) -> None:
    """Print one row of the table, and what the rival was."""
    truth = case.exact
    if truth is None:
        truth = case.dense[-1][1]()
    scale = np.abs(truth - case.bottom)

    def off(values: np.ndarray) -> float:
        return float((np.abs(values - truth) / scale).max())

    found = np.array([level.value for level in solve(build(parse(case.sheet)), count=COUNT).levels])
    name, work, dense_error = tuned(case, off)
    steps, three, three_error = refined(case, off, cap)
    alone, whole = engine_seconds(case, repeats)
    dense = timed(work, repeats)
    print(
        f"{case.name:17s} {1e3 * alone:7.2f} {1e3 * whole:7.2f} {1e3 * dense:7.2f} {1e3 * three:9.1f}"
        f" {alone / dense:7.1f} {three / alone:8.1f}   {off(found):.0e} {dense_error:.0e} {three_error:.0e}"
        f"   {name}; {steps} steps",
        flush=True,
    )


def many(sheet: str, repeats: int) -> None:
    """Print the times of more and more levels of one sheet."""
    for count in (10, 100, 1000):
        model = build(parse(sheet))
        seconds = timed(lambda model=model, count=count: solve(model, count=count), max(1, repeats // (1 + count // 100)))
        found = solve(model, count=count)
        worst = max(level.error / level.value for level in found.levels)
        print(
            f"{count:5d} levels of {sheet}: {1e3 * seconds:8.1f} ms, {found.unknowns} unknowns, relative errors to {worst:.0e}"
        )


def main() -> None:
    """Print all tables."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--repeats", type=int, default=9)
    parser.add_argument("--cap", type=int, default=400_000, help="most steps of 3-point differences")
    options = parser.parse_args()
    print("milliseconds, medians          engine  +build   dense   3-point  /dense 3-point/   errors: engine dense 3-point")
    for case in cases():
        measure(case, options.repeats, options.cap)
    many("H = p^2 + x^4; x in (-inf, inf)", options.repeats)


if __name__ == "__main__":
    main()
