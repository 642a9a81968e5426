"""Reading events: transitions and the latest progress, merged by number.

Both tables are read in one snapshot, and numbers become visible in order, so a reader that goes on from the last number
it got misses no transition.
"""

from __future__ import annotations

from sqlalchemy import Select, Table, bindparam, select

from nearchord_service.model.errors import BatchUnknown, JobUnknown
from nearchord_service.model.event import Event
from nearchord_service.store.sql.core import Core
from nearchord_service.store.sql.rows import progress_event, transition_event
from nearchord_service.store.sql.schema import batches, events, jobs, progress
from nearchord_service.store.sql.statement import Connection, Row, Statement


def _after(table: Table, owned_by: str) -> Statement:
    """Return the rows of a job or a batch (the column that `owned_by` names) after a number, ascending."""
    rows: Select[tuple[object, ...]] = select(table, jobs.c.id, jobs.c.batch_index).select_from(
        table.join(jobs, jobs.c.number == table.c.job)
    )
    rows = rows.where(table.c[owned_by] == bindparam("number"), table.c.sequence > bindparam("after"))
    return Statement(rows.order_by(table.c.sequence).limit(bindparam("most")))


_OF_JOB = (_after(events, "job"), _after(progress, "job"))
_OF_BATCH = (_after(events, "batch"), _after(progress, "batch"))
JOB_NUMBER = Statement(select(jobs.c.number).where(jobs.c.id == bindparam("id"), jobs.c.owner == bindparam("owner")))
BATCH = Statement(select(batches).where(batches.c.id == bindparam("id"), batches.c.owner == bindparam("owner")))


def batch_row(connection: Connection, owner: str, batch_id: str) -> Row:
    """Return the row of an owner's batch; raises BatchUnknown."""
    row = connection.one(BATCH, id=batch_id, owner=owner)
    if row is None:
        raise BatchUnknown(batch_id)
    return row


class Events(Core):
    """The part of `port.JobStore` that reads events."""

    def job_events(self, owner: str, job_id: str, after: int, limit: int) -> tuple[Event, ...]:
        """Return events of a job."""
        with self._reading() as connection:
            row = connection.one(JOB_NUMBER, id=job_id, owner=owner)
            if row is None:
                raise JobUnknown(job_id)
            return _merged(connection, _OF_JOB, row["number"], after, limit)

    def batch_events(self, owner: str, batch_id: str, after: int, limit: int) -> tuple[Event, ...]:
        """Return events of the jobs of a batch."""
        with self._reading() as connection:
            number = batch_row(connection, owner, batch_id)["number"]
            return _merged(connection, _OF_BATCH, number, after, limit)


def _merged(
    connection: Connection, statements: tuple[Statement, Statement], number: int, after: int, limit: int
) -> tuple[Event, ...]:
    reached, went_on = (connection.all(each, number=number, after=after, most=limit) for each in statements)
    found = [transition_event(row) for row in reached] + [progress_event(row) for row in went_on]
    found.sort(key=lambda event: event.sequence)
    return tuple(found[:limit])
