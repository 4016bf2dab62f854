"""Tasks handed to any executor of `concurrent.futures`: a few at a time, with tasks of workers that died done again."""

from __future__ import annotations

from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import FIRST_COMPLETED, BrokenExecutor, CancelledError, Executor, Future, wait
from dataclasses import dataclass, field
from typing import Generic, TypeVar

from specterm.errors import SpectermError, WorkStopped

Task = TypeVar("Task")
Result = TypeVar("Result")
PATIENCE = 0.2
"""Seconds between two looks at whether to stop."""
STRIKES = 3
"""So many times a task may lose its worker, the last ones while no other task runs."""
MOST_RENEWALS = 8
"""So many times in a row workers are started anew without any result."""
MEND = "what is done is kept in the journal, where there is one; ask for fewer levels or give the workers more memory"
AHEAD = 2
"""Tasks in flight for each worker, so that none waits for the next."""


class WorkerLost(SpectermError):
    """A task lost its worker again and again."""

    exit_status = 1


@dataclass(frozen=True)
class Crew:
    """Who does the work.

    `start` makes an executor and is called again after its workers died; `stop` ends one. `size` is the number of workers.
    """

    start: Callable[[], Executor]
    size: int = 1
    stop: Callable[[Executor], None] = lambda executor: executor.shutdown(wait=False, cancel_futures=True)


@dataclass
class _State(Generic[Task, Result]):
    """What waits, what runs, and how often each task lost its worker."""

    waiting: deque[Task]
    name: Callable[[Task], str]
    split: Callable[[Task], list[Task]]
    running: dict[Future[Result], Task] = field(default_factory=dict)
    strikes: dict[Task, int] = field(default_factory=dict)
    suspects: deque[Task] = field(default_factory=deque)
    renewals: int = 0

    @property
    def suspicious(self) -> bool:
        """Whether some task that lost its worker waits or runs."""
        return bool(self.suspects) or any(task in self.strikes for task in self.running.values())

    def strike(self, task: Task, error: BaseException | None) -> None:
        """Count one loss for a task and put it, or its parts, among the suspects; WorkerLost after too many."""
        count = self.strikes.get(task, 0) + 1
        if count >= STRIKES:
            why = f" ({type(error).__name__}: {error})"[:200] if error is not None else ""
            raise WorkerLost(f"the worker died {STRIKES} times at {self.name(task)}{why}", mend=MEND)
        parts = self.split(task) if count == STRIKES - 1 else [task]
        for part in parts:
            self.strikes[part] = count if len(parts) == 1 else 1
        self.suspects.extend(parts)


def done_by(
    crew: Crew,
    work: Callable[[Task], Result],
    tasks: Iterable[Task],
    should_stop: Callable[[], bool] = lambda: False,
    name: Callable[[Task], str] = str,
    split: Callable[[Task], list[Task]] = lambda task: [task],
) -> Iterator[tuple[Task, Result]]:
    """Yield tasks with their results as they are done.

    Tasks that were running when a worker died are done again, by new workers and one at a time, so that the one to blame shows
    itself; one that loses its worker twice is split into parts where it has some, and after `STRIKES` losses WorkerLost names
    it. Raises WorkStopped; errors of the work itself pass through.
    """
    state: _State[Task, Result] = _State(deque(tasks), name, split)
    executor = crew.start()
    try:
        while state.waiting or state.running or state.suspects:
            if should_stop():
                raise WorkStopped("stopped")
            broken = not _submitted(executor, crew, work, state)
            finished = wait(state.running, timeout=0 if broken else PATIENCE, return_when=FIRST_COMPLETED).done
            for future in finished:
                task = state.running.pop(future)
                try:
                    result = future.result()
                except SpectermError:
                    raise
                except (BrokenExecutor, CancelledError):
                    state.running[future], broken = task, True
                except Exception as error:
                    state.strike(task, error)
                else:
                    state.renewals = 0
                    yield task, result
            if broken:
                executor = _renewed(executor, crew, state)
    finally:
        crew.stop(executor)


def _submitted(executor: Executor, crew: Crew, work: Callable[[Task], Result], state: _State[Task, Result]) -> bool:
    """Hand over tasks, only one at a time while there are suspects; return False where the executor turns out broken."""
    try:
        if state.suspects and not state.running:
            state.running[executor.submit(work, state.suspects[0])] = state.suspects[0]
            state.suspects.popleft()
        while state.waiting and not state.suspicious and len(state.running) < AHEAD * crew.size:
            state.running[executor.submit(work, state.waiting[0])] = state.waiting[0]
            state.waiting.popleft()
    except (BrokenExecutor, RuntimeError):
        return False
    return True


def _renewed(executor: Executor, crew: Crew, state: _State[Task, Result]) -> Executor:
    """Return new workers; all that ran on the old ones is suspect."""
    state.renewals += 1
    if state.renewals > MOST_RENEWALS:
        raise WorkerLost("the workers die as soon as they start", mend=MEND)
    crew.stop(executor)
    lost = list(state.running.values())
    state.running.clear()
    for task in lost:
        state.strike(task, None)
    return crew.start()
