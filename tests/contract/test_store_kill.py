"""Killing the process in the middle of its commits: what was confirmed is there, what is there is whole."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest
from contract.stores import ANN, LIMITS, Home, answer, submission
from nearchord_service.model.event import Reached
from nearchord_service.model.job import Job
from nearchord_service.model.stage import Stage, transition
from nearchord_service.store.port import Query, Store

ROUNDS = 4
VICTIM = Path(__file__).with_name("store_victim.py")


def run_and_kill(home: Home, life: str, confirmations: int) -> list[list[str]]:
    """Let the process confirm so many things, kill it, and return all that it confirmed."""
    path = os.pathsep.join(part for part in sys.path if part)
    victim = subprocess.Popen(
        [sys.executable, str(VICTIM), home.kind, str(home.place), life],
        stdout=subprocess.PIPE,
        env={**os.environ, "PYTHONPATH": path},
        text=True,
    )
    assert victim.stdout is not None
    with victim.stdout as lines:
        confirmed = [next(lines) for _ in range(confirmations)]
        victim.kill()
        confirmed += list(lines)
    victim.wait()
    return [line.split() for line in confirmed if line.endswith("\n")]


def all_jobs(store: Store) -> list[Job]:
    jobs, token = [], None
    while True:
        page = store.jobs(ANN, Query(page_size=1000, page_token=token))
        jobs += page.jobs
        if (token := page.next_token) is None:
            return jobs


def check_confirmed(store: Store, confirmed: list[list[str]]) -> None:
    for what, *names in confirmed:
        if what == "accepted":
            request = submission(request_id=names[0], fingerprint=b"same", batch=True)
            accepted = store.submit(request, LIMITS)
            assert accepted.repeated
            assert accepted.batch is not None
            assert (accepted.batch.id, accepted.batch.jobs) == (names[1], 4)
        elif what == "stored":
            place = store.content_bytes(ANN, names[0])
            assert place.path is not None
            assert place.path.stat().st_size == store.content(ANN, names[0]).size_bytes
        else:
            job, found = store.answer(ANN, names[0])
            assert (job.stage, found) == (Stage.DONE, answer())


def check_whole(store: Store) -> None:
    jobs = all_jobs(store)
    numbers = []
    for job in jobs:
        events = store.job_events(ANN, job.id, 0, 99)
        news = [event.news for event in events if isinstance(event.news, Reached)]
        for before, after in zip([None, *(reached.stage for reached in news)], news, strict=False):
            transition(before, after.stage, after.verdict)
        assert (news[-1].stage, news[-1].verdict) == (job.stage, job.verdict)
        assert [n.stage for n in news].count(Stage.DONE) == (job.stage is Stage.DONE)
        assert events[-1].sequence == job.sequence
        numbers += [event.sequence for event in events]
        assert store.content(ANN, job.graph_address)
    assert len(set(numbers)) == len(numbers)
    batches = {job.batch_id for job in jobs if job.batch_id}
    assert all(store.batch(ANN, batch).jobs == 4 for batch in batches)


@pytest.mark.fault
def test_killed_store_keeps_what_it_confirmed(home: Home) -> None:
    confirmed: list[list[str]] = []
    for life in range(ROUNDS):
        confirmed += run_and_kill(home, str(life), 17 + 23 * life)
        store = home.open()
        check_confirmed(store, confirmed)
        check_whole(store)
        home.close()
    assert {line[0] for line in confirmed} == {"accepted", "stored", "finished"}
