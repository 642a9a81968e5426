"""Events: one ascending sequence of numbers, cursors that miss nothing, hints after commits."""

from __future__ import annotations

import threading
from concurrent.futures import ThreadPoolExecutor

from contract.stores import (
    ANN,
    Home,
    answer,
    claim_one,
    finish,
    give_back,
    progress,
    spec,
    submit,
    submit_batch,
)
from nearchord_service.model.event import Event, Reached
from nearchord_service.model.stage import Stage
from nearchord_service.store.port import Change, Query


def test_numbers_ascend_over_all_jobs(home: Home) -> None:
    store = home.open()
    jobs = [submit(store), submit(store)]
    batch = submit_batch(store, spec(), spec())
    for lease in store.claim("host", 4, 45):
        store.record_progress([(lease.job.id, 1, progress())])
        finish(store, lease)
    found = [event for job in jobs for event in store.job_events(ANN, job.id, 0, 99)]
    found += store.batch_events(ANN, batch.id, 0, 99)
    assert len({event.sequence for event in found}) == len(found) == 12
    for job in store.jobs(ANN, Query()).jobs:
        numbers = [event.sequence for event in store.job_events(ANN, job.id, 0, 99)]
        assert numbers == sorted(numbers)
        assert numbers[-1] == job.sequence


def test_numbers_go_on_after_a_restart(home: Home) -> None:
    store = home.open()
    first = submit(store)
    finish(store, claim_one(store))
    last = store.job(ANN, first.id).sequence
    store.delete_job(ANN, first.id)
    assert submit(home.open()).sequence > last


def test_reading_goes_on_from_any_number(home: Home) -> None:
    store = home.open()
    batch = submit_batch(store, spec(), spec(), spec())
    submit(store)
    finish(store, claim_one(store))
    lease = claim_one(store)
    store.record_progress([(lease.job.id, 1, progress())])
    whole = store.batch_events(ANN, batch.id, 0, 99)
    assert len(whole) == 7
    for step in (1, 2, 3):
        after, read = 0, []
        while part := store.batch_events(ANN, batch.id, after, step):
            assert len(part) <= step
            read += part
            after = part[-1].sequence
        assert tuple(read) == whole
    of_job = store.job_events(ANN, lease.job.id, 0, 99)
    assert of_job == tuple(event for event in whole if event.job_id == lease.job.id)
    assert store.job_events(ANN, lease.job.id, of_job[0].sequence, 1) == of_job[1:2]
    assert store.job_events(ANN, lease.job.id, of_job[-1].sequence, 9) == ()


def test_cursors_miss_no_transition_under_way(home: Home) -> None:
    """A watcher that reads while several threads write sees every transition of every job, in order, once."""
    store = home.open()
    jobs, rounds = 40, 2
    batch = submit_batch(store, *[spec()] * jobs)
    seen: list[Event] = []
    failures: list[BaseException] = []

    def work() -> None:
        while leases := store.claim("host", 2, 45):
            for lease in leases:
                store.record_progress([(lease.job.id, lease.attempt, progress())])
                if lease.attempt < rounds:
                    give_back(store, lease, worker_lost=False)
                else:
                    finish(store, lease)

    def watch() -> None:
        after = 0
        while sum(isinstance(e.news, Reached) and e.news.stage is Stage.DONE for e in seen) < jobs:
            part = store.batch_events(ANN, batch.id, after, 7)
            seen.extend(part)
            after = part[-1].sequence if part else after

    with ThreadPoolExecutor(4) as pool:
        tasks = [pool.submit(watch), *(pool.submit(work) for _ in range(3))]
        failures = [failure for task in tasks if (failure := task.exception(timeout=120))]
    assert failures == []
    numbers = [event.sequence for event in seen]
    assert numbers == sorted(set(numbers))
    transitions = [event for event in seen if isinstance(event.news, Reached)]
    assert transitions == [e for e in store.batch_events(ANN, batch.id, 0, 9999) if isinstance(e.news, Reached)]
    assert len(transitions) == jobs * (1 + 2 * rounds)


def test_hints_name_what_changed(home: Home) -> None:
    store = home.open()
    told: list[Change] = []
    heard = threading.Event()

    def listen(change: Change) -> None:
        told.append(change)
        heard.set()

    end = store.subscribe(listen)

    def next_hint() -> Change:
        assert heard.wait(30)
        heard.clear()
        return told.pop()

    batch = submit_batch(store, spec())
    hint = next_hint()
    (job,) = store.jobs(ANN, Query()).jobs
    assert hint == Change(frozenset({job.id}), frozenset({batch.id}), work=True)
    lease = claim_one(store)
    assert next_hint() == Change(frozenset({job.id}), frozenset({batch.id}))
    store.record_progress([(job.id, 1, progress())])
    assert next_hint() == Change(frozenset({job.id}), frozenset({batch.id}))
    store.cancel_job(ANN, job.id)
    assert next_hint() == Change(cancels=frozenset({job.id}))
    finish(store, lease, answer())
    assert next_hint() == Change(frozenset({job.id}), frozenset({batch.id}))
    end()
    end()
    submit(store)
    finish(store, claim_one(store))
    assert told == []


def test_listener_that_fails_harms_nobody(home: Home) -> None:
    store = home.open()
    told: list[Change] = []
    heard = threading.Event()

    def fail(change: Change) -> None:
        raise RuntimeError("listener")

    def listen(change: Change) -> None:
        told.append(change)
        heard.set()

    store.subscribe(fail)
    store.subscribe(listen)
    job = submit(store)
    assert heard.wait(30)
    assert told[0].job_ids == {job.id}
    assert submit(store).sequence > job.sequence


def test_returned_job_is_hinted_as_work(home: Home) -> None:
    store = home.open()
    submit(store)
    lease = claim_one(store)
    told: list[Change] = []
    heard = threading.Event()

    def listen(change: Change) -> None:
        told.append(change)
        heard.set()

    store.subscribe(listen)
    give_back(store, lease)
    assert heard.wait(30)
    assert told[0].work
