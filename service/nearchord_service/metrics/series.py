"""The time series of /metrics by name. Labels are closed sets: questions, verdicts, stages, phases, causes, methods."""

from __future__ import annotations

from prometheus_client import CollectorRegistry, Counter, Gauge, Histogram, Info

SECONDS = (0.01, 0.03, 0.1, 0.3, 1, 3, 10, 30, 100, 300, 1000, 3600)
FINE_SECONDS = (0.0003, 0.001, 0.003, *SECONDS[:8])
FILL = (0, 1, 3, 10, 30, 100, 300, 1_000, 3_000, 10_000, 100_000)
STATES = tuple(10.0**k for k in range(1, 11))


class Series:
    """Everything that is counted as it happens, in a registry of its own."""

    def __init__(self, registry: CollectorRegistry) -> None:
        self.submitted = Counter("nearchord_jobs_submitted_total", "Jobs accepted.", ("question",), registry=registry)
        self.finished = Counter(
            "nearchord_jobs_finished_total", "Jobs that ended.", ("question", "verdict"), registry=registry
        )
        self.wait = Histogram(
            "nearchord_job_wait_seconds",
            "Time between acceptance of a job and the start of the attempt that ended it.",
            ("question",),
            buckets=SECONDS,
            registry=registry,
        )
        self.run = Histogram(
            "nearchord_job_run_seconds", "Worker time of a job.", ("question",), buckets=SECONDS, registry=registry
        )
        self.phase = Counter(
            "nearchord_solve_phase_seconds_total", "Worker time by phase.", ("question", "phase"), registry=registry
        )
        self.fill = Histogram(
            "nearchord_fill_edges", "Fill edges a job used.", ("question",), buckets=FILL, registry=registry
        )
        self.states = Histogram(
            "nearchord_states", "States a job used.", ("question",), buckets=STATES, registry=registry
        )
        self.leases_lost = Counter(
            "nearchord_leases_lost_total", "Leases that ran out or were taken over.", registry=registry
        )
        self.worker_losses = Counter(
            "nearchord_worker_losses_total", "Workers that ended without an answer.", ("cause",), registry=registry
        )
        self.watch_streams = Gauge("nearchord_watch_streams", "Watch streams open now.", registry=registry)
        self.upload_bytes = Counter(
            "nearchord_upload_bytes_total", "Bytes of content received by upload.", registry=registry
        )
        self.database_write = Histogram(
            "nearchord_database_write_seconds",
            "Time of one durable commit.",
            buckets=FINE_SECONDS,
            registry=registry,
        )
        self.calls = Counter("nearchord_calls_total", "Calls that ended.", ("method", "code"), registry=registry)
        self.call_seconds = Histogram(
            "nearchord_call_seconds",
            "Time of a call from its first message to its status.",
            ("method",),
            buckets=FINE_SECONDS,
            registry=registry,
        )
        self.build = Info("nearchord_build", "Versions of this server.", registry=registry)


def total(series: Counter | Gauge, **labels: str) -> float:
    """Return the sum over all label values that agree with `labels`, as a scrape would show it."""
    return sum(
        sample.value
        for metric in series.collect()
        for sample in metric.samples
        if not sample.name.endswith("_created") and labels.items() <= sample.labels.items()
    )
