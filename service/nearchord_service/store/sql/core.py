"""What every part of the store works with: one writer, many readers, the data folder, the clock."""

from __future__ import annotations

import datetime as dt
import logging
import threading
from collections.abc import Callable
from concurrent.futures import Future
from contextlib import AbstractContextManager
from pathlib import Path
from typing import TypeVar

from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.store.port import Change
from nearchord_service.store.sql.disk import Disk
from nearchord_service.store.sql.engine import SqliteDatabase
from nearchord_service.store.sql.rows import micros
from nearchord_service.store.sql.statement import Connection
from nearchord_service.store.sql.writer import OnEnd, Operation, Writer

_log = logging.getLogger(__name__)
_T = TypeVar("_T")


def utc_now() -> dt.datetime:
    """Return the time, aware, UTC."""
    return dt.datetime.now(dt.UTC)


class Core:
    """An open data folder. The parts of the store are classes over this one."""

    def __init__(
        self,
        data: Path,
        *,
        clock: Callable[[], dt.datetime] = utc_now,
        on_write: Callable[[float], None] | None = None,
        on_end: OnEnd | None = None,
        disk: Disk | None = None,
    ) -> None:
        """Take the data folder, a clock that gives aware times, and listeners.

        `on_write` is told the seconds of every transaction, `on_end` the question and the verdict of every job that it
        ended, once it is durable; both are called on the writer's thread and must return quickly.
        """
        self._clock = clock
        self._on_write = on_write
        self._on_end = on_end
        self._disk = disk or Disk(data)
        self._database = SqliteDatabase(data / "nearchord.db")
        self._writer: Writer | None = None
        self._life = threading.Lock()
        self._listeners: tuple[Callable[[Change], None], ...] = ()

    def start(self) -> None:
        """Lock the folder, open and migrate the database, remove files that nothing refers to."""
        with self._life:
            if self._writer is not None:
                return
            self._disk.prepare()
            try:
                connection = self._database.open(self._now())
                self._writer = Writer(
                    self._database, connection, self._clock, self._on_write, self._on_end, self._announce
                )
                self._opened()
            except BaseException:
                self._writer = None
                self._database.close()
                self._disk.leave()
                raise
            self._writer.start()

    def _opened(self) -> None:
        """Tidy up before the first call; parts extend it."""

    def stop(self) -> None:
        """Finish what is queued, close, give the lock back."""
        with self._life:
            if self._writer is not None:
                self._writer.stop()
                self._writer = None
            self._database.close()
            self._disk.leave()

    def subscribe(self, listener: Callable[[Change], None]) -> Callable[[], None]:
        """Call a listener after commits until the returned function is called."""
        with self._life:
            self._listeners += (listener,)

        def end() -> None:
            with self._life:
                self._listeners = tuple(kept for kept in self._listeners if kept is not listener)

        return end

    def _announce(self, change: Change) -> None:
        for listener in self._listeners:
            try:
                listener(change)
            except Exception:
                _log.exception("a listener of the store failed")

    def _now(self) -> int:
        return micros(self._clock())

    def _enqueue(self, operation: Operation[_T], *, lasting: bool = True) -> Future[_T]:
        writer = self._writer
        if writer is None:
            raise StoreUnavailable("the store is closed; start the server again")
        return writer.enqueue(operation, lasting=lasting)

    def _write(self, operation: Operation[_T], *, lasting: bool = True) -> _T:
        return self._enqueue(operation, lasting=lasting).result()

    def _reading(self) -> AbstractContextManager[Connection]:
        return self._database.reading()
