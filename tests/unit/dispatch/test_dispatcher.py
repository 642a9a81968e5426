"""The dispatcher against a store in memory and an executor moved by hand."""

from __future__ import annotations

import threading

import pytest
from nearchord_service.dispatch import Dispatcher
from nearchord_service.model.stage import Verdict
from nearchord_service.work.port import LossCause
from unit.dispatch.hand_executor import SEEN, HandExecutor
from unit.dispatch.memory_store import MemoryStore


class Observer:
    def __init__(self):
        self.finished = []
        self.lost_leases = 0
        self.lost_workers = []

    def job_finished(self, job, answer):
        self.finished.append((job.id, answer.verdict))

    def leases_lost(self, count):
        self.lost_leases += count

    def worker_lost(self, cause):
        self.lost_workers.append(cause)


class Clock:
    """Stands still until it is moved."""

    def __init__(self):
        self.now = 1000.0

    def __call__(self):
        return self.now


class Scene:
    """A dispatcher with everything around it. Heartbeats come only when a test calls `renew`."""

    def __init__(self, poll_seconds=0.02, **options):
        self.store = MemoryStore()
        self.executor = HandExecutor(**options)
        self.observer = Observer()
        self.clock = Clock()
        self.dispatcher = Dispatcher(
            self.store,
            self.executor,
            holder="here",
            observer=self.observer,
            heartbeat_seconds=3600.0,
            poll_seconds=poll_seconds,
            clock=self.clock,
        )

    def running(self, *names):
        self.executor.wait(lambda: set(self.executor.running) == set(names))

    def ended(self, count):
        self.store.wait(lambda: len(self.store.finished) == count)


@pytest.fixture
def scene():
    made = Scene()
    made.dispatcher.start()
    yield made
    made.dispatcher.stop(0.0)


def test_jobs_run_and_their_answers_are_recorded(scene):
    """A job goes from the queue through a slot to its recorded answer."""
    scene.store.add("a", "b")
    scene.running("a", "b")
    scene.executor.solve("b")
    scene.executor.solve("a", Verdict.BOUNDED)
    scene.ended(2)
    assert {name: answer.verdict for name, answer in scene.store.finished.items()} == {
        "a": Verdict.BOUNDED,
        "b": Verdict.PROVEN,
    }
    assert scene.dispatcher.stop(0.0) is None
    assert sorted(scene.observer.finished) == [("a", Verdict.BOUNDED), ("b", Verdict.PROVEN)]


def test_no_more_jobs_are_leased_than_slots_are_free(scene):
    """With run times unknown or long nothing is leased ahead, so that urgent jobs can still overtake."""
    scene.store.add("a", "b", "c", "d")
    scene.running("a", "b")
    scene.clock.now += 5.0
    scene.executor.solve("a")
    scene.running("b", "c")
    scene.ended(1)
    assert [one.id for one in scene.store.queue] == ["d"]
    assert max(scene.store.claims) <= 2


def test_an_empty_queue_is_not_asked_again_before_a_hint():
    """Ends of jobs cost no look into a queue that is known to be empty."""
    scene = Scene(poll_seconds=3600.0)
    scene.store.add("a")
    scene.dispatcher.start()
    scene.running("a")
    scene.store.wait(lambda: len(scene.store.claims) == 2)
    scene.executor.solve("a")
    scene.ended(1)
    scene.store.add("b")
    scene.running("b")
    scene.dispatcher.stop(0.0)
    assert len(scene.store.claims) == 3


def test_short_jobs_are_leased_ahead():
    """While jobs take no time, up to two more for each slot are leased; a long run ends that."""
    scene = Scene()
    scene.dispatcher.start()
    scene.store.add("a")
    scene.running("a")
    scene.executor.solve("a")
    scene.ended(1)
    scene.store.add(*(f"j{i}" for i in range(20)))
    scene.store.wait(lambda: len(scene.store.held) == 6)
    assert len(scene.executor.running) == 2
    scene.dispatcher.stop(0.0)


