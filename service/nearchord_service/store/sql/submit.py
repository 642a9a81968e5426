"""Accepting jobs: one operation checks, counts and writes a whole submission, so that it is there wholly or not at all.

What can be prepared without the database (rows, ids, files of large inline content) is made before the writer's turn.
"""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator
from contextlib import suppress
from dataclasses import dataclass
from functools import partial
from typing import Any

from sqlalchemy import bindparam, insert, select

from nearchord_service.model.content import ContentKind, NewContent
from nearchord_service.model.errors import (
    ContentUnknown,
    FieldInvalid,
    FieldViolation,
    QuotaExceeded,
    RequestIdReused,
)
from nearchord_service.model.job import JobSpec, Submission
from nearchord_service.model.stage import ACCEPT, Stage
from nearchord_service.store.port import Limits
from nearchord_service.store.sql import moves
from nearchord_service.store.sql.content import (
    ADD_USE,
    INSERT_BLOB,
    INSERT_CONTENT,
    OWNED,
    SMALL_BYTES,
    TOUCH,
    USED,
    bytes_at,
    check_content_quota,
)
from nearchord_service.store.sql.disk import Disk, disk_trouble, new_file_name
from nearchord_service.store.sql.rows import micros, terms_of
from nearchord_service.store.sql.schema import batches, jobs, requests
from nearchord_service.store.sql.statement import Row, Statement
from nearchord_service.store.sql.writer import Transaction

QUEUE_RETRY_SECONDS = 30.0
"""When to try again after the limit of unfinished jobs was reached."""

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


@dataclass(frozen=True)
class _Held:
    """What is known of content that a spec uses."""

    kind: str
    vertices: int
    edges: int


