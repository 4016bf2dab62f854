"""Derivatives of sampled functions with respect to a number: central differences, extrapolated (Ridders' scheme).

C. J. F. Ridders, Adv. Eng. Software 4 (1982) 75. Only functions are evaluated, no level is solved for.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from specterm.analysis.samples import Samples

FIRST = 0.02
"""The first step as a share of the number."""
MOST = 30
"""So many steps, each half the one before, are tried."""
DEEPEST = 5
"""So many steps are extrapolated at most."""
SETTLED = 1e-12
"""Share of the derivative that ends the extrapolation."""
GOOD = 1e-10
"""Share of the derivative with which rounding may end it."""
LINEAR = 1e-3
"""Curvature beside slope below which a first step may be made longer."""
FAINT = 1e-5
"""A first step that changes less than this share of the quotient is made longer."""
LONGER, LONGEST = 16.0, 256
"""... by this factor, so often at most: what counts is what the step does, not how small the number is."""
REFUSED = 6
"""So many steps without a model on either side, each a quarter of the one before, end the search."""
QUADRATIC = 0.5
"""The even part of a change must fall to this share when the step is halved; to a quarter once the step is small."""
EPS = 2.3e-16

Size = Callable[[Samples], float]
Sampled = Callable[[float], "Samples | str"]


@dataclass(frozen=True)
class Steps:
    """Steps, each half of the one before, whose differences are extrapolated to the derivative."""

    longest: float
    count: int

    @property
    def all(self) -> tuple[float, ...]:
        """The steps, the longest first."""
        return tuple(self.longest * 0.5**k for k in range(self.count))

    @property
    def shortest(self) -> float:
        """The last step."""
        return self.longest * 0.5 ** (self.count - 1)


def derivative(sample: Callable[[float], Samples], steps: Steps) -> tuple[Samples, Samples]:
    """Return the extrapolated derivative, and its difference from the best one of lower order."""
    row: list[Samples] = []
    before = row
    for step in steps.all:
        before, row = row, [(sample(step) - sample(-step)) * (0.5 / step)]
        for order, coarser in enumerate(before, 1):
            row.append(row[-1] + (row[-1] - coarser) * (1.0 / (4.0**order - 1)))
    return row[-1], row[-1] - (row[-2] if len(row) > 1 else row[-1])


def find_steps(sample: Sampled, size: Size, first: float, noise: float = 0.0) -> Steps | str:
    """Return steps that give the derivative as well as rounding allows, or why there are none.

    `sample` gives the functions at a displacement or the reason why it has none; `size` measures samples. Steps over which the
    functions do not change smoothly (the even part of the change must fall as the square of the step) are left out. `noise` is
    the size of the rounding of the samples, that of their own digits aside.
    """
    base = sample(0.0)
    if isinstance(base, str):
        return base
    whole = size(base)
    search = _Search(sample, size, base, whole, 16 * EPS * whole + 4 * noise)
    return search.run(search.start(first))


@dataclass
class _Search:
    sample: Sampled
    size: Size
    base: Samples
    whole: float
    floor: float
    reason: str = "its neighbourhood is too narrow"

    def _pair(self, step: float) -> tuple[Samples, Samples] | None:
        """Return the samples on either side, None where one has none."""
        both = self.sample(step), self.sample(-step)
        for one in both:
            if isinstance(one, str):
                self.reason = one
                return None
        return both  # type: ignore[return-value]

    def _change(self, pair: tuple[Samples, Samples]) -> tuple[float, float]:
        """Return the sizes of the odd and the even part of the change."""
        up, down = pair
        return self.size((up - down) * 0.5), self.size(up + down - self.base * 2.0)

    def start(self, first: float) -> float:
        """Return a first step, made longer as long as the change is small and nearly linear."""
        step = first
        for _ in range(LONGEST):
            pair = self._pair(step)
            if pair is None:
                break
            odd, even = self._change(pair)
            if odd > FAINT * self.whole or even > max(LINEAR * odd, self.floor):
                break
            longer = self._pair(step * LONGER)
            if longer is None:
                break
            odd, even = self._change(longer)
            if even > max(LINEAR * odd, self.floor):
                break
            step *= LONGER
        return step

    def run(self, step: float) -> Steps | str:
        """Return the steps from the first one on, coarse ones dropped until the change is smooth."""
        kept, refused = 0, 0
        last: tuple[float, float] | None = None
        best: tuple[float, Steps] | None = None
        for _ in range(MOST):
            pair = self._pair(step)
            if pair is None:
                refused += 1
                if refused > REFUSED:
                    break
                kept, last, step = 0, None, step / 4
                continue
            now = self._change(pair)
            floor = self.floor
            if last is not None and (now[1] > QUADRATIC * last[1] + floor or not _halved(now[0], last[0], floor)):
                kept = 0
            kept, last = min(kept + 1, DEEPEST), now
            if kept > 1:
                steps = Steps(step * 2.0 ** (kept - 1), kept)
                slope, doubt = derivative(self._known, steps)
                error = self.size(doubt) + floor / step
                if best is None or error < best[0]:
                    best = (error, steps)
                total = self.size(slope)
                if error <= max(SETTLED * total, 4 * floor / step) or (error > best[0] and best[0] <= GOOD * total):
                    break
            step /= 2
        return self.reason if best is None else best[1]

    def _known(self, step: float) -> Samples:
        found = self.sample(step)
        assert not isinstance(found, str)
        return found


def _halved(now: float, before: float, floor: float) -> bool:
    """Say whether the odd part of a change went down by about a half with the step."""
    return math.isclose(now, before / 2, rel_tol=0.5, abs_tol=floor)
