"""Leases: who may work on what, the fence of attempt numbers, and jobs whose workers are lost."""

from __future__ import annotations

import datetime as dt
import threading
from collections import Counter

import pytest
from contract.stores import (
    ANN,
    BEN,
    Home,
    answer,
    claim_one,
    finish,
    give_back,
    graph,
    progress,
    spec,
    submit,
    submit_batch,
    weights,
)
from nearchord_service.model.event import Progress
from nearchord_service.model.stage import Stage, Verdict
from nearchord_service.store.port import LOST_WORKERS_ALLOWED, Query, Renewal


def test_lease_carries_all_that_a_worker_needs(home: Home) -> None:
    store = home.open()
    parts = (graph(padding=1 << 20), weights())
    job = submit(store, spec(parts[0], weights_address=parts[1].address, inline=parts))
    home.clock.advance(3)
    lease = claim_one(store, "host", 45)
    assert lease.job == store.job(ANN, job.id)
    assert (lease.attempt, lease.lost_workers, lease.until) == (1, 0, home.clock.now + dt.timedelta(seconds=45))
    assert (lease.job.stage, lease.job.attempt, lease.job.started_at) == (Stage.SOLVING, 1, home.clock.now)
    assert (lease.graph.data or lease.graph.path.read_bytes()) == parts[0].data  # type: ignore[union-attr]
    assert lease.weights is not None
    assert lease.weights.data == parts[1].data
    submit(store)
    assert claim_one(store).weights is None


def test_claim_takes_high_priority_first_then_the_oldest(home: Home) -> None:
    store = home.open()
    made = [submit(store, spec(priority=priority)).id for priority in (0, 5, -3, 5, 0)]
    order = [lease.job.id for lease in store.claim("host", 3, 45)] + [
        lease.job.id for lease in store.claim("host", 9, 45)
    ]
    assert order == [made[i] for i in (1, 3, 0, 4, 2)]
    assert store.claim("host", 9, 45) == ()


def test_returned_job_keeps_its_place(home: Home) -> None:
    store = home.open()
    first, second = submit(store), submit(store)
    give_back(store, claim_one(store), worker_lost=False)
    assert [lease.job.id for lease in store.claim("host", 2, 45)] == [first.id, second.id]


def test_overdue_job_is_not_claimed_and_expires(home: Home) -> None:
    store = home.open()
    soon = home.clock.now + dt.timedelta(seconds=10)
    late, punctual = submit(store, spec(not_after=soon)), submit(store, spec(not_after=soon, priority=1))
    home.clock.advance(9.9)
    assert store.expire_overdue() == 0
    assert claim_one(store).job.id == punctual.id
    home.clock.advance(0.1)
    assert store.claim("host", 9, 45) == ()
    assert store.expire_overdue() == 1
    assert store.expire_overdue() == 0
    job = store.job(ANN, late.id)
    assert (job.stage, job.verdict, job.finished_at) == (Stage.DONE, Verdict.EXPIRED, home.clock.now)
    assert soon.isoformat() in job.reason
    assert store.answer(ANN, late.id)[1].verdict is Verdict.EXPIRED
    assert store.job(ANN, punctual.id).stage is Stage.SOLVING


def test_job_that_was_started_in_time_does_not_expire(home: Home) -> None:
    """A lost worker or a restart after the start-by time costs the job nothing: it had been started."""
    store = home.open()
    job = submit(store, spec(not_after=home.clock.now + dt.timedelta(seconds=10)))
    lease = claim_one(store)
    home.clock.advance(11)
    give_back(store, lease)
    assert store.expire_overdue() == 0
    assert claim_one(store).job.id == job.id


