"""Waiting for a job with its progress in sight."""

from __future__ import annotations

import threading
from collections.abc import Iterator

import nearchord
from nearchord.cli.progress import BatchDisplay, JobDisplay, follow_load


def follow(service: nearchord.Service, job: nearchord.Job, display: JobDisplay) -> nearchord.Answer:
    """Show the job's progress until it ends; return its answer."""
    if display.shown:
        follow_load(service, display)
        for event in job.watch():
            display.event(event)
    return job.answer()


def follow_batch(
    service: nearchord.Service, batch: nearchord.Batch, display: BatchDisplay
) -> Iterator[nearchord.Answer]:
    """Show how the batch goes on while yielding its answers by position, each as soon as those before it are there."""

    def count() -> None:
        try:
            for event in batch.watch():
                display.event(event)
        except nearchord.NearchordError:
            return  # decoration only: the answers' own stream tells of a lost connection

    if display.shown:
        follow_load(service, display)
        threading.Thread(target=count, name="nearchord-batch", daemon=True).start()
    yield from batch.answers(wait=True)
