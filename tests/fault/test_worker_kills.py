"""Workers killed for real, under a dispatcher and a real store: every job ends, once, with the right answer."""

from __future__ import annotations

import hashlib
import os
import random
import signal
import threading

import pytest
from contract.executor_stage import edgeless
from contract.scripted_solver import Script
from nearchord_service.dispatch import Dispatcher
from nearchord_service.model.content import ContentKind, NewContent
from nearchord_service.model.event import Reached
from nearchord_service.model.job import JobSpec, Submission
from nearchord_service.model.question import Budget, Question, QuestionName
from nearchord_service.model.stage import Stage, Verdict
from nearchord_service.store.port import LOST_WORKERS_ALLOWED, Limits
from nearchord_service.store.sql import SqlStore
from nearchord_service.work.local import LocalExecutor

pytestmark = pytest.mark.fault
JOBS = 200
SLOTS = 2
WAIT = 60.0
LIMITS = Limits(10_000, 2**30)
GRAPH = edgeless(1)
INLINE = NewContent(hashlib.sha256(GRAPH).hexdigest(), ContentKind.GRAPH, GRAPH, 1, 0)


class Observer:
    """Remembers; told from several threads."""

    def __init__(self):
        self.changed = threading.Condition()
        self.finished = []
        self.causes = []
        self.lost_leases = 0

    def job_finished(self, job, answer):
        with self.changed:
            self.finished.append(job.id)
            self.changed.notify_all()

    def leases_lost(self, count):
        self.lost_leases += count

    def worker_lost(self, cause):
        self.causes.append(cause.value)


class Scene:
    """A store, an executor and a dispatcher between them, with one batch."""

    def __init__(self, data):
        self.store = SqlStore(data)
        self.store.start()
        self.executor = LocalExecutor(SLOTS, grace_seconds=0.3, solver="contract.scripted_solver")
        self.observer = Observer()
        self.dispatcher = Dispatcher(self.store, self.executor, holder="here", observer=self.observer)
        self.dispatcher.start()

    def submit(self, budgets):
        """Accept one job for each budget, labelled with the name of its script."""
        question = Question(QuestionName.INDEPENDENT_SET)
        specs = tuple(
            JobSpec(INLINE.address, None, None, question, budget, label=Script(budget.states).name, inline=(INLINE,))
            for budget in budgets
        )
        accepted = self.store.submit(Submission("team", "request", bytes(32), specs, batch=True), LIMITS)
        self.batch = accepted.batch.id

    def ends(self):
        """Wait until all jobs have ended and return them with their answers."""
        total = self.store.batch("team", self.batch).jobs
        with self.observer.changed:
            assert self.observer.changed.wait_for(lambda: len(self.observer.finished) >= total, WAIT)
        ends = self.store.batch_answers("team", self.batch, -1, total)
        assert len(ends) == total
        assert all(job.stage is Stage.DONE for job, _ in ends)
        return ends

    def times_done(self, job_id):
        """Count how often a job was recorded as DONE."""
        news = [event.news for event in self.store.job_events("team", job_id, 0, 1000)]
        return sum(isinstance(one, Reached) and one.stage is Stage.DONE for one in news)

    def close(self):
        self.dispatcher.stop(0.0)
        self.store.stop()


@pytest.fixture
def scene(tmp_path):
    made = Scene(tmp_path)
    yield made
    made.close()


def kill_at_random(executor, end, seed):
    """Kill one of the workers again and again until told to end; return how many kills hit."""
    dice, kills = random.Random(seed), 0
    while not end.wait(dice.uniform(0.0, 0.03)):
        pid = executor._pool._slots[dice.randrange(SLOTS)].pid
        if pid is not None:
            try:
                os.kill(pid, signal.SIGKILL)
            except ProcessLookupError:
                continue
            kills += 1
    return kills


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_jobs_survive_workers_killed_at_random(scene, seed):
    """All jobs end, each recorded once: proven, or broken after three lost workers, saying so."""
    end, kills = threading.Event(), []
    killer = threading.Thread(target=lambda: kills.append(kill_at_random(scene.executor, end, seed)))
    killer.start()
    try:
        scene.submit([Budget(states=Script.SHORT_WORK)] * JOBS)
        ends = scene.ends()
    finally:
        end.set()
        killer.join()
    assert kills[0] > 0
    assert "died" in scene.observer.causes
    assert len(set(scene.observer.finished)) == len(scene.observer.finished) == JOBS
    assert scene.observer.lost_leases == 0
    for job, answer in ends:
        assert scene.times_done(job.id) == 1
        if job.verdict is Verdict.BROKEN:
            assert job.attempt >= LOST_WORKERS_ALLOWED
            assert "signal 9" in job.reason
        else:
            assert (job.verdict, answer.value) == (Verdict.PROVEN, (7, 1))


def test_misbehaving_jobs_do_not_harm_their_neighbours(scene):
    """Among jobs that run wild in every way the good ones all end proven."""
    verdicts = {
        Script.ALLOCATE: Verdict.BROKEN,
        Script.DEAF: Verdict.BOUNDED,
        Script.STOP_SELF: Verdict.BOUNDED,
        Script.FAIL: Verdict.BROKEN,
        Script.NONSENSE: Verdict.BROKEN,
        Script.KILL_SELF: Verdict.BROKEN,
        Script.ANSWER: Verdict.PROVEN,
    }
    budgets = []
    for script in verdicts:
        endless = script in (Script.DEAF, Script.STOP_SELF)
        wild = Budget(states=script, seconds=0.2 if endless else 60.0, memory_bytes=100 * 2**20)
        budgets += [wild] * 3 + [Budget(states=Script.ANSWER)] * 10
    scene.submit(budgets)
    ends = scene.ends()
    assert {(job.label, job.verdict) for job, _ in ends} == {(script.name, end) for script, end in verdicts.items()}
    assert all(job.reason for job, _ in ends)
    assert set(scene.observer.causes) == {"memory", "seconds", "died"}
    assert scene.observer.causes.count("died") == 3 * LOST_WORKERS_ALLOWED
    assert scene.observer.causes.count("memory") == 3


def test_a_server_that_ends_in_the_middle_leaves_its_jobs_to_the_next(scene, tmp_path):
    """Stopped within a batch, a second server on the same data folder ends every job, none blamed for the stop."""
    scene.submit([Budget(states=Script.SHORT_WORK)] * JOBS)
    with scene.observer.changed:
        assert scene.observer.changed.wait_for(lambda: len(scene.observer.finished) >= 10, WAIT)
    scene.close()
    before = len(scene.observer.finished)
    second = Scene(tmp_path)
    second.batch = scene.batch
    try:
        second.store.batch("team", second.batch)
        with second.observer.changed:
            assert second.observer.changed.wait_for(lambda: len(second.observer.finished) >= JOBS - before, WAIT)
        ends = second.store.batch_answers("team", second.batch, -1, JOBS)
        assert {job.verdict for job, _ in ends} == {Verdict.PROVEN}
        assert {second.times_done(job.id) for job, _ in ends} == {1}
    finally:
        second.close()
