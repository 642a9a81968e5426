"""Getting results into the store, whatever it takes.

Results wait here in memory until the store has committed them; while the store is not available they are tried again
with growing delays. A result whose attempt does not hold its job any more is refused by the store and forgotten.
"""

from __future__ import annotations

import heapq
import itertools
import logging
import threading
import time
from collections.abc import Callable
from concurrent.futures import Future
from dataclasses import dataclass

from nearchord_service.model.errors import StoreUnavailable

_FIRST_DELAY, _LONGEST_DELAY = 0.1, 5.0
_LOG = logging.getLogger(__name__)


@dataclass
class Record:
    """A write that must happen.

    `write` asks the store; `settled` is told once: True recorded, False refused, None the store cannot take it at all.
    """

    what: str
    write: Callable[[], Future[bool]]
    settled: Callable[[bool | None], None]
    delay: float = _FIRST_DELAY


class Recorder:
    """Writes records in a thread of its own, many under way at once, so that the store can commit them together."""

    def __init__(self, clock: Callable[[], float] = time.monotonic) -> None:
        self._clock = clock
        self._changed = threading.Condition()
        self._due: list[tuple[float, int, Record]] = []
        self._number = itertools.count()
        self._open = 0
        self._ending = False
        self._thread: threading.Thread | None = None

    def start(self) -> None:
        """Begin to write."""
        with self._changed:
            if self._thread is None and not self._ending:
                self._thread = threading.Thread(target=self._run, name="recorder", daemon=True)
                self._thread.start()

    def put(self, record: Record) -> None:
        """Take a record; returns at once."""
        with self._changed:
            self._open += 1
            self._push(record, 0.0)

    def flush(self, seconds: float) -> bool:
        """Wait until everything is settled; False when that took longer than `seconds`."""
        with self._changed:
            return self._changed.wait_for(lambda: not self._open, seconds)

    def stop(self) -> None:
        """End without waiting for what is not settled. Safe to repeat, and before `start`."""
        with self._changed:
            self._ending = True
            if self._open:
                _LOG.warning("%d results are not recorded; their jobs will be solved again", self._open)
            self._open = 0
            self._changed.notify_all()
        if self._thread is not None:
            self._thread.join()

    def _push(self, record: Record, delay: float) -> None:
        heapq.heappush(self._due, (self._clock() + delay, next(self._number), record))
        self._changed.notify_all()

    def _run(self) -> None:
        while (record := self._next()) is not None:
            self._write(record)

    def _next(self) -> Record | None:
        """Wait for the next record that is due; None at the end."""
        with self._changed:
            while not self._ending:
                wait = self._due[0][0] - self._clock() if self._due else None
                if wait is not None and wait <= 0:
                    return heapq.heappop(self._due)[2]
                self._changed.wait(wait)
            return None

    def _write(self, record: Record) -> None:
        try:
            future = record.write()
        except Exception as error:
            self._failed(record, error)
            return
        future.add_done_callback(lambda done: self._written(record, done))

    def _written(self, record: Record, future: Future[bool]) -> None:
        if future.cancelled():
            self._failed(record, StoreUnavailable("the store was stopped"))
        elif (error := future.exception()) is not None:
            self._failed(record, error)
        else:
            self._settle(record, future.result())

    def _failed(self, record: Record, error: BaseException) -> None:
        if not isinstance(error, StoreUnavailable):
            _LOG.error("%s: the store failed", record.what, exc_info=error)
            self._settle(record, None)
            return
        _LOG.warning("%s: the store is not available, trying again in %g s: %s", record.what, record.delay, error)
        with self._changed:
            self._push(record, record.delay)
        record.delay = min(2 * record.delay, _LONGEST_DELAY)

    def _settle(self, record: Record, result: bool | None) -> None:
        try:
            record.settled(result)
        except Exception:
            _LOG.exception("%s: what follows its recording failed", record.what)
        with self._changed:
            self._open = max(0, self._open - 1)
            self._changed.notify_all()
