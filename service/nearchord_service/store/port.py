"""The store's interface. Everything outside this room knows the store only through these classes.

Calls block until their effect is durable (or raise) and may come from any thread, except where a Future is returned.
Claims, renewals and progress survive the process but not every power failure, which ends the workers too.
Every call can raise StoreUnavailable. Owners see only what is theirs: anything else is Unknown. The store keeps the
time: leases, start-by times and time stamps use its clock.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Iterable, Sequence
from concurrent.futures import Future
from dataclasses import dataclass
from typing import Protocol

from nearchord_service.model.answer import Answer
from nearchord_service.model.content import Bytes, Content, ContentKind
from nearchord_service.model.event import Event, Progress
from nearchord_service.model.job import Batch, Job, Lease, Page, Submission
from nearchord_service.model.stage import Stage

LOST_WORKERS_ALLOWED = 3
"""A job that loses this many workers becomes BROKEN."""


@dataclass(frozen=True)
class Change:
    """A hint that something was committed; whoever gets it looks into the store for the truth.

    `job_ids` and `batch_ids` have new events; `work` says that a job may be claimable; `cancels` are jobs being solved
    whose cancel was asked for.
    """

    job_ids: frozenset[str] = frozenset()
    batch_ids: frozenset[str] = frozenset()
    work: bool = False
    cancels: frozenset[str] = frozenset()


@dataclass(frozen=True)
class Accepted:
    """What a submission became: its batch (None for a single job), its first job, and whether it is a repetition."""

    batch: Batch | None
    job: Job
    repeated: bool


@dataclass(frozen=True)
class Query:
    """Filters of a listing; None and "" mean any."""

    batch_id: str | None = None
    label: str = ""
    stage: Stage | None = None
    page_size: int = 100
    page_token: str | None = None


@dataclass(frozen=True)
class Renewal:
    """What became of a lease that was to be renewed."""

    held: bool
    cancel_requested: bool


@dataclass(frozen=True)
class Retention:
    """How long ended things are kept: by age in seconds and by total bytes (None: without limit).

    Age counts from the end of a job (its answer, its earlier events), for content from its last store or submission.
    `upload_age` is the age at which an upload that is not continued is dropped.
    """

    answer_age: float | None = None
    answer_bytes: int | None = None
    event_age: float | None = None
    content_age: float | None = None
    content_bytes: int | None = None
    upload_age: float = 86_400.0


@dataclass(frozen=True)
class Dropped:
    """What one round of retention removed."""

    jobs: int
    events: int
    contents: int
    uploads: int


@dataclass(frozen=True)
class QueueFigures:
    """The queue now; `oldest_waiting_seconds` is 0 when nothing waits."""

    waiting: int
    solving: int
    oldest_waiting_seconds: float


@dataclass(frozen=True)
class Limits:
    """Quotas of one owner: unfinished jobs and stored content bytes."""

    unfinished_jobs: int
    content_bytes: int


class Upload(Protocol):
    """One writer's hold on an upload, from `Store.begin_upload`; used by one thread at a time."""

    committed: int
    """Bytes received so far."""

    def write(self, piece: bytes | memoryview) -> None:
        """Append a piece; ContentInvalid (field `piece`) when it exceeds the announced size."""

    def publish(self, check: Callable[[memoryview], tuple[int, int]]) -> Content:
        """Check size, digest and form, make the content durable and visible.

        `check` returns (vertices, edges) or raises ContentInvalid. On any error about the bytes the upload is dropped.
        """

    def release(self) -> None:
        """Let go; unpublished bytes stay for a later `begin_upload`. Safe to repeat, and after `publish`."""


class ContentStore(Protocol):
    """Content-addressed bytes, per owner."""

    def upload_state(self, owner: str, address: str) -> tuple[int, bool]:
        """Return (committed bytes of an upload under way, whether the content is stored)."""

    def begin_upload(
        self, owner: str, address: str, kind: ContentKind, size_bytes: int, offset: int, limits: Limits
    ) -> Upload | Content:
        """Take hold of an upload, or return the content when it is stored already. Offset 0 begins anew.

        Raises UploadOffset, UploadBusy, QuotaExceeded, FieldInvalid (stored or begun as another kind or size).
        """

    def content(self, owner: str, address: str) -> Content:
        """Return a description; raises ContentUnknown."""

    def content_bytes(self, owner: str, address: str) -> Bytes:
        """Return where the bytes are; raises ContentUnknown."""

    def delete_content(self, owner: str, address: str) -> None:
        """Forget content; raises ContentUnknown, ContentInUse."""


