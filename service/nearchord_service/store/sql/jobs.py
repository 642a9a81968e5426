"""Jobs as their owners see them: submitting, looking, cancelling, reading answers, deleting."""

from __future__ import annotations

import datetime as dt

from sqlalchemy import bindparam, func, select, update

from nearchord_service.model.answer import Answer
from nearchord_service.model.errors import (
    BatchNotDone,
    FieldInvalid,
    FieldViolation,
    JobNotDone,
    JobUnknown,
    StoreUnavailable,
)
from nearchord_service.model.job import Batch, Job, Submission
from nearchord_service.model.stage import Stage, Verdict
from nearchord_service.store.port import Accepted, Limits
from nearchord_service.store.sql import moves
from nearchord_service.store.sql.deleting import delete_jobs
from nearchord_service.store.sql.events import batch_row
from nearchord_service.store.sql.listing import Listing
from nearchord_service.store.sql.rows import answer_from, batch_from, job_from, moment
from nearchord_service.store.sql.schema import answers, batches, jobs
from nearchord_service.store.sql.statement import Connection, Row, Statement
from nearchord_service.store.sql.submit import Intake, Landed
from nearchord_service.store.sql.writer import Transaction

_of_batch = (jobs.c.batch == bindparam("batch")) & jobs.c.batch.is_not(None)
_OWNED = Statement(moves.JOB_ROWS.where(jobs.c.id == bindparam("id"), jobs.c.owner == bindparam("owner")))
_BY_NUMBER = Statement(moves.JOB_ROWS.where(jobs.c.number == bindparam("number")))
_FIRST = Statement(moves.JOB_ROWS.where(_of_batch).order_by(jobs.c.batch_index).limit(1))
_BATCH = Statement(select(batches).where(batches.c.number == bindparam("number")))
_COUNTS = Statement(select(jobs.c.stage, func.count().label("jobs")).where(_of_batch).group_by(jobs.c.stage))
_IN_STAGE = Statement(moves.JOB_ROWS.where(_of_batch, jobs.c.stage == bindparam("stage")).order_by(jobs.c.number))
_ALL = Statement(select(jobs).where(_of_batch))
_ASK = Statement(update(jobs).where(jobs.c.number == bindparam("of_number")).values(cancel_requested=1))
_answered = moves.JOB_ROWS.add_columns(answers.c.figures, answers.c.columns).outerjoin(
    answers, answers.c.job == jobs.c.number
)
_ANSWER = Statement(_answered.where(jobs.c.id == bindparam("id"), jobs.c.owner == bindparam("owner")))
_ANSWERS = Statement(
    _answered.where(_of_batch, jobs.c.batch_index > bindparam("after"))
    .order_by(jobs.c.batch_index)
    .limit(bindparam("most"))
)


