"""What only the local executor promises: workers kept, replaced when grown, remade whatever dies."""

from __future__ import annotations

import logging
import os
import select
import signal
import threading

import pytest
from contract.executor_stage import WAIT, Stage
from contract.scripted_solver import Script
from nearchord_service.work.local import LocalExecutor
from nearchord_service.work.port import LossCause, Lost, Solved

MIB = 2**20


def staged(slots=1, solver="contract.scripted_solver", **options):
    return Stage(LocalExecutor(slots, grace_seconds=0.3, solver=solver, **options))


@pytest.fixture
def stage():
    made = staged()
    made.ready(1)
    yield made
    made.executor.stop(0.0)


def worker_of(stage):
    """Process number of the only worker."""
    return stage.executor._pool._slots[0].pid


def test_a_worker_is_kept_from_task_to_task(stage):
    """Tasks do not pay for a new process."""
    first = worker_of(stage)
    for _ in range(5):
        assert isinstance(stage.end(Script.ANSWER), Solved)
    assert worker_of(stage) == first


def test_a_worker_that_has_grown_is_replaced():
    """Memory that a task left behind goes with its process; until then the worker is kept."""
    stage = staged(resident_limit_bytes=150 * MIB)
    stage.ready(1)
    pids = [stage.end(Script.LEAK).answer.value[0] for _ in range(4)]
    stage.ready(1)
    stage.executor.stop(0.0)
    assert pids[0] == pids[1] == pids[2]
    assert pids[2] != pids[3]


def test_an_idle_worker_that_dies_is_replaced(stage):
    """A death between tasks costs no task anything."""
    first = worker_of(stage)
    changes = stage.audience.slot_changes
    os.kill(first, signal.SIGKILL)
    stage.audience.wait(lambda: stage.audience.slot_changes > changes)
    assert worker_of(stage) != first
    assert isinstance(stage.end(Script.ANSWER), Solved)


def test_the_nursery_is_started_again_when_it_dies(stage):
    """Without its nursery no worker lives on; the task is lost like with any death, and work goes on afterwards."""
    one = stage.run(Script.UNTIL_STOPPED)
    stage.audience.first_progress(one)
    worker = os.pidfd_open(worker_of(stage))
    os.kill(stage.executor._pool._nursery.pid, signal.SIGKILL)
    end = stage.audience.end_of(one)
    assert_ends(worker)
    assert isinstance(end, Lost)
    assert end.cause is LossCause.DIED
    stage.ready(1)
    assert isinstance(stage.end(Script.ANSWER), Solved)


def test_a_nursery_that_hangs_does_not_save_a_worker(stage, monkeypatch):
    """When a kill is not carried out, nursery and workers are replaced together."""
    monkeypatch.setattr("nearchord_service.work.local.pool.KILL_SECONDS", 0.3)
    one = stage.run(Script.DEAF, seconds=0.05)
    os.kill(stage.executor._pool._nursery.pid, signal.SIGSTOP)
    end = stage.audience.end_of(one)
    assert end.cause is LossCause.SECONDS
    stage.ready(1)
    assert isinstance(stage.end(Script.ANSWER), Solved)


def test_an_idle_worker_that_hangs_does_not_cost_the_job_its_seconds(stage, monkeypatch):
    """A task that its worker never began is not said to have used its seconds: it is to be tried again."""
    monkeypatch.setattr("nearchord_service.work.local.slot.START_SECONDS", 0.3)
    os.kill(worker_of(stage), signal.SIGSTOP)
    end = stage.end(Script.ANSWER, seconds=0.05)
    assert isinstance(end, Lost)
    assert end.cause is LossCause.DIED
    stage.ready(1)


def test_signals_to_the_workers_group_do_no_harm(stage):
    """A terminal's or a service manager's signal to every process leaves ending to the server."""
    one = stage.run(Script.UNTIL_STOPPED)
    stage.audience.first_progress(one)
    for number in (signal.SIGINT, signal.SIGTERM, signal.SIGHUP):
        os.killpg(stage.executor._pool._nursery.pid, number)
    stage.executor.cancel(one.key)
    assert isinstance(stage.audience.end_of(one), Solved)


def assert_ends(process):
    """Wait for the end of a process (a pidfd, which is closed)."""
    ended, _, _ = select.select([process], [], [], WAIT)
    os.close(process)
    assert ended


class LogWatch(logging.Handler):
    """Sets `seen` when a record of the pool has `words` in it."""

    def __init__(self, words):
        super().__init__()
        self.words = words
        self.seen = threading.Event()

    def emit(self, record):
        if self.words in record.getMessage():
            self.seen.set()

    def __enter__(self):
        logging.getLogger("nearchord_service.work.local.pool").addHandler(self)
        return self

    def __exit__(self, *_):
        logging.getLogger("nearchord_service.work.local.pool").removeHandler(self)


def test_a_solver_that_cannot_be_loaded_keeps_jobs_waiting():
    """Nothing is handed out while no worker can work; the log says why, and a stop still works."""
    with LogWatch("no_such_solver") as log:
        stage = staged(solver="contract.no_such_solver")
        assert log.seen.wait(WAIT)
    assert stage.executor.free() == 0
    figures = stage.executor.figures()
    assert (figures.warming, figures.warm_fraction) == (1, 0.0)
    stage.executor.stop(0.0)


def test_stop_leaves_no_descriptors_and_no_processes():
    """Everything that was opened is closed again, the shared memory too."""
    before = len(os.listdir("/proc/self/fd"))
    stage = staged(slots=2)
    stage.ready(2)
    stage.end(Script.EXIT)
    stage.ready(2)
    processes = [os.pidfd_open(slot.pid) for slot in stage.executor._pool._slots]
    stage.executor.stop(0.0)
    for process in processes:
        assert_ends(process)
    assert len(os.listdir("/proc/self/fd")) == before
