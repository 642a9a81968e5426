"""The one writer: a thread with the only connection that writes.

Callers queue operations. Everything that waits becomes one transaction, each operation inside a savepoint, so that one
that fails leaves the others alone; one commit makes them durable together. Then their futures are resolved, and one
Change tells the listeners. While the disk is busy with a commit the next group gathers.
"""

from __future__ import annotations

import datetime as dt
import logging
import queue
import threading
import time
from collections.abc import Callable
from concurrent.futures import Future
from dataclasses import dataclass, field
from typing import Any, Protocol, TypeVar

from sqlalchemy import bindparam, update

from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.model.question import QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.store.port import Change
from nearchord_service.store.sql.rows import micros
from nearchord_service.store.sql.schema import counters
from nearchord_service.store.sql.statement import Connection, Statement, word

_log = logging.getLogger(__name__)
_GROUP = 512
_T = TypeVar("_T")

_TAKE_NUMBERS = Statement(
    update(counters)
    .where(counters.c.name == word("event"))
    .values(value=counters.c.value + bindparam("count"))
    .returning(counters.c.value)
)
_MARK, _KEEP, _UNDO = "SAVEPOINT operation", "RELEASE operation", "ROLLBACK TO operation"


class Database(Protocol):
    """What the writer needs of a database, see `engine`."""

    def begin(self, connection: Connection, /, *, lasting: bool) -> None: ...  # noqa: D102
    def commit(self, connection: Connection, /) -> None: ...  # noqa: D102
    def rollback(self, connection: Connection, /) -> None: ...  # noqa: D102
    def in_transaction(self, connection: Connection, /) -> bool: ...  # noqa: D102
    def failed(self, fault: Exception, /) -> bool: ...  # noqa: D102
    def trouble(self, fault: Exception, /) -> StoreUnavailable: ...  # noqa: D102


@dataclass
class News:
    """What a transaction changed, and what is to be done once it is durable."""

    job_ids: set[str] = field(default_factory=set)
    batch_ids: set[str] = field(default_factory=set)
    cancels: set[str] = field(default_factory=set)
    ended: list[tuple[QuestionName, Verdict]] = field(default_factory=list)
    work: bool = False
    afterwards: list[Callable[[], None]] = field(default_factory=list)

    def take_in(self, other: News) -> None:
        """Add what another part of the transaction changed."""
        self.job_ids |= other.job_ids
        self.batch_ids |= other.batch_ids
        self.cancels |= other.cancels
        self.ended += other.ended
        self.work |= other.work
        self.afterwards += other.afterwards

    def change(self) -> Change | None:
        """Return the hint for listeners, None when there is nothing to tell."""
        if not (self.job_ids or self.batch_ids or self.cancels or self.work):
            return None
        return Change(frozenset(self.job_ids), frozenset(self.batch_ids), self.work, frozenset(self.cancels))


class Transaction(Connection):
    """An operation's view of the transaction that it is part of. `now` is its time in microseconds."""

    def __init__(self, connection: Connection, now: int) -> None:
        super().__init__(connection.cursor, connection.dialect)
        self.now = now
        self.news = News()

    def take_numbers(self, count: int) -> range:
        """Take event numbers. The counter's row stays locked until the commit: numbers ascend in commit order."""
        row = self.one(_TAKE_NUMBERS, count=count)
        assert row is not None
        return range(row["value"] - count + 1, row["value"] + 1)


Operation = Callable[[Transaction], _T]
OnEnd = Callable[[QuestionName, Verdict], None]


@dataclass(frozen=True)
class _Queued:
    operation: Operation[Any]
    future: Future[Any]
    lasting: bool


