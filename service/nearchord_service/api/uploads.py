"""Uploads under way: pieces are written on a thread while the next ones arrive, and every hold is let go in the end."""

from __future__ import annotations

import asyncio
from collections.abc import Callable, Coroutine
from contextlib import suppress
from typing import Any

from nearchord_service.api.calls import Calls
from nearchord_service.model.content import Content
from nearchord_service.model.errors import ServiceError
from nearchord_service.store.port import Upload

Piece = bytes | memoryview
_PIECES_IN_FLIGHT = 4
_KEPT_BYTES = 16 << 20


def keep_freed_memory() -> None:
    """Let the C library keep what a piece leaves behind for the next one, some MiB in all.

    Left to itself, glibc gives blocks of a piece's size back to the system, and every piece faults its pages in anew: a
    tenth of the processor time of an upload. It stops doing so for blocks up to the largest that was ever freed (see
    mallopt(3), M_MMAP_THRESHOLD); the block freed here is never written, so it takes no memory.
    """
    block = bytes(_KEPT_BYTES)
    del block


class Writing:
    """One upload: takes pieces in order, a few of them in memory, and touches the hold from one thread at a time."""

    def __init__(self, upload: Upload, calls: Calls, count: Callable[[int], None]) -> None:
        self._upload = upload
        self._calls = calls
        self._count = count
        self._pieces: asyncio.Queue[Piece | None] = asyncio.Queue(_PIECES_IN_FLIGHT)
        self._failure: Exception | None = None
        self._work: asyncio.Future[Any] = asyncio.ensure_future(self._write())

    async def take(self, piece: Piece) -> None:
        """Hand a piece over; waits while others are on their way, and raises what an earlier one met."""
        self._settle()
        await self._pieces.put(piece)

    async def publish(self, check: Callable[[memoryview], tuple[int, int]]) -> Content:
        """Make the content visible when every piece is written."""
        await self._pieces.put(None)
        await asyncio.shield(self._work)
        self._settle()
        publishing = asyncio.ensure_future(self._calls.heavy(self._upload.publish, check))
        self._work = publishing
        return await asyncio.shield(publishing)

    async def close(self) -> None:
        """Let the upload go when what was handed over is done."""
        if not self._work.done():
            await self._pieces.put(None)
            await asyncio.wait((self._work,))
        if not self._work.cancelled():
            self._work.exception()
        await self._calls.heavy(self._upload.release)

    def _settle(self) -> None:
        if self._failure is not None:
            raise self._failure

    async def _write(self) -> None:
        """Write until the end is handed over; goes on taking pieces after a failure, so that nobody waits for room."""
        while (piece := await self._pieces.get()) is not None:
            if self._failure is not None:
                continue
            try:
                await self._calls.heavy(self._upload.write, piece)
            except Exception as error:
                self._failure = error
            else:
                self._count(len(piece))


class Uploads:
    """All uploads under way."""

    def __init__(self, calls: Calls, count: Callable[[int], None]) -> None:
        self._calls = calls
        self._count = count
        self._endings: set[asyncio.Future[None]] = set()
        keep_freed_memory()

    async def begin(self, begin: Callable[[], Upload | Content]) -> Writing | Content:
        """Take hold of an upload; a caller that leaves meanwhile leaves no hold behind."""
        beginning = asyncio.ensure_future(self._calls.heavy(begin))
        try:
            held = await asyncio.shield(beginning)
        except asyncio.CancelledError:
            self._in_background(self._abandon(beginning))
            raise
        return held if isinstance(held, Content) else Writing(held, self._calls, self._count)

    def let_go(self, writing: Writing) -> None:
        """Close in the background, whatever becomes of the call."""
        self._in_background(writing.close())

    async def settle(self) -> None:
        """Wait until every upload that was let go is closed."""
        await asyncio.gather(*self._endings)

    async def _abandon(self, beginning: asyncio.Future[Upload | Content]) -> None:
        with suppress(ServiceError):
            held = await beginning
            if not isinstance(held, Content):
                await self._calls.heavy(held.release)

    def _in_background(self, ending: Coroutine[Any, Any, None]) -> None:
        task = asyncio.ensure_future(ending)
        self._endings.add(task)
        task.add_done_callback(self._endings.discard)
