"""`nearchord watch`: the numbered events of a job or a batch, as they come."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from dataclasses import asdict
from typing import Any

import click

import nearchord
from nearchord.cli import options
from nearchord.cli.connection import STANDARD_SERVER, detaching, remote
from nearchord.cli.exits import of_verdicts
from nearchord.cli.layout import print_json
from nearchord.cli.progress import BatchDisplay, Display, JobDisplay, follow_load


@click.command(short_help="Follow a job or a batch until it ends.")
@click.argument("identity", metavar="JOB")
@options.whole_batch
@click.option("--after", type=click.IntRange(min=0), default=0, metavar="N", help="Only events numbered above N.")
@options.server
@options.as_json
def watch(identity: str, is_batch: bool, after: int, server: str | None, as_json: bool) -> int:
    """Follow the job JOB, or with --batch a whole batch, until it ends.

    Prints a line for each stage that is reached; with --json one object for each event, progress included. The exit
    code is that of the verdict.
    """
    verdicts = []
    with remote(server) as service:
        stream, display = _stream(service, identity, is_batch, after)
        with display, detaching("batch" if is_batch else "job", identity, server or STANDARD_SERVER):
            follow_load(service, display)
            for event in stream:
                display.event(event)
                _print(event, display, is_batch, as_json)
                if event.verdict is not None:
                    verdicts.append(event.verdict)
    return of_verdicts(verdicts)


def _stream(
    service: nearchord.Service, identity: str, is_batch: bool, after: int
) -> tuple[Iterator[nearchord.Event], JobDisplay | BatchDisplay]:
    if is_batch:
        batch = service.batch(identity)
        return batch.watch(after=after), BatchDisplay(batch.info().jobs)
    return service.job(identity).watch(after=after), JobDisplay()


def _print(event: nearchord.Event, display: Display, is_batch: bool, as_json: bool) -> None:
    if as_json:
        with display.aside():
            print_json(_record(event))
    elif event.stage is not None:
        with display.aside():
            sys.stdout.write(_line(event, is_batch) + "\n")
            sys.stdout.flush()


def _line(event: nearchord.Event, is_batch: bool) -> str:
    words = [str(event.sequence), event.time.strftime("%H:%M:%SZ") if event.time else "-"]
    if is_batch:
        words.append(f"job {event.batch_index} ({event.job_id})")
    words.append(str(event.stage))
    if event.stage is nearchord.Stage.SOLVING:
        words.append(f"attempt {event.attempt}")
    if event.verdict is not None:
        words.append(str(event.verdict))
    return "  ".join(words) + (f": {event.reason}" if event.reason else "")


def _record(event: nearchord.Event) -> dict[str, Any]:
    progress = event.progress
    return {
        "sequence": event.sequence,
        "job": event.job_id,
        "batch_index": event.batch_index,
        "time": None if event.time is None else event.time.isoformat(),
        "attempt": event.attempt,
        "stage": None if event.stage is None else str(event.stage),
        "verdict": None if event.verdict is None else str(event.verdict),
        "reason": event.reason,
        "progress": None if progress is None else {**asdict(progress), "phase": str(progress.phase or "").lower()},
    }
