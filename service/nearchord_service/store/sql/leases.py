"""The workers' side: claiming, renewing, progress, answers, and what happens to the jobs of lost workers.

Claims, renewals and progress do not wait for the disk: a power failure that undoes them has ended the workers too, and
their event numbers are not given again (see `engine`).
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from concurrent.futures import Future

from sqlalchemy import bindparam, text, update

from nearchord_service.model.answer import Answer
from nearchord_service.model.content import Bytes
from nearchord_service.model.event import Progress
from nearchord_service.model.job import Lease
from nearchord_service.model.stage import FINISH, Stage, Verdict, transition
from nearchord_service.store.port import LOST_WORKERS_ALLOWED, QueueFigures, Renewal
from nearchord_service.store.sql import moves
from nearchord_service.store.sql.content import bytes_at
from nearchord_service.store.sql.core import Core
from nearchord_service.store.sql.rows import answer_figures, job_from, moment, progress_figures
from nearchord_service.store.sql.schema import jobs
from nearchord_service.store.sql.statement import Connection, Row, Statement, word
from nearchord_service.store.sql.writer import Operation, Transaction

_SECOND = 1_000_000
_ROUND = 1000

_waiting = jobs.c.stage == word(Stage.WAITING)
_solving = jobs.c.stage == word(Stage.SOLVING)
_unstarted = jobs.c.attempt == 0
_NEXT = Statement(
    moves.JOB_ROWS.where(_waiting, ~_unstarted | jobs.c.not_after.is_(None) | (jobs.c.not_after > bindparam("now")))
    .order_by(jobs.c.priority.desc(), jobs.c.number)
    .limit(bindparam("most"))
    .with_for_update(of=jobs, skip_locked=True)
)
_BY_NUMBER = Statement(moves.JOB_ROWS.where(jobs.c.number == bindparam("number")))
_HELD = Statement(
    moves.JOB_ROWS.where(
        jobs.c.id == bindparam("id"), _solving, jobs.c.attempt == bindparam("attempt")
    ).with_for_update(of=jobs)
)
_RENEW = Statement(
    update(jobs)
    .where(
        jobs.c.id == bindparam("of_id"),
        _solving,
        jobs.c.attempt == bindparam("of_attempt"),
        jobs.c.lease_holder == bindparam("of_holder"),
    )
    .values(lease_until=bindparam("until"))
    .returning(jobs.c.cancel_requested)
)
_RUN_OUT = Statement(
    moves.JOB_ROWS.where(_solving, jobs.c.lease_until <= bindparam("now"))
    .order_by(jobs.c.lease_until)
    .limit(bindparam("most"))
    .with_for_update(of=jobs, skip_locked=True)
)
_OF_HOLDER = Statement(
    moves.JOB_ROWS.where(_solving, jobs.c.lease_holder == bindparam("holder"))
    .limit(bindparam("most"))
    .with_for_update(of=jobs)
)
_OVERDUE = Statement(
    moves.JOB_ROWS.where(_waiting, _unstarted, jobs.c.not_after.is_not(None), jobs.c.not_after <= bindparam("now"))
    .order_by(jobs.c.not_after)
    .limit(bindparam("most"))
    .with_for_update(of=jobs, skip_locked=True)
)
_RECORD = Statement(
    text(
        "INSERT INTO progress (job, batch, sequence, time, attempt, figures)"
        " VALUES (:job, :batch, :sequence, :time, :attempt, :figures)"
        " ON CONFLICT (job) DO UPDATE SET sequence = excluded.sequence, time = excluded.time,"
        " attempt = excluded.attempt, figures = excluded.figures"
    )
)
_LATEST = Statement(update(jobs).where(jobs.c.number == bindparam("of_number")).values(sequence=bindparam("event")))
_WAITING_FIGURES = Statement(
    text("SELECT count(*) AS jobs, min(created_at) AS oldest FROM jobs WHERE stage = 'WAITING'")
)
_SOLVING_FIGURES = Statement(text("SELECT count(*) AS jobs FROM jobs WHERE stage = 'SOLVING'"))


class Leases(Core):
    """See `port.LeaseStore`."""

    def claim(self, holder: str, limit: int, seconds: float) -> tuple[Lease, ...]:
        """Lease the next jobs of the queue."""

        def operation(transaction: Transaction) -> list[Row]:
            rows = transaction.all(_NEXT, now=transaction.now, most=limit)
            moves.claim(transaction, rows, holder, transaction.now + round(seconds * _SECOND))
            claimed = [transaction.one(_BY_NUMBER, number=row["number"]) for row in rows]
            return [row for row in claimed if row is not None]

        claimed = self._write(operation, lasting=False)
        if not claimed:
            return ()
        with self._reading() as connection:
            return tuple(self._lease(connection, row) for row in claimed)

    def _lease(self, connection: Connection, row: Row) -> Lease:
        weights = row["weights_address"]
        return Lease(
            job=job_from(row),
            attempt=row["attempt"],
            lost_workers=row["lost_workers"],
            until=moment(row["lease_until"]),
            graph=self._bytes(connection, row["graph_address"]),
            weights=None if weights is None else self._bytes(connection, weights),
        )

    def _bytes(self, connection: Connection, address: str) -> Bytes:
        return bytes_at(connection, self._disk, address)

    def renew(self, holder: str, leases: Iterable[tuple[str, int]], seconds: float) -> dict[tuple[str, int], Renewal]:
        """Extend leases."""
        wanted = tuple(leases)

        def operation(transaction: Transaction) -> dict[tuple[str, int], Renewal]:
            until = transaction.now + round(seconds * _SECOND)
            found = {}
            for job_id, attempt in wanted:
                row = transaction.one(_RENEW, of_id=job_id, of_attempt=attempt, of_holder=holder, until=until)
                found[job_id, attempt] = Renewal(row is not None, row is not None and bool(row["cancel_requested"]))
            return found

        return self._write(operation, lasting=False) if wanted else {}

    def record_progress(self, rows: Sequence[tuple[str, int, Progress]]) -> None:
        """Replace the progress of jobs whose attempts still hold them."""
        written = [(job_id, attempt, progress_figures(progress)) for job_id, attempt, progress in rows]

        def operation(transaction: Transaction) -> None:
            for job_id, attempt, figures in written:
                row = transaction.one(_HELD, id=job_id, attempt=attempt)
                if row is not None:
                    _record(transaction, row, figures)

        if written:
            self._write(operation, lasting=False)

    def finish(self, job_id: str, attempt: int, answer: Answer) -> Future[bool]:
        """Record an answer. ValueError for a verdict that no worker may give."""
        transition(FINISH.source, FINISH.target, answer.verdict)
        written = moves.WrittenAnswer(answer_figures(answer), b"".join(column.data for column in answer.columns))

        def operation(transaction: Transaction) -> bool:
            row = transaction.one(_HELD, id=job_id, attempt=attempt)
            if row is None:
                return False
            moves.end(transaction, [row], answer.verdict, answer.reason, answer=written)
            return True

        return self._enqueue(operation)

    def give_back(self, job_id: str, attempt: int, reason: str, *, worker_lost: bool) -> Future[bool]:
        """Return a job unanswered."""

        def operation(transaction: Transaction) -> bool:
            row = transaction.one(_HELD, id=job_id, attempt=attempt)
            if row is None:
                return False
            _take_back(transaction, row, reason, worker_lost=worker_lost)
            return True

        return self._enqueue(operation)

    def expire_leases(self) -> int:
        """Take back jobs whose lease has run out."""

        def operation(transaction: Transaction) -> int:
            rows = transaction.all(_RUN_OUT, now=transaction.now, most=_ROUND)
            for row in rows:
                reason = f"the lease of worker host {row['lease_holder']} ran out without an answer"
                _take_back(transaction, row, reason, worker_lost=True)
            return len(rows)

        return self._in_rounds(operation)

    def reclaim(self, holder: str) -> int:
        """Take back jobs that an earlier life of this server held."""

        def operation(transaction: Transaction) -> int:
            rows = transaction.all(_OF_HOLDER, holder=holder, most=_ROUND)
            for row in rows:
                _take_back(transaction, row, "the server was started again", worker_lost=False)
            return len(rows)

        return self._in_rounds(operation)

    def expire_overdue(self) -> int:
        """End jobs whose start-by time has passed."""

        def operation(transaction: Transaction) -> int:
            rows = transaction.all(_OVERDUE, now=transaction.now, most=_ROUND)
            for row in rows:
                reason = f"not started by {moment(row['not_after']).isoformat()}, its start-by time"
                moves.end(transaction, [row], Verdict.EXPIRED, reason)
            return len(rows)

        return self._in_rounds(operation)

    def _in_rounds(self, operation: Operation[int]) -> int:
        total = 0
        while count := self._write(operation):
            total += count
            if count < _ROUND:
                break
        return total

    def figures(self) -> QueueFigures:
        """Return the state of the queue."""
        with self._reading() as connection:
            waiting = connection.all(_WAITING_FIGURES)[0]
            solving = connection.all(_SOLVING_FIGURES)[0]
        oldest = waiting["oldest"]
        age = 0.0 if oldest is None else max(0.0, (self._now() - oldest) / _SECOND)
        return QueueFigures(waiting["jobs"], solving["jobs"], age)


def _record(transaction: Transaction, row: Row, figures: str) -> None:
    (number,) = transaction.take_numbers(1)
    transaction.run(
        _RECORD,
        job=row["number"],
        batch=row["batch"],
        sequence=number,
        time=transaction.now,
        attempt=row["attempt"],
        figures=figures,
    )
    transaction.run(_LATEST, of_number=row["number"], event=number)
    moves.tell(transaction, [row])


def _take_back(transaction: Transaction, row: Row, reason: str, *, worker_lost: bool) -> None:
    """Decide what becomes of a job whose attempt ended without an answer."""
    more = int(worker_lost)
    lost = row["lost_workers"] + more
    if row["cancel_requested"]:
        moves.end(transaction, [row], Verdict.CANCELLED, moves.WITHDRAWN, lost_more=more)
    elif lost >= LOST_WORKERS_ALLOWED:
        why = f"{reason}; this was worker {lost} of {LOST_WORKERS_ALLOWED} that the job may lose"
        moves.end(transaction, [row], Verdict.BROKEN, why, lost_more=more)
    else:
        moves.wait_again(transaction, row, reason, more)
