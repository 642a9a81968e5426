"""Any sequence of calls against a model of a few lines: the same stages, attempts and verdicts after every step."""

from __future__ import annotations

import datetime as dt
import tempfile
from dataclasses import dataclass, field
from pathlib import Path

import pytest
from contract.stores import ANN, HOMES, LIMITS, answer, progress, spec, submission
from hypothesis import HealthCheck, settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, invariant, precondition, rule, run_state_machine_as_test
from nearchord_service.model.event import Reached
from nearchord_service.model.job import Lease
from nearchord_service.model.stage import Stage, Verdict, transition
from nearchord_service.store.port import LOST_WORKERS_ALLOWED

LEASE_SECONDS = 10


@dataclass
class Expected:
    """What the model knows of a job."""

    order: tuple[int, int]
    not_after: dt.datetime | None
    stage: Stage = Stage.WAITING
    verdict: Verdict | None = None
    attempt: int = 0
    lost: int = 0
    cancel: bool = False
    holder: str = ""
    until: dt.datetime | None = None
    moves: list[Stage] = field(default_factory=lambda: [Stage.WAITING])

    def move(self, stage: Stage, verdict: Verdict | None = None) -> None:
        self.stage, self.verdict = stage, verdict
        self.moves.append(stage)

    def take_back(self, lost: bool) -> None:
        self.lost += lost
        if self.cancel:
            self.move(Stage.DONE, Verdict.CANCELLED)
        elif self.lost >= LOST_WORKERS_ALLOWED:
            self.move(Stage.DONE, Verdict.BROKEN)
        else:
            self.move(Stage.WAITING)


