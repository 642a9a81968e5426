"""Who wants to know how dispatching goes (metrics)."""

from __future__ import annotations

from typing import Protocol

from nearchord_service.model.answer import Answer
from nearchord_service.model.job import Job
from nearchord_service.work.port import LossCause


class DispatchObserver(Protocol):
    """Told from any thread; must return quickly. What it raises is logged and otherwise ignored."""

    def job_finished(self, job: Job, answer: Answer) -> None:
        """The answer is recorded; `job` is as it was when this attempt leased it."""

    def leases_lost(self, count: int) -> None:
        """Leases ran out, or results came under attempts that did not hold their jobs any more."""

    def worker_lost(self, cause: LossCause) -> None:
        """A worker ended without an answer."""
