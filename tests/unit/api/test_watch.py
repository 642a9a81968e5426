"""Watchers: woken by hints, right without them, bounded by their reader, ended by a drain."""

from __future__ import annotations

import asyncio
import datetime as dt
import threading
from collections.abc import AsyncIterator, Callable, Coroutine, Sequence
from contextlib import aclosing
from typing import Any, TypeVar

import pytest
from nearchord_service.api.calls import Calls
from nearchord_service.api.watch import PAGE_ROWS, Hub, follow
from nearchord_service.model.errors import Draining
from nearchord_service.model.event import Event, Reached
from nearchord_service.model.stage import Stage
from nearchord_service.store.port import Change

T = TypeVar("T")
HOUR = 3_600.0
NOW = dt.datetime(2030, 1, 1, tzinfo=dt.UTC)


class Rows:
    """A job's rows as a watcher's look finds them."""

    def __init__(self) -> None:
        self.rows: list[Event] = []
        self.ended = False
        self.looks = 0
        self.read = 0
        self._looked = threading.Event()

    async def looked(self) -> None:
        """Return after the first look."""
        assert await asyncio.to_thread(self._looked.wait, 30)

    def grow(self, count: int) -> None:
        first = len(self.rows) + 1
        news = Reached(Stage.WAITING, None, "")
        self.rows += [Event(first + i, "job", 0, NOW, 0, news) for i in range(count)]

    def __call__(self, after: int) -> tuple[Sequence[Event], bool]:
        self.looks += 1
        page = self.rows[after : after + PAGE_ROWS]
        self.read += len(page)
        self._looked.set()
        return page, self.ended and after + len(page) == len(self.rows)


def run(scene: Callable[[Hub, Calls], Coroutine[Any, Any, T]], poll_seconds: float = HOUR) -> T:
    async def main() -> T:
        calls = Calls(quick=1, heavy=1)
        try:
            async with asyncio.timeout(30):
                return await scene(Hub(poll_seconds, pause_seconds=0.0), calls)
        finally:
            calls.close()

    return asyncio.run(main())


async def sequences(events: AsyncIterator[Event]) -> list[int]:
    return [event.sequence async for event in events]


def test_rows_come_in_pages_until_the_end() -> None:
    rows = Rows()
    rows.grow(2 * PAGE_ROWS + 3)
    rows.ended = True

    async def scene(hub: Hub, calls: Calls) -> list[int]:
        return await sequences(follow(hub, calls, "job", rows, 5))

    assert run(scene) == list(range(6, 2 * PAGE_ROWS + 4))


def test_a_hint_wakes_its_watcher() -> None:
    """Without the hint the watcher would sleep for an hour."""
    rows = Rows()
    rows.grow(1)

    async def scene(hub: Hub, calls: Calls) -> list[int]:
        async with aclosing(follow(hub, calls, "job", rows, 0)) as events:
            found = [(await anext(events)).sequence]
            rows.grow(1)
            rows.ended = True
            following = asyncio.ensure_future(sequences(events))
            await asyncio.to_thread(hub.heard, Change(job_ids=frozenset({"job"})))
            return found + await following

    assert run(scene) == [1, 2]


def test_a_watcher_finds_news_without_hints() -> None:
    """Hints may be lost: polling is the truth."""
    rows = Rows()

    async def scene(hub: Hub, calls: Calls) -> list[int]:
        following = asyncio.ensure_future(sequences(follow(hub, calls, "job", rows, 0)))
        await rows.looked()
        rows.ended = True
        rows.grow(1)
        return await following

    assert run(scene, poll_seconds=0.01) == [1]


def test_a_hint_without_news_costs_one_look() -> None:
    """A watcher that was woken in vain sleeps again."""
    rows = Rows()

    async def scene(hub: Hub, calls: Calls) -> int:
        async with aclosing(follow(hub, calls, "job", rows, 0)) as events:
            following = asyncio.ensure_future(anext(events))
            await rows.looked()
            for _ in range(10):
                await calls.quick(lambda: None)
            await asyncio.to_thread(hub.heard, Change(job_ids=frozenset({"job"})))
            for _ in range(20):
                await calls.quick(lambda: None)
            following.cancel()
            await asyncio.wait((following,))
        return rows.looks

    assert run(scene) == 2


def test_hints_about_others_wake_nobody() -> None:
    rows = Rows()

    async def scene(hub: Hub, calls: Calls) -> int:
        with hub.watcher("job") as watcher:
            watcher.arm()
            await asyncio.to_thread(hub.heard, Change(job_ids=frozenset({"other"}), batch_ids=frozenset({"batch"})))
            await watcher.changed(0.0)
        async with aclosing(follow(hub, calls, "job", rows, 0)) as events:
            following = asyncio.ensure_future(anext(events))
            await rows.looked()
            await asyncio.to_thread(hub.heard, Change(job_ids=frozenset({"other"})))
            await calls.quick(lambda: None)
            following.cancel()
            await asyncio.wait((following,))
        return rows.looks

    assert run(scene) == 1


def test_a_watcher_that_does_not_read_holds_one_page() -> None:
    """Nothing is read from the store ahead of what the caller has taken."""
    rows = Rows()
    rows.grow(10 * PAGE_ROWS)

    async def scene(hub: Hub, calls: Calls) -> int:
        async with aclosing(follow(hub, calls, "job", rows, 0)) as events:
            await anext(events)
            for _ in range(100):
                hub.heard(Change(job_ids=frozenset({"job"})))
                await asyncio.sleep(0)
        return rows.read

    assert run(scene) == PAGE_ROWS


def test_a_drain_ends_watchers_that_wait_and_those_that_come() -> None:
    rows = Rows()

    async def scene(hub: Hub, calls: Calls) -> None:
        following = asyncio.ensure_future(sequences(follow(hub, calls, "job", rows, 0)))
        await rows.looked()
        hub.drain()
        with pytest.raises(Draining):
            await following
        with pytest.raises(Draining):
            await sequences(follow(hub, calls, "job", rows, 0))

    run(scene)


def test_nothing_is_kept_of_a_watcher_that_left() -> None:
    async def scene(hub: Hub, calls: Calls) -> None:
        with hub.watcher("job"), hub.watcher("job"):
            pass
        assert not hub._watchers

    run(scene)
