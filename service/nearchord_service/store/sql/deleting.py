"""Deleting DONE jobs with everything that belongs to them, and their batch with the last of them."""

from __future__ import annotations

from collections.abc import Sequence

from sqlalchemy import BindParameter, bindparam, delete, exists, select

from nearchord_service.store.sql.schema import answers, batches, events, jobs, requests
from nearchord_service.store.sql.statement import Row, Statement
from nearchord_service.store.sql.writer import Transaction

_job: BindParameter[int] = bindparam("job")
_OF_JOB = tuple(
    Statement(clause)
    for clause in (
        delete(events).where(events.c.job == _job),
        delete(answers).where(answers.c.job == _job),
        delete(jobs).where(jobs.c.number == _job),
    )
)
_REQUEST = Statement(
    delete(requests).where(requests.c.owner == bindparam("owner"), requests.c.request_id == bindparam("request_id"))
)
_left = exists(select(jobs.c.number).where(jobs.c.batch == bindparam("batch")))
_EMPTY_BATCH = Statement(select(batches).where(batches.c.number == bindparam("batch"), ~_left))
_BATCH = Statement(delete(batches).where(batches.c.number == bindparam("batch")))


def delete_jobs(transaction: Transaction, rows: Sequence[Row]) -> None:
    """Delete the DONE jobs of these rows of `jobs`. Their request ids may be used again."""
    for statement in _OF_JOB:
        transaction.run_many(statement, [{"job": row["number"]} for row in rows])
    alone = [row for row in rows if row["request_id"] is not None]
    transaction.run_many(_REQUEST, [{"owner": row["owner"], "request_id": row["request_id"]} for row in alone])
    for batch in {row["batch"] for row in rows if row["batch"] is not None}:
        empty = transaction.one(_EMPTY_BATCH, batch=batch)
        if empty is not None:
            transaction.run(_REQUEST, owner=empty["owner"], request_id=empty["request_id"])
            transaction.run(_BATCH, batch=batch)