class StoreMachine(RuleBasedStateMachine):
    """Calls in any order, by live holders and by zombies."""

    kind = ""

    def __init__(self) -> None:
        super().__init__()
        self.folder = tempfile.TemporaryDirectory()
        self.home = HOMES[self.kind](Path(self.folder.name))
        self.store = self.home.open()
        self.jobs: dict[str, Expected] = {}
        self.leases: list[Lease] = []

    def teardown(self) -> None:
        self.home.close()
        self.folder.cleanup()

    @rule(priority=st.integers(-1, 1), seconds=st.none() | st.integers(1, 20))
    def submit(self, priority: int, seconds: int | None) -> None:
        limit = None if seconds is None else self.home.clock.now + dt.timedelta(seconds=seconds)
        job = self.store.submit(submission(spec(priority=priority, not_after=limit)), LIMITS).job
        self.jobs[job.id] = Expected((-priority, len(self.jobs)), limit)

    @rule(limit=st.integers(1, 3), holder=st.sampled_from(["host", "other"]))
    def claim(self, limit: int, holder: str) -> None:
        now = self.home.clock.now
        free = [
            (job.order, job_id)
            for job_id, job in self.jobs.items()
            if job.stage is Stage.WAITING and (job.attempt or job.not_after is None or job.not_after > now)
        ]
        leases = self.store.claim(holder, limit, LEASE_SECONDS)
        assert [lease.job.id for lease in leases] == [job_id for _, job_id in sorted(free)[:limit]]
        for lease in leases:
            job = self.jobs[lease.job.id]
            job.attempt += 1
            job.holder, job.until = holder, now + dt.timedelta(seconds=LEASE_SECONDS)
            job.move(Stage.SOLVING)
            assert (lease.attempt, lease.lost_workers) == (job.attempt, job.lost)
        self.leases += leases

    def held(self, lease: Lease) -> bool:
        job = self.jobs[lease.job.id]
        return job.stage is Stage.SOLVING and job.attempt == lease.attempt

    @precondition(lambda self: self.leases)
    @rule(data=st.data(), verdict=st.sampled_from([Verdict.PROVEN, Verdict.BOUNDED, Verdict.CANCELLED]))
    def finish(self, data: st.DataObject, verdict: Verdict) -> None:
        lease = data.draw(st.sampled_from(self.leases))
        held = self.held(lease)
        assert self.store.finish(lease.job.id, lease.attempt, answer(verdict)).result() is held
        if held:
            self.jobs[lease.job.id].move(Stage.DONE, verdict)

    @precondition(lambda self: self.leases)
    @rule(data=st.data(), lost=st.booleans())
    def give_back(self, data: st.DataObject, lost: bool) -> None:
        lease = data.draw(st.sampled_from(self.leases))
        held = self.held(lease)
        assert self.store.give_back(lease.job.id, lease.attempt, "gone", worker_lost=lost).result() is held
        if held:
            self.jobs[lease.job.id].take_back(lost)

    @precondition(lambda self: self.leases)
    @rule(data=st.data())
    def renew(self, data: st.DataObject) -> None:
        lease = data.draw(st.sampled_from(self.leases))
        job = self.jobs[lease.job.id]
        key = (lease.job.id, lease.attempt)
        renewal = self.store.renew("host", [key], LEASE_SECONDS)[key]
        assert renewal.held is (self.held(lease) and job.holder == "host")
        assert renewal.cancel_requested is (renewal.held and job.cancel)
        if renewal.held:
            job.until = self.home.clock.now + dt.timedelta(seconds=LEASE_SECONDS)

    @precondition(lambda self: self.leases)
    @rule(data=st.data())
    def report(self, data: st.DataObject) -> None:
        lease = data.draw(st.sampled_from(self.leases))
        before = self.store.job(ANN, lease.job.id).sequence
        self.store.record_progress([(lease.job.id, lease.attempt, progress())])
        assert (self.store.job(ANN, lease.job.id).sequence > before) is self.held(lease)

    @precondition(lambda self: self.jobs)
    @rule(data=st.data())
    def cancel(self, data: st.DataObject) -> None:
        job_id = data.draw(st.sampled_from(sorted(self.jobs, key=lambda job_id: self.jobs[job_id].order)))
        self.store.cancel_job(ANN, job_id)
        job = self.jobs[job_id]
        job.cancel |= job.stage is not Stage.DONE
        if job.stage is Stage.WAITING:
            job.move(Stage.DONE, Verdict.CANCELLED)

    @rule(seconds=st.integers(1, 12))
    def advance(self, seconds: int) -> None:
        self.home.clock.advance(seconds)

    @rule()
    def expire_leases(self) -> None:
        over = [
            job
            for job in self.jobs.values()
            if job.stage is Stage.SOLVING and job.until is not None and job.until <= self.home.clock.now
        ]
        assert self.store.expire_leases() == len(over)
        for job in over:
            job.take_back(lost=True)

    @rule()
    def expire_overdue(self) -> None:
        over = [
            job
            for job in self.jobs.values()
            if job.stage is Stage.WAITING and not job.attempt and job.not_after and job.not_after <= self.home.clock.now
        ]
        assert self.store.expire_overdue() == len(over)
        for job in over:
            job.move(Stage.DONE, Verdict.EXPIRED)

    @rule()
    def restart(self) -> None:
        self.store = self.home.open()
        mine = [job for job in self.jobs.values() if job.stage is Stage.SOLVING and job.holder == "host"]
        assert self.store.reclaim("host") == len(mine)
        for job in mine:
            job.take_back(lost=False)

    @invariant()
    def jobs_are_as_expected(self) -> None:
        figures = self.store.figures()
        stages = [job.stage for job in self.jobs.values()]
        assert (figures.waiting, figures.solving) == (stages.count(Stage.WAITING), stages.count(Stage.SOLVING))
        for job_id, job in self.jobs.items():
            found = self.store.job(ANN, job_id)
            assert (found.stage, found.verdict, found.attempt) == (job.stage, job.verdict, job.attempt)
            assert found.cancel_requested is job.cancel
            reached = [e.news for e in self.store.job_events(ANN, job_id, 0, 999) if isinstance(e.news, Reached)]
            assert [news.stage for news in reached] == job.moves
            for before, after in zip([None, *job.moves], reached, strict=False):
                transition(before, after.stage, after.verdict)


@pytest.mark.parametrize("kind", sorted(HOMES))
def test_any_sequence_of_calls_agrees_with_the_model(kind: str) -> None:
    machine = type("Machine", (StoreMachine,), {"kind": kind})
    quiet = settings(
        max_examples=25, stateful_step_count=40, deadline=None, suppress_health_check=list(HealthCheck), database=None
    )
    run_state_machine_as_test(machine, settings=quiet)
