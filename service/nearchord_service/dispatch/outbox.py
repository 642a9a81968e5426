"""The two ways in which a lease ends, as records, and what follows when the store has taken them."""

from __future__ import annotations

import logging
from collections.abc import Callable
from functools import partial

from nearchord_service.dispatch.holdings import Held
from nearchord_service.dispatch.observer import DispatchObserver
from nearchord_service.dispatch.recorder import Record, Recorder
from nearchord_service.model.answer import Answer
from nearchord_service.model.stage import Verdict
from nearchord_service.store.port import LOST_WORKERS_ALLOWED, LeaseStore

_LOG = logging.getLogger(__name__)


class Outbox:
    """Sends ends of leases to the store; `forget` is called with each lease whose end is settled."""

    def __init__(
        self, store: LeaseStore, recorder: Recorder, observer: DispatchObserver, forget: Callable[[Held], None]
    ) -> None:
        self._store = store
        self._recorder = recorder
        self._observer = observer
        self._forget = forget

    def finish(self, held: Held, answer: Answer) -> None:
        """Record an answer."""
        job, attempt = held.lease.job, held.lease.attempt
        self._recorder.put(
            Record(
                f"answer of job {job.id}, attempt {attempt}",
                lambda: self._store.finish(job.id, attempt, answer),
                partial(self._finished, held, answer),
            )
        )

    def give_back(self, held: Held, reason: str, *, worker_lost: bool) -> None:
        """Return a job unanswered."""
        job, attempt = held.lease.job, held.lease.attempt
        self._recorder.put(
            Record(
                f"return of job {job.id}, attempt {attempt}",
                lambda: self._store.give_back(job.id, attempt, reason, worker_lost=worker_lost),
                partial(self._given_back, held, reason, worker_lost),
            )
        )

    def _finished(self, held: Held, answer: Answer, recorded: bool | None) -> None:
        if recorded is None:
            self.give_back(held, "the answer could not be recorded; the server's log says why", worker_lost=True)
            return
        self._forget(held)
        if recorded:
            self._observer.job_finished(held.lease.job, answer)
        elif not held.lost:
            self._refused(held)

    def _given_back(self, held: Held, reason: str, worker_lost: bool, recorded: bool | None) -> None:
        self._forget(held)
        if recorded is False and not held.lost:
            self._refused(held)
        elif recorded and held.cancelled:
            self._observer.job_finished(held.lease.job, Answer(Verdict.CANCELLED, reason))
        elif recorded and worker_lost and held.lease.lost_workers + 1 >= LOST_WORKERS_ALLOWED:
            self._observer.job_finished(held.lease.job, Answer(Verdict.BROKEN, reason))

    def _refused(self, held: Held) -> None:
        _LOG.warning("job %s is not held under attempt %d any more", held.lease.job.id, held.lease.attempt)
        self._observer.leases_lost(1)