def test_zombie_changes_nothing(home: Home) -> None:
    """Whatever an earlier attempt still sends has no effect, before and after the later attempt ends."""
    store = home.open()
    job = submit(store)
    zombie = claim_one(store, seconds=45)
    home.clock.advance(46)
    assert store.expire_leases() == 1
    successor = claim_one(store, "other")

    def haunt() -> None:
        before = store.job(ANN, job.id), store.job_events(ANN, job.id, 0, 99)
        assert not finish(store, zombie, answer(Verdict.INFEASIBLE))
        assert not give_back(store, zombie)
        store.record_progress([(job.id, zombie.attempt, progress())])
        key = (job.id, zombie.attempt)
        assert store.renew("host", [key], 45) == {key: Renewal(held=False, cancel_requested=False)}
        assert (store.job(ANN, job.id), store.job_events(ANN, job.id, 0, 99)) == before

    haunt()
    assert finish(store, successor)
    haunt()
    assert not finish(store, successor)
    assert store.answer(ANN, job.id)[1] == answer()


def test_late_answer_counts_while_nobody_else_holds_the_job(home: Home) -> None:
    store = home.open()
    job = submit(store)
    lease = claim_one(store, seconds=1)
    home.clock.advance(100)
    assert finish(store, lease)
    assert store.expire_leases() == 0
    assert store.job(ANN, job.id).verdict is Verdict.PROVEN


def test_renewed_lease_lasts(home: Home) -> None:
    store = home.open()
    job = submit(store)
    lease = claim_one(store, seconds=45)
    key = (job.id, lease.attempt)
    home.clock.advance(40)
    assert store.renew("host", [key], 45) == {key: Renewal(held=True, cancel_requested=False)}
    home.clock.advance(44)
    assert store.expire_leases() == 0
    home.clock.advance(1)
    assert store.expire_leases() == 1
    assert not store.renew("host", [key], 45)[key].held


def test_only_the_holder_renews(home: Home) -> None:
    store = home.open()
    job = submit(store)
    claim_one(store, "host")
    assert not store.renew("other", [(job.id, 1)], 45)[job.id, 1].held
    assert store.renew("host", [("0" * 32, 1)], 45)["0" * 32, 1] == Renewal(held=False, cancel_requested=False)
    assert store.renew("host", [], 45) == {}


@pytest.mark.parametrize("expired", [False, True], ids=["given back", "lease ran out"])
def test_job_that_loses_too_many_workers_is_broken(home: Home, expired: bool) -> None:
    store = home.open()
    job = submit(store)
    for lost in range(LOST_WORKERS_ALLOWED):
        lease = claim_one(store, seconds=5)
        assert (lease.attempt, lease.lost_workers) == (lost + 1, lost)
        if expired:
            home.clock.advance(6)
            assert store.expire_leases() == 1
        else:
            assert give_back(store, lease, "killed by signal 9")
    broken = store.job(ANN, job.id)
    assert (broken.stage, broken.verdict) == (Stage.DONE, Verdict.BROKEN)
    assert f"worker {LOST_WORKERS_ALLOWED} of {LOST_WORKERS_ALLOWED}" in broken.reason
    assert ("ran out" if expired else "killed by signal 9") in broken.reason
    assert store.answer(ANN, job.id)[1].reason == broken.reason


def test_job_given_back_in_order_is_not_held_against_it(home: Home) -> None:
    store = home.open()
    submit(store)
    for _ in range(2 * LOST_WORKERS_ALLOWED):
        give_back(store, claim_one(store), "the server shuts down", worker_lost=False)
    assert claim_one(store).lost_workers == 0


@pytest.mark.parametrize("how", ["given back", "lost", "lease ran out", "reclaimed"])
def test_unanswered_job_under_cancel_is_cancelled(home: Home, how: str) -> None:
    store = home.open()
    job = submit(store)
    lease = claim_one(store, seconds=5)
    store.cancel_job(ANN, job.id)
    if how == "lease ran out":
        home.clock.advance(6)
        assert store.expire_leases() == 1
    elif how == "reclaimed":
        assert store.reclaim("host") == 1
    else:
        assert give_back(store, lease, worker_lost=how == "lost")
    ended = store.job(ANN, job.id)
    assert (ended.verdict, ended.reason) == (Verdict.CANCELLED, "withdrawn by the client")


