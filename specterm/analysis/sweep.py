"""Sweeps: levels and what follows from them against a parameter, or against two as a map."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from contextlib import nullcontext
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from specterm.analysis.sweep_branches import branches
from specterm.analysis.sweep_dips import dips
from specterm.analysis.sweep_gaps import Gap, refine_gap
from specterm.analysis.sweep_journal import Journal, open_journal
from specterm.analysis.sweep_point import Point, Stretch, points_of, solve_stretch, stretches
from specterm.analysis.sweep_request import Axis, Quantity, SweepRequest, quantity_unit, refuse_bad, written_units
from specterm.analysis.sweep_work import Crew, done_by
from specterm.arrays import Array, Counts, Flags
from specterm.errors import PhysicsError, WorkStopped

__all__ = ["Axis", "Gap", "Point", "Quantity", "Sweep", "SweepRequest", "assemble", "sweep"]


@dataclass(frozen=True)
class Sweep:
    """A sweep, whole or as far as it has come.

    `places` (points, axes): values of the parameters in `units`, the units they are written in; `numbers` the indices of the
    levels that are the columns of `levels` and `errors` (points, levels), in `energy_unit`, nan where there is none. `quantity`
    and `quantity_errors`, of the same shape, in `quantity_unit`, are those of the levels themselves unless something else was
    asked for. `kinds` (points, levels), "" where there is no level. `branches` (points, branches) is the column of each
    followed state, -1 where it is not known; empty for maps. `done` (points,) says which points have been computed.
    """

    request: SweepRequest
    units: tuple[str, ...]
    energy_unit: str
    quantity_unit: str
    places: Array
    numbers: tuple[int, ...]
    levels: Array
    errors: Array
    kinds: tuple[tuple[str, ...], ...]
    quantity: Array
    quantity_errors: Array
    branches: Counts
    done: Flags
    complete: bool
    gaps: tuple[Gap, ...] = ()
    notes: tuple[str, ...] = ()

    def along(self, branch: int, table: Array) -> Array:
        """Return a column of `table` (points, levels) along a followed state, shape (points,); nan where it is not known."""
        places = self.branches[:, branch]
        return np.where(places >= 0, table[np.arange(len(places)), places], np.nan)


def sweep(
    request: SweepRequest,
    *,
    crew: Crew | None = None,
    journal: Path | None = None,
    gaps: bool = True,
    should_stop: Callable[[], bool] | None = None,
    progress: Callable[[str], None] | None = None,
    on_point: Callable[[Point], None] | None = None,
) -> Sweep:
    """Return the sweep asked for.

    Parameters
    ----------
    request
        Sheet, parameters, quantity.
    crew
        Who does the work (`sweep_crews`, or any executor of concurrent.futures in a Crew); in this process without one. The
        result is the same to the last bit whoever did it.
    journal
        A file that keeps each point as it is done; what it holds already is not computed again.
    gaps
        Whether the smallest gaps are looked for (with one parameter).
    should_stop, progress, on_point
        Asked now and then whether to give up (WorkStopped; the journal keeps what is done), told how far the work is, and given
        each point as it is done, those of the journal first.

    Raises
    ------
    SheetError
        Where the request does not fit the sheet, or the journal not the request.
    PhysicsError
        Where no point has levels.
    WorkerLost
        Where a point kills its worker again and again.
    """
    refuse_bad(request)
    stop, tell = should_stop or (lambda: False), progress or (lambda _: None)
    with open_journal(journal, request) if journal is not None else nullcontext() as kept:
        points = dict(kept.points) if kept is not None else {}
        for point in points.values():
            _told(point, len(points), request, tell, on_point)
        for point in _computed(request, crew, set(range(request.size)) - set(points), stop):
            points[point.index] = point
            _noted(kept, point)
            _told(point, len(points), request, tell, on_point)
    found = assemble(request, list(points.values()))
    if not found.numbers and any(point.problem for point in points.values()):
        raise PhysicsError(next(point.problem for point in points.values() if point.problem), mend="it is so at every point")
    return _with_gaps(found, points, crew, stop, tell) if gaps and len(request.axes) == 1 else found


def _noted(kept: Journal | None, point: Point) -> None:
    if kept is not None:
        kept.add(point)


def _told(
    point: Point, done: int, request: SweepRequest, tell: Callable[[str], None], on_point: Callable[[Point], None] | None
) -> None:
    tell(f"{done} of {request.size} points")
    if on_point is not None:
        on_point(point)


def _computed(request: SweepRequest, crew: Crew | None, missing: set[int], stop: Callable[[], bool]) -> Iterator[Point]:
    """Yield the missing points as they are done."""
    tasks = stretches(request, missing)
    if crew is None:
        for task in tasks:
            if stop():
                raise WorkStopped("stopped")
            yield from points_of(task, stop)
        return
    for _, points in done_by(crew, solve_stretch, tasks, stop, _name, _single):
        yield from points


def _name(task: Stretch) -> str:
    """Return what a stretch is called in a message."""
    names = [axis.name for axis in task.request.axes]
    ends = [task.request.place(index) for index in dict.fromkeys((task.wanted[0], task.wanted[-1]))]
    return " to ".join(", ".join(f"{name} = {value:.10g}" for name, value in zip(names, end, strict=True)) for end in ends)


def _single(task: Stretch) -> list[Stretch]:
    """Return one stretch for each point wanted."""
    return [replace(task, wanted=(index,)) for index in task.wanted]


def assemble(request: SweepRequest, points: Sequence[Point]) -> Sweep:
    """Return the sweep that the points known so far make, in any order; gaps are left out."""
    model = refuse_bad(request)
    known: list[Point | None] = [None] * request.size
    for point in points:
        known[point.index] = point
    numbers = tuple(sorted({number for point in points for number in point.numbers}))
    column = {number: k for k, number in enumerate(numbers)}
    tables = np.full((4, request.size, len(numbers)), np.nan)
    kinds = [[""] * len(numbers) for _ in range(request.size)]
    for point in points:
        own = request.quantity.kind == "levels"
        followed = (point.levels, point.errors) if own else (point.quantity, point.quantity_errors)
        parts = (point.levels, point.errors, *followed)
        for k, number in enumerate(point.numbers):
            tables[:, point.index, column[number]] = [np.nan if part[k] is None else part[k] for part in parts]
            kinds[point.index][column[number]] = point.kinds[k]
    rows = branches(known) if len(request.axes) == 1 else np.zeros((request.size, 0), dtype=np.int64)
    unit = written_units(request.text)
    return Sweep(
        request,
        tuple(unit.get(axis.name, "") for axis in request.axes),
        model.units.energy,
        quantity_unit(model, request.quantity),
        np.array([request.place(index) for index in range(request.size)]),
        numbers,
        tables[0],
        tables[1],
        tuple(tuple(row) for row in kinds),
        tables[2],
        tables[3],
        _columns(rows, known, column),
        np.array([point is not None for point in known]),
        all(point.complete for point in points),
        notes=_notes(request, known),
    )


def _columns(rows: Counts, known: Sequence[Point | None], column: dict[int, int]) -> Counts:
    """Return branches by column of the tables instead of by place among the levels of a point."""
    found = rows.copy()
    for row, point in zip(found, known, strict=True):
        if point is not None:
            row[row >= 0] = [column[point.numbers[place]] for place in row[row >= 0]]
    return found


def _notes(request: SweepRequest, known: Sequence[Point | None]) -> tuple[str, ...]:
    """Return what is odd: points without levels, levels that are unresolved or that may be missing."""
    some = [point for point in known if point is not None]
    notes = []
    for what, failed in (
        ("levels", [point for point in some if point.problem and not point.levels]),
        (request.quantity.kind, [point for point in some if point.problem and point.levels]),
    ):
        if failed:
            place = ", ".join(f"{v:.6g}" for v in request.place(failed[0].index))
            notes.append(f"{len(failed)} points have no {what}; at {place}: {failed[0].problem}")
    if some and not any(point.levels or point.problem for point in some):
        notes.append("no level is bound at any point: ask for a number of levels with -n")
    rough = sum("unresolved" in point.kinds for point in some)
    if rough:
        notes.append(f"{rough} points have levels that do not reach the tolerance")
    if any("box" in point.kinds for point in some):
        notes.append("some levels lie in the continuum: kind box, their place means nothing")
    lost = sum(not point.complete for point in some)
    if lost:
        notes.append(f"at {lost} points the count of the levels does not agree")
    return tuple(notes)


def _with_gaps(
    found: Sweep, points: dict[int, Point], crew: Crew | None, stop: Callable[[], bool], tell: Callable[[str], None]
) -> Sweep:
    """Return the sweep with its smallest gaps refined."""
    known = [points.get(index) for index in range(found.request.size)]
    tasks = dips(found.request, known, branches(known))
    refined: list[Gap] = []
    pairs = ((task, refine_gap(task, stop)) for task in tasks)
    done = pairs if crew is None else done_by(crew, refine_gap, tasks, stop, lambda task: f"a gap near {task.left:.6g}")
    for number, (_, gap) in enumerate(done if tasks else ()):
        tell(f"{number + 1} of {len(tasks)} gaps")
        if gap is not None:
            refined.append(gap)
    gaps = tuple(sorted(refined, key=lambda gap: (gap.pair, gap.at)))
    notes = dict.fromkeys([*found.notes, *(gap.note for gap in gaps if gap.note)])
    return replace(found, gaps=gaps, notes=tuple(notes))
