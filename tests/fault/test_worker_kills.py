"""Workers killed for real, at random moments, under a dispatcher: every job ends, once, with the right answer."""

from __future__ import annotations

import os
import random
import signal
import threading

import pytest
from contract.executor_stage import edgeless
from contract.scripted_solver import Script
from nearchord_service.dispatch import Dispatcher
from nearchord_service.model.content import Bytes
from nearchord_service.model.question import Budget
from nearchord_service.model.stage import Verdict
from nearchord_service.work.local import LocalExecutor
from unit.dispatch.memory_store import MemoryStore

pytestmark = pytest.mark.fault
JOBS = 200
SLOTS = 2
WAIT = 60.0


class Observer:
    """Counts; told from several threads."""

    def __init__(self):
        self.finished = []
        self.causes = []

    def job_finished(self, job, answer):
        self.finished.append(job.id)

    def leases_lost(self, count):
        raise AssertionError("no lease is lost while its server lives")

    def worker_lost(self, cause):
        self.causes.append(cause)


@pytest.fixture
def scene(request):
    store, observer = MemoryStore(graph=Bytes(edgeless(1), None)), Observer()
    executor = LocalExecutor(SLOTS, grace_seconds=0.3, solver="contract.scripted_solver")
    dispatcher = Dispatcher(store, executor, holder="here", observer=observer, poll_seconds=0.05)
    dispatcher.start()
    yield store, executor, observer
    dispatcher.stop(0.0)


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
    """All jobs end exactly once: proven, or broken after three lost workers, saying so."""
    store, executor, observer = scene
    end, kills = threading.Event(), []
    killer = threading.Thread(target=lambda: kills.append(kill_at_random(executor, end, seed)))
    killer.start()
    store.add(*(f"job-{i}" for i in range(JOBS)), budget=Budget(states=Script.SHORT_WORK))
    try:
        store.wait(lambda: len(store.finished) + len(broken(store)) == JOBS, WAIT)
    finally:
        end.set()
        killer.join()
    assert kills[0] > 0
    assert {answer.verdict for answer in store.finished.values()} == {Verdict.PROVEN}
    assert set(store.finished).isdisjoint(broken(store))
    store.wait(lambda: len(observer.finished) == JOBS)
    assert len(set(observer.finished)) == JOBS


def broken(store):
    """Names of the jobs that have lost as many workers as they may."""
    lost = [name for name, _, worker_lost in store.returned if worker_lost]
    return {name for name in lost if lost.count(name) == 3}


def test_misbehaving_jobs_do_not_harm_their_neighbours(scene):
    """Among jobs that run wild in every way the good ones all end proven."""
    store, _, observer = scene
    wild = [Script.ALLOCATE, Script.DEAF, Script.STOP_SELF, Script.FAIL, Script.NONSENSE]
    for script in wild:
        endless = script in (Script.DEAF, Script.STOP_SELF)
        budget = Budget(states=script, seconds=0.2 if endless else 60.0, memory_bytes=100 * 2**20)
        store.add(*(f"{script.name}-{i}" for i in range(3)), budget=budget)
        store.add(*(f"good-{script.name}-{i}" for i in range(10)), budget=Budget(states=Script.ANSWER))
    store.wait(lambda: len(store.finished) == len(wild) * 13, WAIT)
    ends = {script.name: {store.finished[f"{script.name}-{i}"].verdict for i in range(3)} for script in wild}
    assert ends == {
        "ALLOCATE": {Verdict.BROKEN},
        "DEAF": {Verdict.BOUNDED},
        "STOP_SELF": {Verdict.BOUNDED},
        "FAIL": {Verdict.BROKEN},
        "NONSENSE": {Verdict.BROKEN},
    }
    good = [answer for name, answer in store.finished.items() if name.startswith("good")]
    assert {answer.verdict for answer in good} == {Verdict.PROVEN}
    assert {cause.value for cause in observer.causes} == {"memory", "seconds"}


def test_a_job_that_kills_its_worker_is_broken_after_three(scene):
    """A job that ends its process each time is given up, with the reason."""
    store, _, observer = scene
    store.add("deadly", budget=Budget(states=Script.KILL_SELF))
    store.wait(lambda: broken(store) == {"deadly"}, WAIT)
    assert all("signal 9" in reason for _, reason, _ in store.returned)
    assert [cause.value for cause in observer.causes] == ["died"] * 3
