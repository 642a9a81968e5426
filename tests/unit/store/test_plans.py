"""Statements on the way of every job are answered by their indexes, also the partial ones, however long the queue."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator
from pathlib import Path

import pytest
from nearchord_service.store.sql import SqlStore, content, deleting, events, jobs, leases, listing, moves, retention
from nearchord_service.store.sql.statement import Statement

INDEXED = {
    "next": (leases._NEXT, "INDEX jobs_queue"),
    "held": (leases._HELD, "INDEX jobs_id"),
    "leases that ran out": (leases._RUN_OUT, "INDEX jobs_leased"),
    "leases of a holder": (leases._OF_HOLDER, "INDEX jobs_leased"),
    "overdue": (leases._OVERDUE, "INDEX jobs_overdue"),
    "waiting figures": (leases._WAITING_FIGURES, "INDEX jobs_queue"),
    "claim": (moves._CLAIM, "PRIMARY KEY"),
    "counts of a batch": (jobs._COUNTS, "COVERING INDEX jobs_stages_of_batch"),
    "answers of a batch": (jobs._ANSWERS, "INDEX jobs_of_batch"),
    "events of a job": (events._OF_JOB[0], "INDEX events_job"),
    "events of a batch": (events._OF_BATCH[0], "INDEX events_batch"),
    "progress of a batch": (events._OF_BATCH[1], "INDEX progress_batch"),
    "list": (listing._statement(False, False, False, True), "INDEX jobs_owner"),
    "list of a batch": (listing._statement(True, False, False, True), "INDEX jobs_of_batch"),
    "list by label": (listing._statement(False, True, False, True), "INDEX jobs_label"),
    "needed content": (content._FORGET, "INDEX jobs_weights_needed"),
    "bytes of answers": (retention._ANSWER_BYTES, "COVERING INDEX jobs_ended"),
    "longest ended": (retention._OLDEST, "COVERING INDEX jobs_ended"),
    "untrimmed": (retention._UNTRIMMED, "COVERING INDEX jobs_ended"),
    "empty batch": (deleting._EMPTY_BATCH, "INDEX jobs_"),
}


@pytest.fixture(scope="module")
def store(tmp_path_factory: pytest.TempPathFactory) -> Iterator[SqlStore]:
    opened = SqlStore(Path(tmp_path_factory.mktemp("plans")))
    opened.start()
    yield opened
    opened.stop()


@pytest.mark.parametrize("name", sorted(INDEXED))
def test_statement_uses_its_index_and_sorts_nothing(store: SqlStore, name: str) -> None:
    statement, wanted = INDEXED[name]
    plan = explain(store, statement)
    assert any(wanted in step for step in plan), plan
    assert not any("TEMP B-TREE" in step for step in plan), plan
    bare = [step for step in plan if step.startswith("SCAN") and "INDEX" not in step and "CONSTANT" not in step]
    assert bare == []


def explain(store: SqlStore, statement: Statement) -> list[str]:
    with store._reading() as connection:
        sql, own = statement.compiled(connection.dialect)
        connection.cursor.execute("EXPLAIN QUERY PLAN " + sql, defaultdict(lambda: 1, own))
        return [row["detail"] for row in connection.cursor.fetchall()]