def test_restarted_server_takes_back_only_its_own_leases(home: Home) -> None:
    store = home.open()
    mine, others = submit(store), submit(store)
    claim_one(store, "host")
    claim_one(store, "other")
    store = home.open()
    assert store.reclaim("host") == 1
    assert store.reclaim("host") == 0
    assert store.job(ANN, others.id).stage is Stage.SOLVING
    lease = claim_one(store)
    assert (lease.job.id, lease.attempt, lease.lost_workers) == (mine.id, 2, 0)


@pytest.mark.parametrize("verdict", [Verdict.EXPIRED])
def test_worker_cannot_give_a_verdict_that_is_not_its_own(home: Home, verdict: Verdict) -> None:
    store = home.open()
    job = submit(store)
    lease = claim_one(store)
    with pytest.raises(ValueError, match="no transition"):
        finish(store, lease, answer(verdict))
    assert store.job(ANN, job.id).stage is Stage.SOLVING


def test_only_the_latest_progress_is_kept_until_the_job_ends(home: Home) -> None:
    store = home.open()
    batch = submit_batch(store, spec(), spec())
    first, second = store.claim("host", 2, 45)
    store.record_progress([(first.job.id, 1, progress(0.25)), (second.job.id, 1, progress(0.75))])
    home.clock.advance(1)
    store.record_progress([(first.job.id, 1, progress(0.5)), ("0" * 32, 1, progress())])
    told = store.job_events(ANN, first.job.id, 0, 10)
    assert [event.news for event in told if isinstance(event.news, Progress)] == [progress(0.5)]
    assert (told[-1].attempt, told[-1].time) == (1, home.clock.now)
    assert store.job(ANN, first.job.id).sequence == told[-1].sequence
    of_batch = store.batch_events(ANN, batch.id, told[0].sequence, 10)
    assert [e.news.fraction_done for e in of_batch if isinstance(e.news, Progress)] == [0.75, 0.5]
    finish(store, first)
    give_back(store, second)
    left = store.batch_events(ANN, batch.id, 0, 10)
    assert [event for event in left if isinstance(event.news, Progress)] == []


def test_every_job_is_claimed_once_by_many_threads(home: Home) -> None:
    """Several submitters, several workers: each job is claimed by one, and every answer is recorded once."""
    store = home.open()
    claimed: Counter[str] = Counter()
    finished: list[bool] = []
    submitted = threading.Event()
    failures: list[BaseException] = []

    def guard(body: object) -> threading.Thread:
        def run() -> None:
            try:
                body()  # type: ignore[operator]
            except BaseException as failure:
                failures.append(failure)

        return threading.Thread(target=run)

    def submit_some() -> None:
        for i in range(25):
            submit_batch(store, spec(graph(i)), spec(graph(i + 1)), owner=(ANN, BEN)[i % 2])

    def work() -> None:
        while True:
            over = submitted.is_set()
            leases = store.claim(threading.current_thread().name, 3, 45)
            for lease in leases:
                claimed[lease.job.id] += 1
            results = [store.finish(lease.job.id, lease.attempt, answer()) for lease in leases]
            finished.extend(future.result() for future in results)
            if over and not leases:
                return

    submitters, workers = [guard(submit_some) for _ in range(4)], [guard(work) for _ in range(4)]
    for thread in submitters + workers:
        thread.start()
    for thread in submitters:
        thread.join()
    submitted.set()
    for thread in workers:
        thread.join()
    assert failures == []
    assert len(claimed) == 200
    assert set(claimed.values()) == {1}
    assert finished == [True] * 200
    assert store.figures().waiting == store.figures().solving == 0


def test_figures_tell_the_queue(home: Home) -> None:
    store = home.open()
    assert (store.figures().waiting, store.figures().oldest_waiting_seconds) == (0, 0.0)
    submit(store)
    home.clock.advance(2)
    submit(store, spec(priority=3))
    submit(store)
    home.clock.advance(5)
    claim_one(store)
    figures = store.figures()
    assert (figures.waiting, figures.solving, figures.oldest_waiting_seconds) == (2, 1, 7.0)
    assert len(store.jobs(ANN, Query(stage=Stage.WAITING)).jobs) == 2
