"""The recorder: told by the rooms what happened, asked by /metrics and LoadService what it came to."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable

from prometheus_client import CollectorRegistry

from nearchord_service.metrics.gauges import QueueGauges, SlotGauges
from nearchord_service.metrics.load import Load, QuestionLoad, Rate, RecentRuns
from nearchord_service.metrics.series import Series, total
from nearchord_service.model.answer import Answer
from nearchord_service.model.job import Job
from nearchord_service.model.question import QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.store.port import QueueFigures
from nearchord_service.work.port import LossCause, SlotFigures


class Metrics:
    """Counts and measures, from any thread. `clock` is monotonic seconds."""

    def __init__(self, registry: CollectorRegistry, clock: Callable[[], float] = time.monotonic) -> None:
        self.registry = registry
        self._series = Series(registry)
        self._lock = threading.Lock()
        self._rate = Rate(clock)
        self._runs: dict[tuple[QuestionName, Verdict], RecentRuns] = {}
        self._queue: Callable[[], QueueFigures] = lambda: QueueFigures(0, 0, 0.0)
        self._slots: Callable[[], SlotFigures] = lambda: SlotFigures(0, 0, 0, 1.0)

    def observe(
        self, queue: Callable[[], QueueFigures], slots: Callable[[], SlotFigures], versions: dict[str, str]
    ) -> None:
        """Read the queue and the slots from here on; called once."""
        self._queue, self._slots = queue, slots
        self.registry.register(QueueGauges(queue))
        self.registry.register(SlotGauges(slots))
        self._series.build.info(versions)

    def job_submitted(self, question: QuestionName, count: int = 1) -> None:
        """Jobs were accepted."""
        self._series.submitted.labels(question).inc(count)

    def job_ended(self, question: QuestionName, verdict: Verdict) -> None:
        """A job is DONE, in whatever way."""
        self._series.finished.labels(question, verdict).inc()
        with self._lock:
            self._rate.add()
            self._recent(question, verdict)

    def job_finished(self, job: Job, answer: Answer) -> None:
        """A worker's attempt ended its job; only one in which the solver came to an answer has figures of a run."""
        question = job.question.name
        if not answer.solver_version or job.started_at is None:
            return
        with self._lock:
            self._recent(question, answer.verdict).add(answer.seconds)
        self._series.wait.labels(question).observe((job.started_at - job.created_at).total_seconds())
        self._series.run.labels(question).observe(answer.seconds)
        for phase, seconds in answer.phase_seconds:
            self._series.phase.labels(question, phase).inc(seconds)
        if answer.fill is not None:
            self._series.fill.labels(question).observe(answer.fill)
        if answer.states is not None:
            self._series.states.labels(question).observe(answer.states)

    def _recent(self, question: QuestionName, verdict: Verdict) -> RecentRuns:
        return self._runs.setdefault((question, verdict), RecentRuns())

    def leases_lost(self, count: int) -> None:
        """Leases ran out or were taken over."""
        self._series.leases_lost.inc(count)

    def worker_lost(self, cause: LossCause) -> None:
        """A worker ended without an answer."""
        self._series.worker_losses.labels(cause).inc()

    def database_write(self, seconds: float) -> None:
        """A commit became durable."""
        self._series.database_write.observe(seconds)

    def upload_bytes(self, count: int) -> None:
        """Bytes of an upload arrived."""
        self._series.upload_bytes.inc(count)

    def watch_opened(self) -> None:
        """A watch stream began."""
        self._series.watch_streams.inc()

    def watch_closed(self) -> None:
        """A watch stream ended."""
        self._series.watch_streams.dec()

    def call_ended(self, method: str, code: str, seconds: float) -> None:
        """A call ended with a status."""
        self._series.calls.labels(method, code).inc()
        self._series.call_seconds.labels(method).observe(seconds)

    def load(self) -> Load:
        """Return the figures now; reads the store, so it blocks."""
        series = self._series
        with self._lock:
            rate = self._rate.per_second()
            runs = {key: recent.quantiles(0.5, 0.9, 0.99) for key, recent in self._runs.items()}
        questions = tuple(
            QuestionLoad(question, verdict, int(total(series.finished, question=question, verdict=verdict)), *runs[key])
            for key in sorted(runs)
            for question, verdict in (key,)
        )
        return Load(
            queue=self._queue(),
            slots=self._slots(),
            submitted=int(total(series.submitted)),
            finished=int(total(series.finished)),
            finished_per_second=rate,
            watch_streams=int(total(series.watch_streams)),
            questions=questions,
        )
