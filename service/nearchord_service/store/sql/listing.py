"""Listing jobs page by page. A page begins after a row, not at a count, so jobs that arrive meanwhile shift nothing."""

from __future__ import annotations

import base64
import binascii
import hashlib
from functools import cache

from sqlalchemy import bindparam

from nearchord_service.model.errors import FieldInvalid, FieldViolation
from nearchord_service.model.job import Page
from nearchord_service.store.port import Query
from nearchord_service.store.sql.events import Events, batch_row
from nearchord_service.store.sql.moves import JOB_ROWS
from nearchord_service.store.sql.rows import job_from
from nearchord_service.store.sql.schema import jobs
from nearchord_service.store.sql.statement import Statement, word

_MARK_BYTES = 8


@cache
def _statement(of_batch: bool, labelled: bool, staged: bool, onwards: bool) -> Statement:
    rows = JOB_ROWS.where(jobs.c.owner == bindparam("owner"))
    if of_batch:
        rows = rows.where(jobs.c.batch == bindparam("batch"), jobs.c.batch.is_not(None)).order_by(jobs.c.batch_index)
    else:
        rows = rows.order_by(jobs.c.number.desc())
    if labelled:
        rows = rows.where(jobs.c.label == bindparam("label"), jobs.c.label != word(""))
    if staged:
        rows = rows.where(jobs.c.stage == bindparam("stage"))
    if onwards:
        after = jobs.c.batch_index > bindparam("last") if of_batch else jobs.c.number < bindparam("last")
        rows = rows.where(after)
    return Statement(rows.limit(bindparam("most")))


class Listing(Events):
    """The part of `port.JobStore` that lists."""

    def jobs(self, owner: str, query: Query) -> Page:
        """Return a page of jobs."""
        mark = _mark(owner, query)
        last = None if query.page_token is None else _read(query.page_token, mark)
        statement = _statement(query.batch_id is not None, bool(query.label), query.stage is not None, last is not None)
        with self._reading() as connection:
            batch = None if query.batch_id is None else batch_row(connection, owner, query.batch_id)["number"]
            rows = connection.all(
                statement,
                owner=owner,
                batch=batch,
                label=query.label,
                stage=query.stage,
                last=last,
                most=query.page_size + 1,
            )
        shown = rows[: query.page_size]
        token = None
        if len(rows) > len(shown):
            token = _write(mark, shown[-1]["number" if query.batch_id is None else "batch_index"])
        return Page(tuple(job_from(row) for row in shown), token)


def _mark(owner: str, query: Query) -> bytes:
    """Return what ties a token to its query; the page size may change on the way."""
    text = "\0".join((owner, query.batch_id or "", query.label, query.stage or ""))
    return hashlib.sha256(text.encode()).digest()[:_MARK_BYTES]


def _write(mark: bytes, last: int) -> str:
    return base64.urlsafe_b64encode(mark + last.to_bytes(8, "big")).decode()


def _read(token: str, mark: bytes) -> int:
    try:
        raw = base64.b64decode(token, altchars=b"-_", validate=True)
    except (binascii.Error, ValueError):
        raw = b""
    if len(raw) != _MARK_BYTES + 8 or raw[:_MARK_BYTES] != mark:
        raise FieldInvalid(
            FieldViolation(
                "page_token", "not a token of this query; repeat the query that gave it, or start without one"
            )
        )
    return int.from_bytes(raw[_MARK_BYTES:], "big")
