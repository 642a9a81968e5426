"""Keeping leases alive, and acting on what the store says about them: cancels asked for, leases lost."""

from __future__ import annotations

import logging
import threading
from collections.abc import Iterable

from nearchord_service.dispatch.holdings import Held, Holdings, Standing
from nearchord_service.dispatch.observer import DispatchObserver
from nearchord_service.dispatch.outbox import Outbox
from nearchord_service.store.port import LeaseStore
from nearchord_service.work.port import Executor, TaskKey

_LOG = logging.getLogger(__name__)


class LeaseKeeper:
    """Works on the dispatcher's holdings, under the dispatcher's lock; it holds it in no call to the outside."""

    def __init__(
        self,
        store: LeaseStore,
        executor: Executor,
        outbox: Outbox,
        observer: DispatchObserver,
        holdings: Holdings,
        lock: threading.Lock,
        *,
        holder: str,
        seconds: float,
    ) -> None:
        """`seconds` is how long a lease is asked for each time."""
        self._store = store
        self._executor = executor
        self._outbox = outbox
        self._observer = observer
        self._holdings = holdings
        self._lock = lock
        self._holder = holder
        self._seconds = seconds
        self._early: set[str] | None = None

    def claim(self, limit: int) -> list[Held]:
        """Lease up to `limit` jobs and take them in hand; cancels that were hinted meanwhile are not forgotten."""
        with self._lock:
            self._early = set()
        leases = self._store.claim(self._holder, limit, self._seconds)
        with self._lock:
            fresh = [self._holdings.add(lease) for lease in leases]
            early, self._early = self._early, None
        self._cancel_all(held for held in fresh if early and held.lease.job.id in early)
        return fresh

    def cancel_job(self, job_id: str) -> None:
        """Act on the hint that a job is to be cancelled."""
        with self._lock:
            found = self._holdings.of_job(job_id)
            if not found and self._early is not None:
                self._early.add(job_id)
        self._cancel_all(found)

    def renew(self) -> None:
        """Renew every lease in hand; act on those that are lost or whose cancel was asked for."""
        with self._lock:
            keys = self._holdings.keys()
        if not keys:
            return
        for (job_id, attempt), renewal in self._store.renew(self._holder, keys, self._seconds).items():
            with self._lock:
                held = self._holdings.get(TaskKey(job_id, attempt))
            if held is not None and not renewal.held:
                self._lose(held)
            elif held is not None and renewal.cancel_requested:
                self._cancel_all([held])

    def _cancel_all(self, leases: Iterable[Held]) -> None:
        for held in leases:
            with self._lock:
                held.cancelled = True
                was = held.standing
                if was is Standing.AHEAD:
                    self._holdings.pull(held)
            if was is Standing.AHEAD:
                self._outbox.give_back(held, "cancelled before a worker had begun the job", worker_lost=False)
            elif was is Standing.RUNNING:
                self._executor.cancel(held.key)

    def _lose(self, held: Held) -> None:
        """Drop a lease that is not ours any more; its result, if one comes, is worth nothing."""
        with self._lock:
            was = held.standing
            if was is Standing.RECORDING or held.lost:
                return
            held.lost = True
            if was is Standing.AHEAD:
                self._holdings.pull(held)
                self._holdings.drop(held)
        _LOG.warning("the lease of job %s, attempt %d was lost", held.lease.job.id, held.lease.attempt)
        if was is Standing.RUNNING:
            self._executor.cancel(held.key)
        self._observer.leases_lost(1)
