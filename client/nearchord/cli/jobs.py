"""`nearchord jobs`: what the service holds for this caller."""

from __future__ import annotations

import datetime as dt
from itertools import islice
from typing import Any

import click

import nearchord
from nearchord.cli import options
from nearchord.cli.connection import remote
from nearchord.cli.exits import Exit
from nearchord.cli.layout import print_json, print_table

HEADINGS = ("job", "question", "stage", "verdict", "label")


@click.command(short_help="List jobs.")
@click.option("--batch", metavar="BATCH", help="Only jobs of this batch.")
@click.option("--label", help="Only jobs with exactly this label.")
@click.option("--stage", type=click.Choice([str(stage) for stage in nearchord.Stage]), help="Only jobs in this stage.")
@click.option("--first", type=click.IntRange(min=1), metavar="N", help="Only the first N of the list.")
@options.server
@options.as_json
def jobs(
    batch: str | None, label: str | None, stage: str | None, first: int | None, server: str | None, as_json: bool
) -> int:
    """List jobs, latest first, or by position within a batch.

    With --json one object a line: job, question, stage, verdict, label and more.
    """
    with remote(server) as service:
        listed = islice(service.jobs(batch=batch, label=label, stage=nearchord.Stage(stage) if stage else None), first)
        if as_json:
            for info in listed:
                print_json(_record(info))
        else:
            print_table(HEADINGS, [_row(info) for info in listed], flexible="label")
    return Exit.ANSWERED


def _row(info: nearchord.JobInfo) -> tuple[str, ...]:
    return info.id, info.question.name, str(info.stage), str(info.verdict or ""), info.label


def _record(info: nearchord.JobInfo) -> dict[str, Any]:
    return {
        "job": info.id,
        "question": info.question.name,
        "stage": str(info.stage),
        "verdict": None if info.verdict is None else str(info.verdict),
        "label": info.label,
        "batch": info.batch_id or None,
        "batch_index": info.batch_index if info.batch_id else None,
        "vertices": info.vertices,
        "edges": info.edges,
        "reason": info.reason,
        "attempt": info.attempt,
        "priority": info.priority,
        "cancel_requested": info.cancel_requested,
        "created_at": _moment(info.created_at),
        "started_at": _moment(info.started_at),
        "finished_at": _moment(info.finished_at),
    }


def _moment(moment: dt.datetime | None) -> str | None:
    return None if moment is None else moment.isoformat()
