"""Answers of a batch by position, read in windows, so that few of them are in memory at a time."""

from __future__ import annotations

from collections.abc import AsyncGenerator

from nearchord_service.api.calls import Calls
from nearchord_service.api.convert.answers import answer_bytes
from nearchord_service.api.watch import Hub
from nearchord_service.model.answer import Answer
from nearchord_service.model.job import Job
from nearchord_service.store.port import JobStore

_FIRST_WINDOW = 4
_LARGEST_WINDOW = 256
_WINDOW_BYTES = 4 * 2**20

Row = tuple[Job, Answer | None]


class Windows:
    """Reads the answers of one batch for one caller; the size of the next window follows the bytes of the last."""

    def __init__(self, store: JobStore, calls: Calls, hub: Hub, owner: str, batch_id: str) -> None:
        self._store = store
        self._calls = calls
        self._hub = hub
        self._owner = owner
        self._batch_id = batch_id
        self._size = _FIRST_WINDOW

    async def answers(self, after: int, *, wait: bool) -> AsyncGenerator[tuple[Job, Answer], None]:
        """Yield answers at positions above `after`; waits for jobs that have not ended, or leaves them out."""
        while rows := await self._read(after, self._size):
            for job, answer in rows:
                if answer is None and wait:
                    await self._until_done(job)
                    break
                after = job.batch_index
                if answer is not None:
                    yield job, answer
            else:
                self._resize(rows)

    async def _read(self, after: int, limit: int) -> tuple[Row, ...]:
        return await self._calls.quick(self._store.batch_answers, self._owner, self._batch_id, after, limit)

    def _resize(self, rows: tuple[Row, ...]) -> None:
        held = sum(answer_bytes(answer) for _, answer in rows if answer is not None)
        wanted = _LARGEST_WINDOW if not held else len(rows) * _WINDOW_BYTES // held
        self._size = max(1, min(_LARGEST_WINDOW, 4 * self._size, wanted))

    async def _until_done(self, job: Job) -> None:
        with self._hub.watcher(job.id) as watcher:
            while True:
                watcher.arm()
                rows = await self._read(job.batch_index - 1, 1)
                if not rows or rows[0][1] is not None:
                    return
                await watcher.changed()
