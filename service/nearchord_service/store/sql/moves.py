"""Moving jobs from stage to stage: the only place that writes `stage`, always with the event row of the move.

Every move is looked up in the model's table first. The update names the stage and the attempt it expects, so that a
move that lost a race touches no row.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from sqlalchemy import bindparam, delete, insert, null, select, update

from nearchord_service.model.stage import Stage, Verdict, transition
from nearchord_service.store.sql.rows import question_name
from nearchord_service.store.sql.schema import answers, batches, events, jobs, progress, usage
from nearchord_service.store.sql.statement import Row, Statement, word
from nearchord_service.store.sql.writer import Transaction

JOB_ROWS = select(jobs, batches.c.id.label("batch_id")).select_from(
    jobs.outerjoin(batches, batches.c.number == jobs.c.batch)
)
"""Rows that `rows.job_from` reads and that moves begin from."""

WITHDRAWN = "withdrawn by the client"
INSERT_EVENT = Statement(insert(events))
_INSERT_ANSWER = Statement(insert(answers))
_DROP_PROGRESS = Statement(delete(progress).where(progress.c.job == bindparam("job")))
_USE = Statement(
    update(usage)
    .where(usage.c.owner == bindparam("whose"))
    .values(unfinished_jobs=usage.c.unfinished_jobs + bindparam("jobs_more"))
)

_EXPECTED = (
    (jobs.c.number == bindparam("of_number"))
    & (jobs.c.stage == bindparam("of_stage"))
    & (jobs.c.attempt == bindparam("of_attempt"))
)
_CLAIM = Statement(
    update(jobs)
    .where(_EXPECTED)
    .values(
        stage=word(Stage.SOLVING),
        attempt=jobs.c.attempt + 1,
        started_at=bindparam("now"),
        lease_holder=bindparam("holder"),
        lease_until=bindparam("until"),
        lost_workers=bindparam("lost"),
        reason=bindparam("why"),
        sequence=bindparam("event"),
    )
)
_WAIT_AGAIN = Statement(
    update(jobs)
    .where(_EXPECTED)
    .values(
        stage=word(Stage.WAITING),
        lost_workers=bindparam("lost"),
        lease_holder=null(),
        lease_until=null(),
        reason=bindparam("why"),
        sequence=bindparam("event"),
    )
)
_END = Statement(
    update(jobs)
    .where(_EXPECTED)
    .values(
        stage=word(Stage.DONE),
        verdict=bindparam("how"),
        lost_workers=bindparam("lost"),
        lease_holder=null(),
        lease_until=null(),
        finished_at=bindparam("now"),
        answer_bytes=bindparam("recorded"),
        reason=bindparam("why"),
        sequence=bindparam("event"),
    )
)


@dataclass(frozen=True)
class WrittenAnswer:
    """An answer as it goes into its row."""

    figures: str
    columns: bytes

    @property
    def size(self) -> int:
        """Bytes it takes."""
        return len(self.figures.encode()) + len(self.columns)


def claim(transaction: Transaction, rows: Sequence[Row], holder: str, until: int) -> None:
    """Take WAITING jobs under their next attempts."""
    extra = {"now": transaction.now, "holder": holder, "until": until}
    _move(transaction, _CLAIM, rows, Stage.SOLVING, None, "taken up by a worker", extra, attempt_more=1)


def wait_again(transaction: Transaction, row: Row, reason: str, lost_more: int) -> None:
    """Send a SOLVING job back to the queue."""
    _move(transaction, _WAIT_AGAIN, [row], Stage.WAITING, None, reason, {}, lost_more=lost_more)
    transaction.run(_DROP_PROGRESS, job=row["number"])
    transaction.news.work = True


def end(
    transaction: Transaction,
    rows: Sequence[Row],
    verdict: Verdict,
    reason: str,
    *,
    lost_more: int = 0,
    answer: WrittenAnswer | None = None,
) -> None:
    """End jobs of one owner; `answer` is for a single one."""
    recorded = 0 if answer is None else answer.size
    extra = {"how": verdict, "now": transaction.now, "recorded": recorded}
    _move(transaction, _END, rows, Stage.DONE, verdict, reason, extra, lost_more=lost_more)
    if answer is not None:
        (row,) = rows
        transaction.run(_INSERT_ANSWER, job=row["number"], figures=answer.figures, columns=answer.columns)
    transaction.run_many(_DROP_PROGRESS, [{"job": row["number"]} for row in rows if row["attempt"]])
    transaction.news.ended += [(question_name(row), verdict) for row in rows]
    if rows:
        transaction.run(_USE, whose=rows[0]["owner"], jobs_more=-len(rows))


def _move(
    transaction: Transaction,
    statement: Statement,
    rows: Sequence[Row],
    target: Stage,
    verdict: Verdict | None,
    reason: str,
    extra: dict[str, Any],
    *,
    attempt_more: int = 0,
    lost_more: int = 0,
) -> None:
    for stage in {row["stage"] for row in rows}:
        transition(Stage(stage), target, verdict)
    numbers = transaction.take_numbers(len(rows)) if rows else range(0)
    common = {**extra, "why": reason}
    touched = transaction.run_many(
        statement,
        [
            {
                **common,
                "of_number": row["number"],
                "of_stage": row["stage"],
                "of_attempt": row["attempt"],
                "lost": row["lost_workers"] + lost_more,
                "event": number,
            }
            for row, number in zip(rows, numbers, strict=True)
        ],
    )
    if touched != len(rows):
        raise RuntimeError(f"{len(rows)} jobs were to become {target}, {touched} were where they were expected")
    transaction.run_many(
        INSERT_EVENT,
        [
            {
                "sequence": number,
                "job": row["number"],
                "batch": row["batch"],
                "time": transaction.now,
                "attempt": row["attempt"] + attempt_more,
                "stage": target,
                "verdict": verdict,
                "reason": reason,
            }
            for row, number in zip(rows, numbers, strict=True)
        ],
    )
    tell(transaction, rows)


def tell(transaction: Transaction, rows: Sequence[Row]) -> None:
    """Put jobs and their batches into the hint that goes out after the commit."""
    transaction.news.job_ids.update(row["id"] for row in rows)
    transaction.news.batch_ids.update(row["batch_id"] for row in rows if row["batch_id"] is not None)
