"""Accepting jobs: one operation checks, counts and writes a whole submission, so that it is there wholly or not at all.

What can be prepared without the database (terms, files of large inline content) is made before the writer's turn.
"""

from __future__ import annotations

import os
from dataclasses import dataclass
from typing import Any

from sqlalchemy import bindparam, insert, select

from nearchord_service.model.errors import QuotaExceeded, RequestIdReused
from nearchord_service.model.job import Submission
from nearchord_service.model.stage import ACCEPT
from nearchord_service.store.port import Limits
from nearchord_service.store.sql import moves
from nearchord_service.store.sql.content import ADD_USE, USED, check_content_quota
from nearchord_service.store.sql.disk import Disk
from nearchord_service.store.sql.rows import micros, terms_of
from nearchord_service.store.sql.schema import batches, jobs, requests
from nearchord_service.store.sql.statement import Row, Statement
from nearchord_service.store.sql.submitted import Held, SubmittedContent
from nearchord_service.store.sql.writer import Transaction

QUEUE_RETRY_SECONDS = 30.0
"""When to try again after the limit of unfinished jobs was reached."""

_ACCEPTED = "accepted"
_REQUEST = Statement(
    select(requests).where(requests.c.owner == bindparam("owner"), requests.c.request_id == bindparam("request_id"))
)
_INSERT_REQUEST = Statement(insert(requests))
_INSERT_BATCH = Statement(insert(batches))
_INSERT_JOB = Statement(insert(jobs))


@dataclass(frozen=True)
class Landed:
    """Where a submission is: number of its batch or of its single job, and whether it had been there before."""

    batch: int | None
    job: int | None
    repeated: bool


class Intake:
    """One submission on its way into the database."""

    def __init__(self, submission: Submission, limits: Limits, disk: Disk) -> None:
        """Prepare; raises StoreUnavailable when large inline content cannot be written."""
        self._submission = submission
        self._limits = limits
        self._terms = [terms_of(spec) for spec in submission.specs]
        self._content = SubmittedContent(submission, disk)

    def abandon(self) -> None:
        """Clean up after a submission that was not accepted."""
        self._content.abandon()

    def __call__(self, transaction: Transaction) -> Landed:
        """Accept the submission, or find that it was accepted before."""
        submission = self._submission
        prior = transaction.one(_REQUEST, owner=submission.owner, request_id=submission.request_id)
        if prior is not None:
            return self._repeat(transaction, prior)
        self._content.look_up(transaction)
        graphs = [self._content.graph_of(index, spec) for index, spec in enumerate(submission.specs)]
        size = self._content.new_bytes()
        self._check_quota(transaction, size)
        self._content.store(transaction)
        transaction.run(ADD_USE, owner=submission.owner, jobs=len(graphs), bytes=size)
        return self._store_jobs(transaction, graphs)

    def _repeat(self, transaction: Transaction, prior: Row) -> Landed:
        if prior["fingerprint"] != self._submission.fingerprint:
            raise RequestIdReused(self._submission.request_id)
        transaction.news.afterwards.append(self.abandon)
        return Landed(prior["batch"], prior["job"], repeated=True)

    def _check_quota(self, transaction: Transaction, size: int) -> None:
        used = transaction.all(USED, owner=self._submission.owner, besides="")[0]
        count, limit = len(self._submission.specs), self._limits.unfinished_jobs
        if used["jobs"] + count > limit:
            raise QuotaExceeded(
                "unfinished jobs",
                f"{count} jobs more than the {used['jobs']} unfinished exceed the limit of {limit}; "
                + ("wait for some to end" if count <= limit else "submit fewer at once"),
                QUEUE_RETRY_SECONDS if count <= limit else None,
            )
        if size:
            check_content_quota(used["bytes"], size, self._limits)

    def _store_jobs(self, transaction: Transaction, graphs: list[Held]) -> Landed:
        submission = self._submission
        numbers = transaction.take_numbers(len(graphs) + submission.batch)
        batch = numbers[0] if submission.batch else None
        numbers = numbers[submission.batch :]
        ids = _new_ids(len(numbers) + 1)
        rows = [
            self._job_row(transaction, batch, index, number, graphs[index], ids[index])
            for index, number in enumerate(numbers)
        ]
        transaction.run_many(_INSERT_JOB, rows)
        transaction.run_many(moves.INSERT_EVENT, [_first_event(row) for row in rows])
        if batch is not None:
            self._insert_batch(transaction, batch, ids[-1])
        landed = Landed(batch, None if submission.batch else numbers[0], repeated=False)
        transaction.run(
            _INSERT_REQUEST,
            owner=submission.owner,
            request_id=submission.request_id,
            fingerprint=submission.fingerprint,
            batch=landed.batch,
            job=landed.job,
        )
        transaction.news.work = True
        transaction.news.job_ids.update(ids[:-1])
        return landed

    def _insert_batch(self, transaction: Transaction, number: int, batch_id: str) -> None:
        submission = self._submission
        transaction.run(
            _INSERT_BATCH,
            number=number,
            id=batch_id,
            owner=submission.owner,
            label=submission.label,
            request_id=submission.request_id,
            created_at=transaction.now,
        )
        transaction.news.batch_ids.add(batch_id)

    def _job_row(
        self, transaction: Transaction, batch: int | None, index: int, number: int, graph: Held, job_id: str
    ) -> dict[str, Any]:
        spec = self._submission.specs[index]
        return {
            "number": number,
            "id": job_id,
            "owner": self._submission.owner,
            "batch": batch,
            "batch_index": index,
            "request_id": None if self._submission.batch else self._submission.request_id,
            "label": spec.label,
            "graph_address": spec.graph_address,
            "weights_address": spec.weights_address,
            "names_address": spec.names_address,
            "vertices": graph.vertices,
            "edges": graph.edges,
            "terms": self._terms[index],
            "priority": spec.priority,
            "not_after": None if spec.not_after is None else micros(spec.not_after),
            "stage": ACCEPT.target,
            "verdict": None,
            "reason": _ACCEPTED,
            "attempt": 0,
            "lost_workers": 0,
            "cancel_requested": 0,
            "lease_holder": None,
            "lease_until": None,
            "created_at": transaction.now,
            "started_at": None,
            "finished_at": None,
            "sequence": number,
            "answer_bytes": 0,
            "trimmed": 0,
        }


def _first_event(job: dict[str, Any]) -> dict[str, Any]:
    return {
        "sequence": job["number"],
        "job": job["number"],
        "batch": job["batch"],
        "time": job["created_at"],
        "attempt": 0,
        "stage": ACCEPT.target,
        "verdict": None,
        "reason": _ACCEPTED,
    }


def _new_ids(count: int) -> list[str]:
    random = os.urandom(16 * count).hex()
    return [random[begin : begin + 32] for begin in range(0, len(random), 32)]