class Jobs(Listing):
    """See `port.JobStore`."""

    def submit(self, submission: Submission, limits: Limits) -> Accepted:
        """Accept jobs, or find those of the same request."""
        if not submission.specs:
            raise FieldInvalid(FieldViolation("spec", "a submission needs at least one job; add one"))
        intake = Intake(submission, limits, self._disk)
        try:
            return self._write(lambda transaction: _accepted(transaction, intake(transaction)))
        except StoreUnavailable:
            raise  # a failed commit may yet come back with the log: only the next start knows whether files are needed
        except BaseException:
            intake.abandon()
            raise

    def job(self, owner: str, job_id: str) -> Job:
        """Return a job."""
        with self._reading() as connection:
            return job_from(_owned(connection, owner, job_id))

    def batch(self, owner: str, batch_id: str) -> Batch:
        """Return a batch."""
        with self._reading() as connection:
            return _batch(connection, batch_row(connection, owner, batch_id))

    def cancel_job(self, owner: str, job_id: str) -> Job:
        """Withdraw a job, or ask its worker to."""

        def operation(transaction: Transaction) -> Row:
            row = _owned(transaction, owner, job_id)
            if row["stage"] == Stage.WAITING:
                _withdraw(transaction, [row])
            elif row["stage"] == Stage.SOLVING:
                _ask(transaction, [row])
            return _owned(transaction, owner, job_id)

        return job_from(self._write(operation))

    def cancel_batch(self, owner: str, batch_id: str) -> Batch:
        """Withdraw the jobs of a batch, or ask their workers to."""

        def operation(transaction: Transaction) -> Batch:
            row = batch_row(transaction, owner, batch_id)
            _withdraw(transaction, transaction.all(_IN_STAGE, batch=row["number"], stage=Stage.WAITING))
            _ask(transaction, transaction.all(_IN_STAGE, batch=row["number"], stage=Stage.SOLVING))
            return _batch(transaction, row)

        return self._write(operation)

    def answer(self, owner: str, job_id: str) -> tuple[Job, Answer]:
        """Return a job with its answer."""
        with self._reading() as connection:
            row = connection.one(_ANSWER, id=job_id, owner=owner)
        if row is None:
            raise JobUnknown(job_id)
        answer = answer_from(row)
        if answer is None:
            raise JobNotDone(job_id)
        return job_from(row), answer

    def batch_answers(
        self, owner: str, batch_id: str, after_index: int, limit: int
    ) -> tuple[tuple[Job, Answer | None], ...]:
        """Return jobs of a batch with their answers."""
        with self._reading() as connection:
            number = batch_row(connection, owner, batch_id)["number"]
            rows = connection.all(_ANSWERS, batch=number, after=after_index, most=limit)
        return tuple((job_from(row), answer_from(row)) for row in rows)

    def delete_job(self, owner: str, job_id: str) -> dt.datetime:
        """Delete a job; returns when."""

        def operation(transaction: Transaction) -> dt.datetime:
            row = _owned(transaction, owner, job_id)
            if row["stage"] != Stage.DONE:
                raise JobNotDone(job_id)
            delete_jobs(transaction, [row])
            moves.tell(transaction, [row])
            return moment(transaction.now)

        return self._write(operation)

    def delete_batch(self, owner: str, batch_id: str) -> dt.datetime:
        """Delete a batch; returns when."""

        def operation(transaction: Transaction) -> dt.datetime:
            batch = batch_row(transaction, owner, batch_id)
            rows = transaction.all(_ALL, batch=batch["number"])
            if any(row["stage"] != Stage.DONE for row in rows):
                raise BatchNotDone(batch_id)
            delete_jobs(transaction, rows)
            transaction.news.job_ids.update(row["id"] for row in rows)
            transaction.news.batch_ids.add(batch_id)
            return moment(transaction.now)

        return self._write(operation)


def _accepted(transaction: Transaction, landed: Landed) -> Accepted:
    if landed.batch is None:
        (job,) = transaction.all(_BY_NUMBER, number=landed.job)
        return Accepted(None, job_from(job), landed.repeated)
    (batch,) = transaction.all(_BATCH, number=landed.batch)
    (first,) = transaction.all(_FIRST, batch=landed.batch)
    return Accepted(_batch(transaction, batch), job_from(first), landed.repeated)


def _owned(connection: Connection, owner: str, job_id: str) -> Row:
    row = connection.one(_OWNED, id=job_id, owner=owner)
    if row is None:
        raise JobUnknown(job_id)
    return row


def _batch(connection: Connection, row: Row) -> Batch:
    return batch_from(row, connection.all(_COUNTS, batch=row["number"]))


def _withdraw(transaction: Transaction, rows: list[Row]) -> None:
    _mark(transaction, rows)
    moves.end(transaction, rows, Verdict.CANCELLED, moves.WITHDRAWN)


def _ask(transaction: Transaction, rows: list[Row]) -> None:
    """Mark SOLVING jobs; their workers hear of it by hint or at their next heartbeat."""
    _mark(transaction, rows)
    transaction.news.cancels.update(row["id"] for row in rows)


def _mark(transaction: Transaction, rows: list[Row]) -> None:
    transaction.run_many(_ASK, [{"of_number": row["number"]} for row in rows])
