"""Jobs, batches, and what a worker is handed."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from nearchord_service.model.content import Bytes, NewContent
from nearchord_service.model.question import Budget, Question, WhenOver
from nearchord_service.model.stage import Stage, Verdict


@dataclass(frozen=True)
class JobSpec:
    """A checked request for one job. Addresses are hexadecimal SHA-256; inline content is in `inline`."""

    graph_address: str
    weights_address: str | None
    names_address: str | None
    question: Question
    budget: Budget
    when_over: WhenOver = WhenOver.BOUND
    priority: int = 0
    not_after: dt.datetime | None = None
    label: str = ""
    inline: tuple[NewContent, ...] = ()


@dataclass(frozen=True)
class Submission:
    """A job or a batch to accept in one transaction.

    `fingerprint` is a SHA-256 over the specs in order: a repeated `request_id` with the same fingerprint is the same
    request. `batch` tells a batch (even of one job) from a single job.
    """

    owner: str
    request_id: str
    fingerprint: bytes
    specs: tuple[JobSpec, ...]
    batch: bool
    label: str = ""


@dataclass(frozen=True)
class Job:
    """A job as stored. Times are aware UTC datetimes; `sequence` numbers its latest event."""

    id: str
    owner: str
    batch_id: str | None
    batch_index: int
    label: str
    graph_address: str
    weights_address: str | None
    names_address: str | None
    vertices: int
    edges: int
    question: Question
    budget: Budget
    when_over: WhenOver
    priority: int
    not_after: dt.datetime | None
    stage: Stage
    verdict: Verdict | None
    reason: str
    attempt: int
    cancel_requested: bool
    created_at: dt.datetime
    started_at: dt.datetime | None
    finished_at: dt.datetime | None
    sequence: int


@dataclass(frozen=True)
class Batch:
    """A batch with the number of its jobs in each stage."""

    id: str
    owner: str
    label: str
    created_at: dt.datetime
    jobs: int
    waiting: int
    solving: int
    done: int


@dataclass(frozen=True)
class Lease:
    """The right to work on a job: the attempt number is the fence for every write about it.

    `lost_workers` counts earlier attempts that ended without an answer; `until` is on the store's clock.
    """

    job: Job
    attempt: int
    lost_workers: int
    until: dt.datetime
    graph: Bytes
    weights: Bytes | None


@dataclass(frozen=True)
class Page:
    """A page of jobs and where the next one begins (None after the last)."""

    jobs: tuple[Job, ...]
    next_token: str | None
