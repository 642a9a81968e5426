"""The executor of local worker processes: hands tasks to slots, watches them, ends what does not end by itself.

One thread, the supervisor, waits for messages and for what is due; everything it decides happens under one lock, and
the listener is told afterwards, outside the lock, by that thread only. Handing over and cancelling happen in the
caller's thread, so that a listener told of an end can hand over the next task at once, without a switch of threads.
"""

from __future__ import annotations

import contextlib
import logging
import math
import os
import selectors
import threading
import time
from pathlib import Path

from nearchord_service.work.local.pool import Pool
from nearchord_service.work.local.slot import SAMPLE_SECONDS
from nearchord_service.work.port import LossCause, SlotFigures, Task, TaskKey, TaskListener

RESIDENT_LIMIT_BYTES = 512 * 2**20
"""A worker that after a task holds so much more than it did when it was forked is replaced."""

GRACE_SECONDS = 2.0
"""Time that a task told to stop has before its worker is killed."""

KEEP_BYTES = 2**32
"""Disk that what is kept for later solves may take."""

_PAUSE_SECONDS = 1.0
_LOG = logging.getLogger(__name__)


class LocalExecutor:
    """Slots on this machine (see `work.port.Executor`); each solves one task at a time in a process of its own."""

    def __init__(
        self,
        slots: int,
        *,
        resident_limit_bytes: int = RESIDENT_LIMIT_BYTES,
        grace_seconds: float = GRACE_SECONDS,
        solver: str = "nearchord_solve",
        keep_folder: Path | None = None,
        keep_bytes: int = KEEP_BYTES,
    ) -> None:
        """Prepare `slots` slots; `solver` names the module that workers solve with (tests put others in).

        What solves leave for later ones on the same graph is kept in `keep_folder`, at most `keep_bytes` of it; the
        folder may be deleted at any time.
        """
        if slots < 1:
            raise ValueError(f"slots must be 1 or more, not {slots}")
        self._lock = threading.Lock()
        self._pool = Pool(slots, resident_limit_bytes, grace_seconds, solver, keep_folder, keep_bytes)
        self._bell = os.eventfd(0, os.EFD_NONBLOCK | os.EFD_CLOEXEC)
        self._wakes_at = -math.inf
        self._thread: threading.Thread | None = None
        self._listener: TaskListener | None = None
        self._end_at: float | None = None
        self._closed = False

    def start(self, listener: TaskListener) -> None:
        """Begin to make slots ready, in the background. A second start is harmless; none after a stop."""
        with self._lock:
            if self._thread is not None or self._end_at is not None:
                return
            self._listener = listener
            self._thread = threading.Thread(target=self._supervise, name="supervisor", daemon=True)
            self._thread.start()

    def stop(self, grace_seconds: float) -> None:
        """Stop; running tasks get the grace to end, then are killed (cause SHUTDOWN). Safe to repeat, and unstarted."""
        with self._lock:
            end_at = time.monotonic() + max(0.0, grace_seconds)
            self._end_at = end_at if self._end_at is None else min(self._end_at, end_at)
            self._pool.shut()
            self._ring()
            if self._thread is None:
                self._close()
        if self._thread is not None and self._thread is not threading.current_thread():
            self._thread.join()

    def free(self) -> int:
        """Return how many tasks would begin at once."""
        with self._lock:
            return 0 if self._end_at is not None else self._pool.free()

    def run(self, task: Task) -> None:
        """Hand a task over; returns at once. A task that finds no idle slot waits for one."""
        now = time.monotonic()
        with self._lock:
            if self._end_at is None:
                self._pool.add(task, now)
            else:
                self._pool.refuse(task)
            if self._pool.news or now + min(SAMPLE_SECONDS, task.budget.seconds) < self._wakes_at:
                self._ring()
            closed = self._closed
        if closed:
            self._tell()

    def cancel(self, key: TaskKey) -> None:
        """Ask a task to end as CANCELLED, and kill it if it does not listen. No effect on ended tasks."""
        with self._lock:
            self._pool.cancel(key, time.monotonic())
            self._ring()

    def figures(self) -> SlotFigures:
        """Return the state of the slots."""
        with self._lock:
            return self._pool.figures()

    def _ring(self) -> None:
        """Wake the supervisor."""
        if not self._closed:
            os.eventfd_write(self._bell, 1)

    def _close(self) -> None:
        if not self._closed:
            self._closed = True
            self._pool.close()
            os.close(self._bell)

    def _supervise(self) -> None:
        self._pool.selector.register(self._bell, selectors.EVENT_READ, self._rung)
        while True:
            try:
                last = self._turn()
            except Exception:
                _LOG.exception("the supervisor of local workers failed; all workers are replaced")
                with self._lock:
                    self._pool.lose_nursery(time.monotonic(), None)
                last = False
                time.sleep(_PAUSE_SECONDS)
            self._tell()
            if last:
                break
        with self._lock:
            self._close()
        self._tell()

    def _turn(self) -> bool:
        """Wait for something, deal with it; say whether this was the last turn."""
        with self._lock:
            due = min(self._pool.due(), math.inf if self._end_at is None else self._end_at)
            self._wakes_at = due
        ready = self._pool.selector.select(None if due == math.inf else max(0.0, due - time.monotonic()))
        with self._lock:
            self._wakes_at = -math.inf
            now = time.monotonic()
            for key, _ in ready:
                if key.fileobj in self._pool.selector.get_map():
                    key.data(now)
            self._pool.tick(now)
            if self._end_at is None or (self._pool.busy() and now < self._end_at):
                return False
            self._pool.lose_nursery(now, LossCause.SHUTDOWN)
            return True

    def _rung(self, now: float) -> None:
        with contextlib.suppress(BlockingIOError):
            os.eventfd_read(self._bell)

    def _tell(self) -> None:
        """Tell the listener what happened, outside the lock; its errors are its own."""
        with self._lock:
            news, self._pool.news = self._pool.news, []
        for item in news:
            try:
                if self._listener is not None:
                    item(self._listener)
            except Exception:
                _LOG.exception("a listener of the executor failed")
