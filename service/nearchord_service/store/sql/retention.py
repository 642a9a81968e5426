"""Retention: what has ended is dropped by age and by bytes, in rounds that keep the writer's turns short.

Candidates are read outside the writer; each removal looks again inside its transaction whether it may go.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial

from sqlalchemy import bindparam, func, select, text, update

from nearchord_service.model.stage import Stage
from nearchord_service.store.port import Dropped, Retention
from nearchord_service.store.sql.content import OWNED, forget
from nearchord_service.store.sql.deleting import delete_jobs
from nearchord_service.store.sql.disk import Disk
from nearchord_service.store.sql.schema import blobs, contents, jobs
from nearchord_service.store.sql.statement import Row, Statement, word
from nearchord_service.store.sql.uploads import Uploads
from nearchord_service.store.sql.writer import Transaction

_ROUND = 500
_SECOND = 1_000_000

_ended = jobs.c.finished_at.is_not(None)
_OLDEST = Statement(
    select(jobs.c.number, jobs.c.finished_at, jobs.c.answer_bytes)
    .where(_ended)
    .order_by(jobs.c.finished_at)
    .limit(_ROUND)
)
_ANSWER_BYTES = Statement(select(func.coalesce(func.sum(jobs.c.answer_bytes), 0).label("bytes")).where(_ended))
_DONE = Statement(select(jobs).where(jobs.c.number == bindparam("number"), jobs.c.stage == word(Stage.DONE)))
_UNTRIMMED = Statement(
    select(jobs.c.number).where(_ended, jobs.c.finished_at < bindparam("before"), jobs.c.trimmed == 0).limit(_ROUND)
)
_TRIM = Statement(text("DELETE FROM events WHERE job = :job AND stage <> 'DONE'"))
_TRIMMED = Statement(update(jobs).where(jobs.c.number == bindparam("of_job")).values(trimmed=1))
_IDLE = Statement(
    select(contents.c.owner, contents.c.address)
    .where(contents.c.used_at < bindparam("before"))
    .order_by(contents.c.used_at)
)
_CONTENT_BYTES = Statement(select(func.coalesce(func.sum(blobs.c.size_bytes), 0).label("bytes")))


class Keeping(Uploads):
    """The last call of `port.LeaseStore`."""

    def retain(self, retention: Retention) -> Dropped:
        """Drop what is older or more than allowed."""
        dropped = Dropped(
            jobs=self._drop_answers(retention.answer_age, retention.answer_bytes),
            events=self._trim_events(retention.event_age),
            contents=self._drop_contents(retention.content_age, retention.content_bytes),
            uploads=self._drop_stale_uploads(self._before(retention.upload_age)),
        )
        if dropped.jobs or dropped.events or dropped.contents:
            self._write(self._database.shrink)
        return dropped

    def _before(self, age: float | None) -> int:
        """Return the time before which things are too old; for no limit, a time before everything."""
        return 0 if age is None else self._now() - round(age * _SECOND)

    def _drop_answers(self, age: float | None, most_bytes: int | None) -> int:
        before, total = self._before(age), 0
        while not (age is None and most_bytes is None):
            with self._reading() as connection:
                excess = 0 if most_bytes is None else connection.all(_ANSWER_BYTES)[0]["bytes"] - most_bytes
                numbers = _too_much(connection.all(_OLDEST), before, excess)
            total += self._write(partial(_delete_done, numbers))
            if len(numbers) < _ROUND:
                break
        return total

    def _trim_events(self, age: float | None) -> int:
        before, total = self._before(age), 0
        while age is not None:
            with self._reading() as connection:
                numbers = [row["number"] for row in connection.all(_UNTRIMMED, before=before)]
            total += self._write(partial(_trim, numbers))
            if len(numbers) < _ROUND:
                break
        return total

    def _drop_contents(self, age: float | None, most_bytes: int | None) -> int:
        total = 0 if age is None else self._forget(self._before(age), None)
        if most_bytes is not None:
            with self._reading() as connection:
                excess = connection.all(_CONTENT_BYTES)[0]["bytes"] - most_bytes
            if excess > 0:
                total += self._forget(self._now() + 1, excess)
        return total

    def _forget(self, before: int, excess: int | None) -> int:
        """Forget content not used since a time, longest unused first, until `excess` bytes are freed (None: all)."""
        with self._reading() as connection:
            idle = connection.all(_IDLE, before=before)
        total = freed = 0
        for begin in range(0, len(idle), _ROUND):
            left = None if excess is None else excess - freed
            if left is not None and left <= 0:
                break
            count, size = self._write(partial(_forget_idle, self._disk, idle[begin : begin + _ROUND], before, left))
            total += count
            freed += size
        return total


def _too_much(rows: Sequence[Row], before: int, excess: int) -> list[int]:
    """Return the numbers of those of the longest ended jobs that are too old, or whose answers are too many bytes."""
    numbers = []
    for row in rows:
        if row["finished_at"] >= before and excess <= 0:
            break
        numbers.append(row["number"])
        excess -= row["answer_bytes"]
    return numbers


def _delete_done(numbers: Sequence[int], transaction: Transaction) -> int:
    found = [transaction.one(_DONE, number=number) for number in numbers]
    rows = [row for row in found if row is not None]
    delete_jobs(transaction, rows)
    transaction.news.job_ids.update(row["id"] for row in rows)
    return len(rows)


def _trim(numbers: Sequence[int], transaction: Transaction) -> int:
    count = transaction.run_many(_TRIM, [{"job": number} for number in numbers])
    transaction.run_many(_TRIMMED, [{"of_job": number} for number in numbers])
    return count


def _forget_idle(
    disk: Disk, idle: Sequence[Row], before: int, excess: int | None, transaction: Transaction
) -> tuple[int, int]:
    """Forget what is still idle and not needed; returns how many, and the bytes that this frees."""
    count = freed = 0
    for candidate in idle:
        if excess is not None and freed >= excess:
            break
        row = transaction.one(OWNED, owner=candidate["owner"], address=candidate["address"])
        size = None if row is None or row["used_at"] >= before else forget(transaction, disk, row)
        if size is not None:
            count += 1
            freed += size
    return count, freed
