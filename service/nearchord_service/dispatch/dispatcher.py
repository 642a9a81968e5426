"""Leases jobs when slots are free, hands them to the executor, and sees to it that every end reaches the store.

Threads: the dispatcher's own leases jobs; the executor's tells of ends and gets the next task at once from those leased
ahead; the recorder writes results; tickers renew leases and write progress. The lock is never held while the store is
called.
"""

from __future__ import annotations

import logging
import threading
import time
from collections.abc import Callable

from nearchord_service.dispatch.holdings import Held, Holdings, Standing
from nearchord_service.dispatch.lease import LeaseKeeper
from nearchord_service.dispatch.observer import DispatchObserver
from nearchord_service.dispatch.outbox import Outbox
from nearchord_service.dispatch.pace import LONG_RUN_SECONDS, Pace
from nearchord_service.dispatch.recorder import Recorder
from nearchord_service.dispatch.ticker import Ticker
from nearchord_service.dispatch.verdicts import final_answer
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.model.event import Progress
from nearchord_service.store.port import Change, Store
from nearchord_service.work.port import Executor, LossCause, Lost, Solved, TaskKey

AHEAD_SECONDS = 1.0
"""A job leased ahead that has found no slot by then is given back to the queue."""

PROGRESS_SECONDS = 0.25
"""Interval of progress rows."""

FLUSH_SECONDS = 10.0
"""Time for results to reach the store when the server stops."""

_LOG = logging.getLogger(__name__)