class Intake:
    """One submission on its way into the database."""

    def __init__(self, submission: Submission, limits: Limits, disk: Disk) -> None:
        """Prepare; raises StoreUnavailable when large inline content cannot be written."""
        self._submission = submission
        self._limits = limits
        self._disk = disk
        self._inline = {new.address: new for spec in submission.specs for new in spec.inline}
        self._terms = [terms_of(spec) for spec in submission.specs]
        self._files: dict[str, str] = {}
        try:
            for new in self._inline.values():
                if len(new.data) >= SMALL_BYTES:
                    name = self._files[new.address] = new_file_name(new.address)
                    self._write_file(name, new.data)
        except OSError as fault:
            self.abandon()
            raise disk_trouble(disk.content, fault) from fault

    def _write_file(self, name: str, data: bytes) -> None:
        descriptor = self._disk.open(name, keep=0)
        try:
            self._disk.write(descriptor, data)
            self._disk.sync(descriptor)
        finally:
            os.close(descriptor)

    def abandon(self) -> None:
        """Remove files of a submission that was not accepted; what cannot be removed goes at the next start."""
        for name in self._files.values():
            with suppress(OSError):
                self._disk.remove(name)

    def __call__(self, transaction: Transaction) -> Landed:
        """Accept the submission, or find that it was accepted before."""
        submission = self._submission
        prior = transaction.one(_REQUEST, owner=submission.owner, request_id=submission.request_id)
        if prior is not None:
            return self._repeat(transaction, prior)
        known = self._known_content(transaction)
        uses = [self._uses(index, spec, known) for index, spec in enumerate(submission.specs)]
        self._check_quota(transaction, known)
        self._store_content(transaction, known)
        return self._store_jobs(transaction, uses)

    def _repeat(self, transaction: Transaction, prior: Row) -> Landed:
        if prior["fingerprint"] != self._submission.fingerprint:
            raise RequestIdReused(self._submission.request_id)
        transaction.news.afterwards.append(self.abandon)
        return Landed(prior["batch"], prior["job"], repeated=True)

    def _known_content(self, transaction: Transaction) -> dict[str, _Held]:
        """Return what the owner has stored already of everything the specs use."""
        owner = self._submission.owner
        wanted = {address for spec in self._submission.specs for _, address, _ in _needs(spec)}
        known = {}
        for address in wanted | self._inline.keys():
            row = transaction.one(OWNED, owner=owner, address=address)
            if row is not None:
                known[address] = _Held(row["kind"], row["vertices"], row["edges"])
        return known

    def _uses(self, index: int, spec: JobSpec, known: dict[str, _Held]) -> _Held:
        """Check the content of one spec; returns its graph."""
        path = f"specs[{index}].input" if self._submission.batch else "spec.input"
        graph = _Held("", 0, 0)
        for name, address, kind in _needs(spec):
            held = self._held(address, known)
            if held.kind != kind:
                raise FieldInvalid(
                    FieldViolation(
                        f"{path}.{name}_address", f"{address} is stored as {held.kind}; name content of kind {kind}"
                    )
                )
            if kind is ContentKind.GRAPH:
                graph = held
            elif held.vertices != graph.vertices:
                raise FieldInvalid(
                    FieldViolation(
                        f"{path}.{name}_address",
                        f"{address} has {held.vertices} entries, the graph {graph.vertices} vertices; "
                        f"give one entry a vertex",
                    )
                )
        return graph

    def _held(self, address: str, known: dict[str, _Held]) -> _Held:
        held = known.get(address)
        if held is not None:
            return held
        new = self._inline.get(address)
        if new is None:
            raise ContentUnknown(address)
        return _Held(new.kind, new.vertices, new.edges)

    def _check_quota(self, transaction: Transaction, known: dict[str, _Held]) -> None:
        used = transaction.all(USED, owner=self._submission.owner, besides="")[0]
        count = len(self._submission.specs)
        if used["jobs"] + count > self._limits.unfinished_jobs:
            raise QuotaExceeded(
                "unfinished jobs",
                f"{count} jobs more than the {used['jobs']} unfinished exceed the limit of "
                f"{self._limits.unfinished_jobs}; wait for some to end",
                QUEUE_RETRY_SECONDS if count <= self._limits.unfinished_jobs else None,
            )
        more = sum(len(new.data) for new in self._new(known))
        if more:
            check_content_quota(used["bytes"], more, self._limits)

    def _new(self, known: dict[str, _Held]) -> Iterator[NewContent]:
        return (new for new in self._inline.values() if new.address not in known)

    def _store_content(self, transaction: Transaction, known: dict[str, _Held]) -> None:
        owner, now = self._submission.owner, transaction.now
        new = list(self._new(known))
        transaction.run_many(
            INSERT_BLOB,
            [
                {
                    "address": content.address,
                    "size_bytes": len(content.data),
                    "data": None if content.address in self._files else content.data,
                    "file": self._files.get(content.address),
                }
                for content in new
            ],
        )
        transaction.run_many(
            INSERT_CONTENT,
            [
                {
                    "owner": owner,
                    "address": content.address,
                    "kind": content.kind,
                    "size_bytes": len(content.data),
                    "vertices": content.vertices,
                    "edges": content.edges,
                    "created_at": now,
                    "used_at": now,
                }
                for content in new
            ],
        )
        transaction.run_many(TOUCH, [{"whose": owner, "which": address, "now": now} for address in known])
        size = sum(len(content.data) for content in new)
        transaction.run(ADD_USE, owner=owner, jobs=len(self._submission.specs), bytes=size)
        self._drop_spare_files(transaction)

    def _drop_spare_files(self, transaction: Transaction) -> None:
        """See that files go which were written for bytes that were there already."""
        for address, name in self._files.items():
            if bytes_at(transaction, self._disk, address).path != self._disk.path(name):
                transaction.news.afterwards.append(partial(self._disk.remove, name))

    def _store_jobs(self, transaction: Transaction, graphs: list[_Held]) -> Landed:
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
        self, transaction: Transaction, batch: int | None, index: int, number: int, graph: _Held, job_id: str
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


_ACCEPTED = "accepted"


def _needs(spec: JobSpec) -> Iterable[tuple[str, str, ContentKind]]:
    yield "graph", spec.graph_address, ContentKind.GRAPH
    if spec.weights_address is not None:
        yield "weights", spec.weights_address, ContentKind.WEIGHTS
    if spec.names_address is not None:
        yield "names", spec.names_address, ContentKind.NAMES


def _first_event(job: dict[str, Any]) -> dict[str, Any]:
    return {
        "sequence": job["number"],
        "job": job["number"],
        "batch": job["batch"],
        "time": job["created_at"],
        "attempt": 0,
        "stage": Stage.WAITING,
        "verdict": None,
        "reason": _ACCEPTED,
    }


def _new_ids(count: int) -> list[str]:
    random = os.urandom(16 * count).hex()
    return [random[begin : begin + 32] for begin in range(0, len(random), 32)]