def test_jobs_leased_ahead_go_back_when_no_slot_comes_free():
    """A job that waits behind long ones returns to the queue, where it can be overtaken, and loses no worker."""
    scene = Scene()
    scene.dispatcher.start()
    scene.store.add("a")
    scene.running("a")
    scene.executor.solve("a")
    scene.ended(1)
    scene.store.add("b", "c", "d", "e")
    scene.store.wait(lambda: len(scene.store.held) == 4)
    scene.clock.now += 1.5
    scene.store.wait(lambda: len(scene.store.returned) == 2)
    assert {(name, lost) for name, _, lost in scene.store.returned} == {("d", False), ("e", False)}
    assert set(scene.store.held) == {"b", "c"}
    scene.dispatcher.stop(0.0)


@pytest.mark.parametrize(
    ("cause", "verdict"),
    [
        (LossCause.SECONDS, Verdict.BOUNDED),
        (LossCause.MEMORY, Verdict.BROKEN),
        (LossCause.CANCEL, Verdict.CANCELLED),
    ],
)
def test_losses_that_end_a_job(scene, cause, verdict):
    """Seconds, memory and cancel are final: the job gets the verdict with the reason in words, and no choice."""
    scene.store.add("a")
    scene.running("a")
    scene.executor.lose("a", cause)
    scene.ended(1)
    answer = scene.store.finished["a"]
    assert answer.verdict is verdict
    assert answer.reason.startswith("lost by hand")
    assert answer.columns == ()
    assert answer.value is None
    assert answer.bound == ((SEEN.bound, 1) if verdict is Verdict.BOUNDED else None)
    assert scene.observer.lost_workers == [cause]


def test_a_worker_that_dies_returns_its_job_until_it_has_lost_three(scene):
    """A death is the worker's fault first: the job runs again, and only the third death ends it."""
    scene.store.add("a")
    for _ in range(3):
        scene.running("a")
        scene.executor.lose("a", LossCause.DIED)
    scene.store.wait(lambda: len(scene.store.returned) == 3)
    scene.dispatcher.stop(0.0)
    assert all(lost for _, _, lost in scene.store.returned)
    assert scene.observer.finished == [("a", Verdict.BROKEN)]


def test_cancel_reaches_a_running_task(scene):
    """A hint of a cancel stops the task in its slot."""
    scene.store.add("a")
    scene.running("a")
    scene.store.cancel("a")
    scene.executor.wait(lambda: [key.job_id for key in scene.executor.cancelled] == ["a"])


def test_cancel_reaches_a_job_leased_ahead():
    """A job that waits for a slot is given back, upon which the store ends it as CANCELLED."""
    scene = Scene()
    scene.dispatcher.start()
    scene.store.add("a")
    scene.running("a")
    scene.executor.solve("a")
    scene.ended(1)
    scene.store.add("b", "c", "d")
    scene.store.wait(lambda: len(scene.store.held) == 3)
    scene.store.cancel("d")
    scene.store.wait(lambda: [name for name, _, _ in scene.store.returned] == ["d"])
    scene.dispatcher.stop(0.0)
    assert ("d", Verdict.CANCELLED) in scene.observer.finished


def test_cancel_that_comes_while_its_job_is_being_leased(scene):
    """The hint may come before the lease is known here; it is not forgotten."""
    scene.store.in_claim = lambda leases: [scene.store.cancel(lease.job.id) for lease in leases]
    scene.store.add("a")
    scene.store.wait(lambda: [name for name, _, _ in scene.store.returned] == ["a"])
    assert scene.executor.taken == []


def test_cancel_that_comes_while_its_task_is_handed_over(scene):
    """Between leaving the queue of those ahead and reaching its slot a task cannot dodge a cancel."""
    scene.executor.on_run = lambda task: scene.store.cancel(task.key.job_id)
    scene.store.add("a")
    scene.executor.wait(lambda: scene.executor.running and len(scene.executor.cancelled) == 2)


def test_renewal_tells_of_cancels_whose_hint_was_lost(scene):
    """Hints may be lost; the next heartbeat brings the cancel."""
    scene.store.add("a")
    scene.running("a")
    scene.store.cancels.add("a")
    scene.dispatcher.renew()
    assert [key.job_id for key in scene.executor.cancelled] == ["a"]