class Dispatcher:
    """Works the queue with one executor, whose life it owns. It is the executor's listener."""

    def __init__(
        self,
        store: Store,
        executor: Executor,
        *,
        holder: str,
        observer: DispatchObserver,
        lease_seconds: float = 45.0,
        heartbeat_seconds: float = 10.0,
        poll_seconds: float = 1.0,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        """`holder` names whoever holds the leases; a restarted server with the same name takes its own back at once."""
        self._store = store
        self._executor = executor
        self._holder = holder
        self._observer = observer
        self._poll_seconds = poll_seconds
        self._clock = clock
        self._lock = threading.Lock()
        self._holdings = Holdings(clock)
        self._pace = Pace()
        self._progress: dict[TaskKey, Progress] = {}
        self._dry = False  # the queue was empty when last asked, and nothing was hinted since
        self._wake = threading.Event()
        self._stopping = False
        self._reclaimed = False
        self._recorder = Recorder()
        self._outbox = Outbox(store, self._recorder, observer, self._forget)
        self._keeper = LeaseKeeper(
            store, executor, self._outbox, observer, self._holdings, self._lock, holder=holder, seconds=lease_seconds
        )
        self._tickers = (
            Ticker("lease renewal", heartbeat_seconds, self.renew),
            Ticker("progress", PROGRESS_SECONDS, self._write_progress),
        )
        self._thread: threading.Thread | None = None
        self._unsubscribe: Callable[[], None] | None = None

    # Life

    def start(self) -> None:
        """Begin; a second start is harmless, and one after a stop does nothing."""
        with self._lock:
            if self._thread is not None or self._stopping:
                return
            self._thread = threading.Thread(target=self._run, name="dispatcher", daemon=True)
        self._unsubscribe = self._store.subscribe(self._hinted)
        self._recorder.start()
        for ticker in self._tickers:
            ticker.start()
        self._executor.start(self)
        self._thread.start()

    def stop(self, grace_seconds: float) -> None:
        """Lease no more, let running tasks end within the grace, give the rest back. Safe to repeat, and unstarted."""
        with self._lock:
            self._stopping = True
        self._wake.set()
        if self._unsubscribe is not None:
            self._unsubscribe()
            self._unsubscribe = None
        self._give_back_ahead("the server is shutting down")
        self._executor.stop(grace_seconds)
        if self._thread is not None:
            self._thread.join(FLUSH_SECONDS)
            self._give_back_ahead("the server is shutting down")
            self._recorder.flush(FLUSH_SECONDS)
        for ticker in self._tickers:
            ticker.stop()
        self._recorder.stop()

    def _run(self) -> None:
        while not self._stopping:
            wait = self._poll_seconds
            try:
                wait = self._round()
            except StoreUnavailable as error:
                _LOG.warning("the store is not available, trying again in %g s: %s", wait, error)
            except Exception:
                _LOG.exception("a round of the dispatcher failed")
            self._wake.wait(wait)
            self._wake.clear()

    def _round(self) -> float:
        """Lease what fits; return the seconds to the next round when nothing wakes it."""
        if not self._reclaimed:
            taken = self._store.reclaim(self._holder)
            self._reclaimed = True
            if taken:
                _LOG.info("%d jobs of the previous run wait again", taken)
        self._give_back_stale()
        while not self._stopping and (wanted := self._wanted()):
            with self._lock:
                self._dry = True
            leased = len(self._keeper.claim(wanted))
            self._feed()
            if leased < wanted:
                break
            with self._lock:
                self._dry = False
        with self._lock:
            return AHEAD_SECONDS if self._holdings.ahead() else self._poll_seconds

    # Jobs in

    def _wanted(self) -> int:
        """Return how many jobs to lease now."""
        free, figures = self._executor.free(), self._executor.figures()
        with self._lock:
            ahead = self._holdings.ahead()
            quick = figures.idle + figures.busy - self._holdings.long_runs(self._clock() - LONG_RUN_SECONDS)
            allowed = self._pace.ahead(max(0, quick))
        short_of_work = free > ahead or ahead <= allowed // 2
        return max(0, free + allowed - ahead) if short_of_work else 0

    def _feed(self) -> None:
        """Hand tasks to free slots from those leased ahead."""
        while (held := self._next()) is not None:
            self._executor.run(held.task)
            with self._lock:
                unwanted = held.cancelled or held.lost
            if unwanted:
                self._executor.cancel(held.key)

    def _next(self) -> Held | None:
        """Take the next task that may run now."""
        with self._lock:
            if self._stopping or not self._holdings.ahead() or not self._executor.free():
                return None
            return self._holdings.next()

    def _give_back_stale(self) -> None:
        with self._lock:
            oldest = self._holdings.oldest_ahead()
            stale = oldest is not None and self._clock() >= oldest + AHEAD_SECONDS
        if stale:
            self._give_back_ahead("leased ahead, but no slot came free")

    def _give_back_ahead(self, reason: str) -> None:
        with self._lock:
            taken = self._holdings.take_ahead()
        for held in taken:
            self._outbox.give_back(held, reason, worker_lost=False)

    # What the executor tells

    def slots_changed(self) -> None:
        """See TaskListener."""
        self._feed()
        self._ask_for_more()

    def progressed(self, key: TaskKey, progress: Progress) -> None:
        """See TaskListener."""
        with self._lock:
            self._progress[key] = progress

    def ended(self, key: TaskKey, end: Solved | Lost) -> None:
        """See TaskListener."""
        with self._lock:
            self._progress.pop(key, None)
            held = self._holdings.get(key)
            if held is None:
                return
            held.standing = Standing.RECORDING
            self._pace.ran(self._clock() - held.since)
        self._feed()
        if held.lost:
            self._forget(held)
        else:
            self._send(held, end)
        self._ask_for_more()
        if isinstance(end, Lost) and end.progress is not None:
            self._observer.worker_lost(end.cause)

    def _ask_for_more(self) -> None:
        with self._lock:
            dry = self._dry
        if not dry:
            self._wake.set()

    def _send(self, held: Held, end: Solved | Lost) -> None:
        if isinstance(end, Solved):
            self._outbox.finish(held, end.answer)
        elif (answer := final_answer(end)) is not None:
            self._outbox.finish(held, answer)
        else:
            self._outbox.give_back(held, end.reason, worker_lost=end.cause is LossCause.DIED)

    def _forget(self, held: Held) -> None:
        with self._lock:
            self._holdings.drop(held)

    # What the store tells

    def _hinted(self, change: Change) -> None:
        for job_id in change.cancels:
            self._keeper.cancel_job(job_id)
        if change.work:
            with self._lock:
                self._dry = False
            self._wake.set()

    def renew(self) -> None:
        """Renew every lease in hand now; the heartbeat does so at intervals."""
        self._keeper.renew()

    def _write_progress(self) -> None:
        with self._lock:
            rows, self._progress = self._progress, {}
        if rows:
            self._store.record_progress([(key.job_id, key.attempt, seen) for key, seen in rows.items()])
