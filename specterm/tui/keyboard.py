"""Keys one after the other: the next one waits until the last has reached what it was meant for.

Texts and dialogs take keys from queues of their own. Without this, what is typed within milliseconds of the key that opens a
dialog, or just before the key that leaves it, goes astray.
"""

from __future__ import annotations

import asyncio
import contextlib
from collections import deque

from textual import events
from textual.app import App
from textual.message_pump import MessagePump

_LONGEST = 0.5


class OrderedKeys(App[int]):
    """An app that takes one key at a time."""

    def __init__(self) -> None:
        """Start with no key waiting."""
        super().__init__()
        self._kept: deque[events.Key] = deque()
        self._awaited = 0
        self._tasks: set[asyncio.Task[None]] = set()

    async def on_event(self, event: events.Event) -> None:
        """Take an event; a key waits while an earlier one is under way."""
        if not isinstance(event, events.Key) or event.is_forwarded:
            await super().on_event(event)
        elif self._kept or self._awaited:
            self._kept.append(event)
        else:
            await self._take(event)

    async def _take(self, key: events.Key) -> None:
        """Give a key on; wait for the text or the dialog that it goes to."""
        target = self.focused or (self.screen if len(self.screen_stack) > 1 else None)
        await super().on_event(key)
        if target is not None:
            self.await_rest(target)

    def await_rest(self, target: MessagePump) -> None:
        """Let keys wait until `target` has dealt with what it has been sent; not for ever, it may be gone."""
        reached = asyncio.Event()
        if not target.call_later(reached.set):
            return
        self._awaited += 1
        task = asyncio.get_running_loop().create_task(self._rest(reached))
        self._tasks.add(task)
        task.add_done_callback(self._tasks.discard)

    async def _rest(self, reached: asyncio.Event) -> None:
        """Wait for one target, then go on in the app's own queue."""
        with contextlib.suppress(TimeoutError):
            await asyncio.wait_for(reached.wait(), _LONGEST)
        self.call_later(self._go_on)

    async def _go_on(self) -> None:
        """Take the keys that wait, as far as nothing is under way again."""
        self._awaited -= 1
        while self._kept and not self._awaited:
            await self._take(self._kept.popleft())