def test_a_lost_lease_stops_the_task_and_drops_its_result(scene):
    """What was solved under a lease that another holds now is worth nothing and is not sent."""
    scene.store.add("a")
    scene.running("a")
    scene.store.steal("a")
    scene.dispatcher.renew()
    assert [key.job_id for key in scene.executor.cancelled] == ["a"]
    scene.executor.solve("a")
    scene.store.add("b")
    scene.running("b")
    scene.executor.solve("b")
    scene.ended(1)
    assert scene.store.offered == ["b"]
    assert scene.observer.lost_leases == 1
    scene.store.add("b")
    scene.running("b")
    scene.dispatcher.renew()
    assert scene.store.renewals[-1] == [("b", 1)]


def test_a_result_refused_by_the_store_counts_as_a_lost_lease(scene):
    """The fence of the attempt holds even when no heartbeat came between."""
    scene.store.add("a")
    scene.running("a")
    scene.store.steal("a")
    scene.executor.solve("a")
    scene.dispatcher.stop(0.0)
    assert scene.store.finished == {}
    assert scene.observer.finished == []
    assert scene.observer.lost_leases == 1


def test_results_survive_a_store_that_is_not_available(scene):
    """A result is tried until it is recorded, and its lease is renewed meanwhile."""
    scene.store.add("a")
    scene.running("a")
    scene.store.unavailable["finish"] = 2
    scene.executor.solve("a")
    scene.dispatcher.renew()
    assert ("a", 1) in scene.store.renewals[0]
    scene.ended(1)
    assert scene.store.unavailable["finish"] == 0


def test_leasing_goes_on_after_a_store_that_was_not_available():
    """Failing claims and reclaims are tried again."""
    scene = Scene()
    scene.store.unavailable = {"reclaim": 2, "claim": 2}
    scene.store.add("a")
    scene.dispatcher.start()
    scene.running("a")
    assert scene.store.reclaimed == ["here"]
    scene.dispatcher.stop(0.0)


def test_an_answer_the_store_cannot_take_returns_its_job(scene):
    """An answer that cannot be written at all counts like a lost worker, so that it cannot loop for ever."""
    scene.store.broken_finish = True
    scene.store.add("a")
    scene.running("a")
    scene.executor.solve("a")
    scene.store.wait(lambda: scene.store.returned)
    assert scene.store.returned[0][2] is True


def test_progress_is_written_in_batches_and_only_the_latest(scene):
    """Of many reports of a task between two rows only the last is written."""
    scene.store.add("a")
    scene.running("a")
    for _ in range(5):
        scene.executor.show("a")
    scene.store.wait(lambda: scene.store.progress)
    assert scene.store.progress == [("a", 1, SEEN)]


def test_stop_gives_running_jobs_back_without_blame(scene):
    """What a stop interrupts waits again, and no worker counts as lost to it."""
    scene.store.add("a", "b", "c")
    scene.running("a", "b")
    scene.dispatcher.stop(0.0)
    assert sorted((name, lost) for name, _, lost in scene.store.returned) == [("a", False), ("b", False)]
    assert {one.id for one in scene.store.queue} == {"a", "b", "c"}
    assert scene.executor.taken == scene.executor.taken[:2]


def test_start_and_stop_can_be_repeated():
    """Second starts and stops are harmless, and so is a stop before the start, after which nothing starts."""
    scene = Scene()
    scene.dispatcher.start()
    scene.dispatcher.start()
    assert scene.executor.starts == 1
    scene.dispatcher.stop(0.0)
    scene.dispatcher.stop(0.0)
    early = Scene()
    early.dispatcher.stop(0.0)
    early.dispatcher.start()
    assert early.executor.starts == 0


def test_stop_leaves_no_thread_behind():
    """Every thread of the dispatcher ends with it."""
    before = set(threading.enumerate())
    scene = Scene(at_once=True)
    scene.dispatcher.start()
    scene.store.add(*(f"j{i}" for i in range(50)))
    scene.ended(50)
    scene.dispatcher.stop(0.0)
    assert set(threading.enumerate()) == before