class Writer:
    """Runs operations one after another in a thread of its own."""

    def __init__(
        self,
        database: Database,
        connection: Connection,
        clock: Callable[[], dt.datetime],
        on_write: Callable[[float], None] | None,
        on_end: OnEnd | None,
        announce: Callable[[Change], None],
    ) -> None:
        self._database = database
        self._connection = connection
        self._clock = clock
        self._on_write = on_write
        self._on_end = on_end
        self._announce = announce
        self._queue: queue.SimpleQueue[_Queued | None] = queue.SimpleQueue()
        self._gate = threading.Lock()
        self._open = True
        self._thread = threading.Thread(target=self._run, name="store-writer", daemon=True)

    def start(self) -> None:
        """Begin to take operations."""
        self._thread.start()

    def stop(self) -> None:
        """Take no more, finish what is queued, end the thread."""
        with self._gate:
            if self._open:
                self._open = False
                self._queue.put(None)
        self._thread.join()

    def enqueue(self, operation: Operation[_T], *, lasting: bool = True) -> Future[_T]:
        """Queue an operation; the future is resolved when it is committed or has failed.

        A lasting one then survives a power failure; any survives the end of the process.
        """
        future: Future[_T] = Future()
        with self._gate:
            if not self._open:
                raise StoreUnavailable("the store is closed; start the server again")
            self._queue.put(_Queued(operation, future, lasting))
        return future

    def _run(self) -> None:
        last = False
        while not last:
            first = self._queue.get()
            if first is None:
                return
            group, last = self._gather(first)
            self._commit(group)

    def _gather(self, first: _Queued) -> tuple[list[_Queued], bool]:
        group = [first]
        while len(group) < _GROUP:
            try:
                queued = self._queue.get_nowait()
            except queue.Empty:
                break
            if queued is None:
                return group, True
            group.append(queued)
        return group, False

    def _commit(self, group: list[_Queued]) -> None:
        group = [queued for queued in group if queued.future.set_running_or_notify_cancel()]
        began = time.perf_counter()
        news = News()
        try:
            self._database.begin(self._connection, lasting=any(queued.lasting for queued in group))
            outcomes = [self._attempt(queued.operation, news) for queued in group]
            self._database.commit(self._connection)
        except Exception as fault:
            self._give_up(group, fault)
            return
        self._count(time.perf_counter() - began, news)
        self._settle(group, outcomes, news)

    def _count(self, seconds: float, news: News) -> None:
        """Tell those who count; what is committed does not depend on them."""
        try:
            if self._on_write is not None:
                self._on_write(seconds)
            if self._on_end is not None:
                for question, verdict in news.ended:
                    self._on_end(question, verdict)
        except Exception:
            _log.exception("a counter of the store's writes failed")

    def _attempt(self, operation: Operation[Any], news: News) -> Any:
        """Run one operation in its savepoint; returns its result or its exception."""
        cursor = self._connection.cursor
        cursor.execute(_MARK)
        transaction = Transaction(self._connection, micros(self._clock()))
        try:
            result = operation(transaction)
        except Exception as fault:
            if not self._database.in_transaction(self._connection):
                raise
            cursor.execute(_UNDO)
            cursor.execute(_KEEP)
            return _Failure(self._database.trouble(fault) if self._database.failed(fault) else fault)
        cursor.execute(_KEEP)
        news.take_in(transaction.news)
        return result

    def _give_up(self, group: list[_Queued], fault: Exception) -> None:
        _log.error("a write transaction of %d operations failed: %s", len(group), fault)
        try:
            self._database.rollback(self._connection)
        except Exception:
            _log.exception("the failed transaction could not be rolled back")
        for queued in group:
            queued.future.set_exception(self._database.trouble(fault))

    def _settle(self, group: list[_Queued], outcomes: list[Any], news: News) -> None:
        for action in news.afterwards:
            try:
                action()
            except OSError as fault:
                _log.warning("a content file could not be removed; the next start tries again: %s", fault)
        for queued, outcome in zip(group, outcomes, strict=True):
            if isinstance(outcome, _Failure):
                queued.future.set_exception(outcome.fault)
            else:
                queued.future.set_result(outcome)
        change = news.change()
        if change is not None:
            self._announce(change)


@dataclass(frozen=True)
class _Failure:
    fault: Exception
