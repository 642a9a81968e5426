"""Opening, closing, and one server for one set of data."""

from __future__ import annotations

import pytest
from contract.stores import ANN, LIMITS, Home, answer, claim_one, finish, spec, submission, submit
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.model.stage import Stage


def test_second_stop_is_harmless(home: Home) -> None:
    """The data can be opened again, and holds what was accepted."""
    store = home.open()
    job = submit(store)
    store.stop()
    store.stop()
    assert home.open().job(ANN, job.id) == job


def test_second_start_is_harmless(home: Home) -> None:
    store = home.open()
    job = submit(store)
    store.start()
    assert store.job(ANN, job.id) == job


def test_stopped_store_says_so(home: Home) -> None:
    store = home.open()
    job = submit(store)
    store.stop()
    for ask in (
        lambda: store.job(ANN, job.id),
        lambda: store.submit(submission(), LIMITS),
        lambda: store.claim("host", 1, 45),
        store.figures,
    ):
        with pytest.raises(StoreUnavailable, match="start the server"):
            ask()


def test_stopped_store_starts_again(home: Home) -> None:
    store = home.open()
    job = submit(store)
    store.stop()
    store.start()
    assert store.job(ANN, job.id) == job
    assert finish(store, claim_one(store))


def test_queued_operations_are_finished_by_stop(home: Home) -> None:
    store = home.open()
    for _ in range(20):
        submit(store)
    leases = store.claim("host", 20, 45)
    futures = [store.finish(lease.job.id, lease.attempt, answer()) for lease in leases]
    store.stop()
    assert all(future.result(timeout=0) for future in futures)
    store = home.open()
    assert {store.job(ANN, lease.job.id).stage for lease in leases} == {Stage.DONE}


def test_restart_changes_nothing(home: Home) -> None:
    store = home.open()
    jobs = [submit(store, spec(priority=i)).id for i in range(3)]
    finish(store, claim_one(store))
    claim_one(store)
    before = [(store.job(ANN, job), store.job_events(ANN, job, 0, 9)) for job in jobs]
    store = home.open()
    assert [(store.job(ANN, job), store.job_events(ANN, job, 0, 9)) for job in jobs] == before
