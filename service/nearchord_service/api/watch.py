"""Wakes watchers when something they follow may have news.

The store's hints only wake; what a watcher tells comes from the store, which it also looks into every `poll_seconds`
without a hint. A watcher reads on only when what it read has been written to its caller, so a slow or dead one holds
one page of rows and nothing more.
"""

from __future__ import annotations

import asyncio
from collections.abc import AsyncGenerator, Callable, Iterator, Sequence
from contextlib import contextmanager

from nearchord_service.api.calls import Calls
from nearchord_service.model.errors import Draining
from nearchord_service.model.event import Event, Reached
from nearchord_service.model.stage import Stage
from nearchord_service.store.port import Change, JobStore

PAGE_ROWS = 256
"""Rows a watcher holds at most."""

Look = Callable[[int], tuple[Sequence[Event], bool]]
"""Blocking: kept rows after a number, and whether no more can come after them."""


class Watcher:
    """One call's wait for news about one job or batch. Used on the loop."""

    def __init__(self, hub: Hub) -> None:
        self._hub = hub
        self._woken = asyncio.Event()

    def arm(self) -> None:
        """Forget earlier hints; called before looking into the store, so that no later hint is missed."""
        self._woken.clear()

    def wake(self) -> None:
        """Make the wait end."""
        self._woken.set()

    async def changed(self, most_seconds: float | None = None) -> None:
        """Return when there may be news, or after a while; raises Draining when the server shuts down."""
        self._hub.check()
        try:
            async with asyncio.timeout(self._hub.poll_seconds if most_seconds is None else most_seconds):
                await self._woken.wait()
        except TimeoutError:
            pass
        self._hub.check()


class Hub:
    """All watchers of this server by what they follow. Lives on one loop; only `heard` may come from any thread."""

    def __init__(self, poll_seconds: float = 1.5, pause_seconds: float = 0.05) -> None:
        self.poll_seconds = poll_seconds
        self.pause_seconds = pause_seconds
        self._loop = asyncio.get_running_loop()
        self._watchers: dict[str, set[Watcher]] = {}
        self._draining = False

    def heard(self, change: Change) -> None:
        """Take a hint of the store."""
        keys = [key for key in (*change.job_ids, *change.batch_ids) if key in self._watchers]
        if keys and not self._loop.is_closed():
            self._loop.call_soon_threadsafe(self._wake, keys)

    def _wake(self, keys: Sequence[str]) -> None:
        for key in keys:
            for watcher in self._watchers.get(key, ()):
                watcher.wake()

    @contextmanager
    def watcher(self, key: str) -> Iterator[Watcher]:
        """Follow a job or a batch by its id; raises Draining when the server shuts down."""
        self.check()
        watcher = Watcher(self)
        self._watchers.setdefault(key, set()).add(watcher)
        try:
            yield watcher
        finally:
            others = self._watchers[key]
            others.discard(watcher)
            if not others:
                del self._watchers[key]

    def check(self) -> None:
        """Raise Draining when the server shuts down."""
        if self._draining:
            raise Draining

    def drain(self) -> None:
        """End every wait, now and later, with Draining."""
        self._draining = True
        self._wake(list(self._watchers))


async def follow(
    hub: Hub, calls: Calls, key: str, look: Look, after: int, pause: float = 0.0
) -> AsyncGenerator[Event, None]:
    """Yield rows after a number until no more can come; `pause` seconds between looks gather what changes quickly."""
    with hub.watcher(key) as watcher:
        while True:
            watcher.arm()
            rows, ended = await calls.quick(look, after)
            for row in rows:
                yield row
                after = row.sequence
            if ended:
                return
            if len(rows) < PAGE_ROWS:
                await watcher.changed()
                await asyncio.sleep(pause)


def ends(event: Event) -> bool:
    """Tell whether a row says that its job is DONE."""
    return isinstance(event.news, Reached) and event.news.stage is Stage.DONE


def look_at_job(store: JobStore, owner: str, job_id: str) -> Look:
    """Return the look of a job's watcher: it ends after the row that says DONE, kept or not."""

    def look(after: int) -> tuple[Sequence[Event], bool]:
        rows = store.job_events(owner, job_id, after, PAGE_ROWS)
        if rows and (ends(rows[-1]) or len(rows) == PAGE_ROWS):
            return rows, ends(rows[-1])
        if store.job(owner, job_id).stage is not Stage.DONE:
            return rows, False
        return _with_rest(rows, store.job_events(owner, job_id, rows[-1].sequence if rows else after, PAGE_ROWS))

    return look


def look_at_batch(store: JobStore, owner: str, batch_id: str) -> Look:
    """Return the look of a batch's watcher: it ends when every job is DONE. Counts only when that may have come."""

    def look(after: int) -> tuple[Sequence[Event], bool]:
        rows = store.batch_events(owner, batch_id, after, PAGE_ROWS)
        if len(rows) == PAGE_ROWS or (rows and not any(map(ends, rows))):
            return rows, False
        batch = store.batch(owner, batch_id)
        if batch.done < batch.jobs:
            return rows, False
        return _with_rest(rows, store.batch_events(owner, batch_id, rows[-1].sequence if rows else after, PAGE_ROWS))

    return look


def _with_rest(rows: Sequence[Event], rest: Sequence[Event]) -> tuple[Sequence[Event], bool]:
    """Join what was written between a look at the rows and a look at the stage; full pages are followed by more."""
    return (*rows, *rest), len(rest) < PAGE_ROWS
