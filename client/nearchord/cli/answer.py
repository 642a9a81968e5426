"""`nearchord answer`: what a job, or every job of a batch, came to."""

from __future__ import annotations

from collections.abc import Iterable

import click

import nearchord
from nearchord.cli import options
from nearchord.cli.connection import STANDARD_SERVER, detaching, remote
from nearchord.cli.exits import of_verdicts
from nearchord.cli.follow import follow, follow_batch
from nearchord.cli.layout import print_json, print_table
from nearchord.cli.numbers import exact
from nearchord.cli.progress import BatchDisplay, JobDisplay
from nearchord.cli.record import record, show
from nearchord.cli.subject import Subject


@click.command(short_help="Print the answer of a job or a batch.")
@click.argument("identity", metavar="JOB")
@options.whole_batch
@click.option("--no-wait", is_flag=True, help="Fail, with exit code 1, when the job has not ended.")
@options.server
@options.as_json
def answer(identity: str, is_batch: bool, no_wait: bool, server: str | None, as_json: bool) -> int:
    """Print the answer of the job JOB once it has ended, or with --batch the answers of a whole batch.

    With --json the object that `solve --json` prints; for a batch one object a line.
    """
    with remote(server) as service, detaching("batch" if is_batch else "job", identity, server or STANDARD_SERVER):
        if is_batch:
            return _of_batch(service, identity, no_wait, as_json)
        return _of_job(service, identity, no_wait, as_json)


def _of_job(service: nearchord.Service, identity: str, no_wait: bool, as_json: bool) -> int:
    job = service.job(identity)
    if no_wait and not job.done():
        raise nearchord.NotReady(f"job {identity} has not ended; leave out --no-wait to wait for it")
    with JobDisplay() as display:
        found = follow(service, job, display)
        about = stored_subject(service, found)
    if as_json:
        print_json(record(found, about))
    else:
        show(found, about)
    return of_verdicts([found.verdict])


def _of_batch(service: nearchord.Service, identity: str, no_wait: bool, as_json: bool) -> int:
    batch = service.batch(identity)
    info = batch.info()
    if no_wait and info.done < info.jobs:
        raise nearchord.NotReady(
            f"{info.jobs - info.done:,} of {info.jobs:,} jobs of batch {identity} have not ended; "
            "leave out --no-wait to wait for them"
        )
    with BatchDisplay(info.jobs) as display:
        found = follow_batch(service, batch, display)
        if as_json:
            verdicts = []
            for each in found:
                verdicts.append(each.verdict)
                with display.aside():
                    print_json(record(each, stored_subject(service, each)))
            return of_verdicts(verdicts)
        answers = list(found)
    _show_all(answers)
    return of_verdicts([each.verdict for each in answers])


def stored_subject(service: nearchord.Service, found: nearchord.Answer) -> Subject:
    """What the answer is about: the names that the job carried, and the edges where the answer speaks of edges."""
    names = service.names(found.names_address) if found.names_address else None
    if not found.conflict_price.size:
        return Subject(names)
    return Subject(names, service.graph(found.provenance.graph_address))


def _show_all(answers: Iterable[nearchord.Answer]) -> None:
    rows = [
        (each.label or each.job_id, str(each.verdict), str(exact(each.value) or ""), str(exact(each.bound) or ""))
        for each in answers
    ]
    print_table(("job", "verdict", "value", "bound"), rows, flexible="job", numbers=frozenset({"value", "bound"}))