class JobStore(Protocol):
    """Jobs as their owners see them."""

    def submit(self, submission: Submission, limits: Limits) -> Accepted:
        """Accept all specs in one transaction, each with its first event and its inline content.

        Raises ContentUnknown, FieldInvalid (content of the wrong kind or length for its use), RequestIdReused,
        QuotaExceeded.
        """

    def job(self, owner: str, job_id: str) -> Job:
        """Return a job; raises JobUnknown."""

    def batch(self, owner: str, batch_id: str) -> Batch:
        """Return a batch; raises BatchUnknown."""

    def jobs(self, owner: str, query: Query) -> Page:
        """Return a page: latest first, or by position within a batch; FieldInvalid for a foreign page token."""

    def job_events(self, owner: str, job_id: str, after: int, limit: int) -> tuple[Event, ...]:
        """Return kept events of a job with larger numbers, ascending; raises JobUnknown."""

    def batch_events(self, owner: str, batch_id: str, after: int, limit: int) -> tuple[Event, ...]:
        """Return kept events of a batch's jobs with larger numbers, ascending; raises BatchUnknown."""

    def cancel_job(self, owner: str, job_id: str) -> Job:
        """Withdraw a WAITING job, mark a SOLVING one, leave a DONE one; raises JobUnknown."""

    def cancel_batch(self, owner: str, batch_id: str) -> Batch:
        """Do so for every job of a batch; raises BatchUnknown."""

    def answer(self, owner: str, job_id: str) -> tuple[Job, Answer]:
        """Return a DONE job with its answer; raises JobUnknown, JobNotDone."""

    def batch_answers(
        self, owner: str, batch_id: str, after_index: int, limit: int
    ) -> tuple[tuple[Job, Answer | None], ...]:
        """Return jobs of a batch at larger positions, ascending, with their answers (None while not DONE)."""

    def delete_job(self, owner: str, job_id: str) -> dt.datetime:
        """Delete a DONE job with its events and answer; raises JobUnknown, JobNotDone."""

    def delete_batch(self, owner: str, batch_id: str) -> dt.datetime:
        """Delete a batch of DONE jobs with all of them; raises BatchUnknown, BatchNotDone."""


class LeaseStore(Protocol):
    """The workers' side. Every fenced write names the attempt and has no effect under another one."""

    def claim(self, holder: str, limit: int, seconds: float) -> tuple[Lease, ...]:
        """Lease up to `limit` WAITING jobs, highest priority first, then oldest; attempt + 1 for each."""

    def renew(self, holder: str, leases: Iterable[tuple[str, int]], seconds: float) -> dict[tuple[str, int], Renewal]:
        """Extend leases; says for each whether it is still held and whether a cancel was asked for."""

    def record_progress(self, rows: Sequence[tuple[str, int, Progress]]) -> None:
        """Write progress rows under their attempts; rows of other attempts are dropped, older progress is replaced."""

    def finish(self, job_id: str, attempt: int, answer: Answer) -> Future[bool]:
        """Record the answer and stage DONE in one transaction; False when the attempt does not hold the job."""

    def give_back(self, job_id: str, attempt: int, reason: str, *, worker_lost: bool) -> Future[bool]:
        """Return a job unanswered: WAITING again, or DONE with BROKEN after LOST_WORKERS_ALLOWED lost workers, or with
        CANCELLED when a cancel was asked for. False when the attempt does not hold the job."""

    def expire_leases(self) -> int:
        """Take back every job whose lease has run out, like a lost worker; returns how many."""

    def reclaim(self, holder: str) -> int:
        """Take back every job leased to `holder` without counting a lost worker (a restart); returns how many."""

    def expire_overdue(self) -> int:
        """End jobs that no worker has taken by their start-by time with EXPIRED; returns how many."""

    def retain(self, retention: Retention) -> Dropped:
        """Drop what is older or more than allowed; never anything that an unfinished job needs."""


class Store(ContentStore, JobStore, LeaseStore, Protocol):
    """All of it, with its life."""

    def start(self) -> None:
        """Open, migrate, lock. Raises StoreUnavailable with the remedy when another server holds the data."""

    def stop(self) -> None:
        """Finish what is queued and close. Safe to repeat, and before `start`."""

    def figures(self) -> QueueFigures:
        """Return the state of the queue."""

    def subscribe(self, listener: Callable[[Change], None]) -> Callable[[], None]:
        """Call `listener` (quickly, from any thread) after commits; returns what ends it. Hints may be lost."""
