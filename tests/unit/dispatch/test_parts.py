"""The parts of dispatching on their own: pace, ticker, recorder, verdicts, upkeep."""

from __future__ import annotations

import threading
from concurrent.futures import Future
from types import SimpleNamespace

import pytest
from nearchord_service.dispatch import Upkeep
from nearchord_service.dispatch.pace import SHORT_SECONDS, Pace
from nearchord_service.dispatch.recorder import Record, Recorder
from nearchord_service.dispatch.ticker import Ticker
from nearchord_service.dispatch.verdicts import final_answer
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.store.port import Dropped, Retention
from nearchord_service.work.port import LossCause, Lost

WAIT = 10.0


def test_pace_of_unknown_jobs_is_slow():
    """Before any job has ended nothing is leased ahead."""
    assert Pace().ahead(4) == 0


def test_pace_follows_the_latest_run_times():
    """A few long jobs end leasing ahead, a run of short ones brings it back."""
    pace = Pace()
    pace.ran(0.001)
    assert pace.ahead(3) == 6
    pace.ran(10.0)
    assert pace.ahead(3) == 0
    for _ in range(40):
        pace.ran(0.001)
    assert pace.ahead(3) == 6
    assert pace.ahead(0) == 0


def test_pace_of_jobs_at_the_threshold_is_slow():
    """Exactly the threshold is not short."""
    pace = Pace()
    pace.ran(SHORT_SECONDS)
    assert pace.ahead(1) == 0


def test_ticker_goes_on_after_errors():
    """A round that fails, for whatever reason, does not end the part."""
    rounds = []
    third = threading.Event()

    def action():
        rounds.append(None)
        if len(rounds) == 1:
            raise StoreUnavailable("busy")
        if len(rounds) == 2:
            raise ValueError("a defect")
        third.set()

    ticker = Ticker("test", 0.001, action)
    ticker.start()
    ticker.start()
    assert third.wait(WAIT)
    ticker.stop()
    ticker.stop()
    count = len(rounds)
    ticker.start()
    assert len(rounds) == count


def settled_future(result):
    future = Future()
    if isinstance(result, Exception):
        future.set_exception(result)
    else:
        future.set_result(result)
    return future


@pytest.mark.parametrize("late", [False, True])
def test_recorder_tries_until_the_store_takes_it(late):
    """An unavailable store is tried again, whether it says so at once or through the future."""
    results = [StoreUnavailable("busy"), StoreUnavailable("busy"), True]
    seen = []

    def write():
        result = results.pop(0)
        if isinstance(result, Exception) and not late:
            raise result
        return settled_future(result)

    recorder = Recorder()
    recorder.start()
    recorder.put(Record("it", write, seen.append, delay=0.001))
    assert recorder.flush(WAIT)
    recorder.stop()
    assert seen == [True]
    assert results == []


@pytest.mark.parametrize(("result", "told"), [(False, False), (ValueError("a defect"), None)])
def test_recorder_settles_what_will_never_be_taken(result, told):
    """A refusal and a defect are final; the second is told apart."""
    seen = []
    recorder = Recorder()
    recorder.start()
    recorder.put(Record("it", lambda: settled_future(result), seen.append))
    assert recorder.flush(WAIT)
    recorder.stop()
    assert seen == [told]


def test_recorder_writes_others_while_one_waits_for_the_store():
    """A record whose commit is under way does not hold up the next."""
    pending = Future()
    seen = []
    recorder = Recorder()
    recorder.start()
    recorder.put(Record("slow", lambda: pending, lambda result: seen.append(("slow", result))))
    done = threading.Event()

    def settled(result):
        seen.append(("fast", result))
        done.set()

    recorder.put(Record("fast", lambda: settled_future(True), settled))
    assert done.wait(WAIT)
    assert not recorder.flush(0.0)
    pending.set_result(True)
    assert recorder.flush(WAIT)
    recorder.stop()
    assert seen == [("fast", True), ("slow", True)]


def test_recorder_can_be_stopped_with_work_left():
    """A store that never comes back does not keep the server from ending."""

    def write():
        raise StoreUnavailable("gone")

    recorder = Recorder()
    recorder.start()
    recorder.put(Record("it", write, lambda _: None))
    assert not recorder.flush(0.01)
    recorder.stop()
    recorder.stop()
    assert recorder.flush(0.0)


@pytest.mark.parametrize("cause", [LossCause.DIED, LossCause.SHUTDOWN])
def test_some_losses_are_not_final(cause):
    """A job whose worker died or was shut down is tried again."""
    assert final_answer(Lost(cause, "gone", None)) is None


class UpkeepStore:
    def __init__(self):
        self.calls = []
        self.all_called = threading.Event()

    def _called(self, name):
        self.calls.append(name)
        if {"leases", "overdue", "retain"} <= set(self.calls):
            self.all_called.set()

    def expire_leases(self):
        self._called("leases")
        return 2

    def expire_overdue(self):
        self._called("overdue")
        return 1

    def retain(self, retention):
        assert retention == Retention(answer_age=5.0)
        self._called("retain")
        return Dropped(1, 2, 3, 4)


def test_upkeep_runs_all_rounds_and_tells_of_lost_leases():
    """Lease expiry, start-by expiry and retention all run; leases that ran out are counted."""
    store, lost = UpkeepStore(), []
    upkeep = Upkeep(
        store,
        retention=Retention(answer_age=5.0),
        observer=SimpleNamespace(leases_lost=lost.append),
        expiry_seconds=0.001,
        retention_seconds=0.001,
    )
    upkeep.stop()
    upkeep = Upkeep(
        store,
        retention=Retention(answer_age=5.0),
        observer=SimpleNamespace(leases_lost=lost.append),
        expiry_seconds=0.001,
        retention_seconds=0.001,
    )
    upkeep.start()
    upkeep.start()
    assert store.all_called.wait(WAIT)
    upkeep.stop()
    upkeep.stop()
    assert set(lost) == {2}
