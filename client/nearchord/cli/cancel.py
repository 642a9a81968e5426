"""`nearchord cancel`: withdraw a job or a batch."""

from __future__ import annotations

import sys

import click

import nearchord
from nearchord.cli import options
from nearchord.cli.connection import remote
from nearchord.cli.exits import Exit


@click.command(short_help="Withdraw a job or a batch.")
@click.argument("identity", metavar="JOB")
@options.whole_batch
@options.server
def cancel(identity: str, is_batch: bool, server: str | None) -> int:
    """Withdraw the job JOB, or with --batch every job of a batch.

    A job that has ended stays as it is. Asking twice does no harm.
    """
    with remote(server) as service:
        if is_batch:
            info = service.batch(identity).cancel()
            sys.stdout.write(f"batch {identity}: cancel recorded; {info.done:,} of {info.jobs:,} jobs are DONE\n")
        else:
            sys.stdout.write(f"job {identity}: {_standing(service.job(identity).cancel())}\n")
    return Exit.ANSWERED


def _standing(info: nearchord.JobInfo) -> str:
    if info.verdict is not None:
        return f"{info.stage} {info.verdict} ({info.reason})"
    return f"cancel recorded; {info.stage} until its worker has stopped"
