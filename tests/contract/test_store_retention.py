"""Retention: by age and by bytes, never what an unfinished job needs."""

from __future__ import annotations

import hashlib

import pytest
from contract.stores import (
    ANN,
    BEN,
    LIMITS,
    Home,
    answer,
    begin,
    claim_one,
    finish,
    graph,
    names,
    progress,
    put,
    spec,
    submission,
    submit,
    submit_batch,
    weights,
)
from nearchord_service.model.answer import Column, ElementType
from nearchord_service.model.errors import BatchUnknown, ContentUnknown
from nearchord_service.model.event import Reached
from nearchord_service.model.stage import Stage
from nearchord_service.store.port import Dropped, Limits, Query, Retention, Store

NOTHING = Dropped(0, 0, 0, 0)


def labels(store: Store) -> list[str]:
    return sorted(job.label for job in store.jobs(ANN, Query()).jobs)


def end_one(store: Store, label: str, size: int = 0) -> None:
    submit(store, spec(label=label))
    finish(store, claim_one(store), answer(columns=(Column("chosen", ElementType.UINT32, bytes(size)),)))


def test_without_limits_everything_stays(home: Home) -> None:
    store = home.open()
    end_one(store, "kept")
    home.clock.advance(1e9)
    assert store.retain(Retention()) == NOTHING
    assert labels(store) == ["kept"]


def test_ended_jobs_go_by_age(home: Home) -> None:
    store = home.open()
    end_one(store, "old")
    submit(store, spec(label="waiting"))
    home.clock.advance(100)
    end_one(store, "solving, at last done")
    store.cancel_job(ANN, submit(store, spec(label="young")).id)
    home.clock.advance(50)
    assert store.retain(Retention(answer_age=50.5)).jobs == 1
    assert "old" not in labels(store)
    assert len(labels(store)) == 3


def test_ended_jobs_go_by_bytes_oldest_first(home: Home) -> None:
    store = home.open()
    for i in range(4):
        end_one(store, f"job {i}", size=1000)
        home.clock.advance(1)
    assert store.retain(Retention(answer_bytes=10_000)).jobs == 0
    assert store.retain(Retention(answer_bytes=3_999)).jobs == 2
    assert labels(store) == ["job 2", "job 3"]
    assert store.retain(Retention(answer_bytes=0)).jobs == 2


def test_batch_and_request_go_with_the_last_job(home: Home) -> None:
    store = home.open()
    request = submission(spec(), spec(), batch=True)
    batch = store.submit(request, LIMITS).batch
    assert batch is not None
    finish(store, claim_one(store))
    home.clock.advance(10)
    assert store.retain(Retention(answer_age=5)).jobs == 1
    assert store.batch(ANN, batch.id).jobs == 1
    finish(store, claim_one(store))
    home.clock.advance(10)
    assert store.retain(Retention(answer_age=5)).jobs == 1
    with pytest.raises(BatchUnknown):
        store.batch(ANN, batch.id)
    assert store.submit(request, LIMITS).repeated is False


def test_many_jobs_go_in_one_round(home: Home) -> None:
    store = home.open()
    batch = submit_batch(store, *[spec()] * 1203)
    store.cancel_batch(ANN, batch.id)
    home.clock.advance(10)
    assert store.retain(Retention(event_age=5)).events == 1203
    assert store.retain(Retention(answer_age=5)).jobs == 1203
    assert store.retain(Retention(answer_age=5, event_age=5, answer_bytes=0)) == NOTHING


def test_events_go_but_the_last_one_stays_with_its_job(home: Home) -> None:
    store = home.open()
    done, open_job = submit(store), submit(store)
    finish(store, claim_one(store))
    lease = claim_one(store)
    store.record_progress([(lease.job.id, 1, progress())])
    before = store.job_events(ANN, open_job.id, 0, 9)
    home.clock.advance(10)
    assert store.retain(Retention(event_age=11)) == NOTHING
    assert store.retain(Retention(event_age=9)).events == 2
    (last,) = store.job_events(ANN, done.id, 0, 9)
    assert isinstance(last.news, Reached)
    assert last.news.stage is Stage.DONE
    assert last.sequence == store.job(ANN, done.id).sequence
    assert store.job_events(ANN, open_job.id, 0, 9) == before
    assert store.retain(Retention(event_age=9)) == NOTHING


def test_contents_go_by_age_of_last_use_unless_needed(home: Home) -> None:
    store = home.open()
    parts = (graph(1), weights(1), names(1))
    submit(store, spec(parts[0], weights_address=parts[1].address, names_address=parts[2].address, inline=parts))
    idle, used = put(store, graph(2).data), put(store, graph(3).data)
    home.clock.advance(100)
    store.cancel_job(ANN, submit(store, spec(used)).id)
    lease = claim_one(store)
    assert store.retain(Retention(content_age=50)).contents == 1
    with pytest.raises(ContentUnknown):
        store.content(ANN, idle)
    for address in (used, *(part.address for part in parts)):
        store.content(ANN, address)
    finish(store, lease)
    assert store.retain(Retention(content_age=50)).contents == 3
    assert store.content(ANN, used).address == used


def test_asking_to_upload_again_counts_as_use(home: Home) -> None:
    store = home.open()
    address = put(store, graph(1).data)
    home.clock.advance(100)
    put_again = store.begin_upload(ANN, address, store.content(ANN, address).kind, len(graph(1).data), 0, LIMITS)
    assert put_again == store.content(ANN, address)
    assert store.retain(Retention(content_age=50)).contents == 0


def test_contents_go_by_bytes_longest_unused_first(home: Home) -> None:
    """Only bytes that really become free count, and what a job needs is passed over."""
    store = home.open()
    size = 1 << 20
    data = [graph(i, padding=size).data for i in range(4)]
    addresses = []
    for each in data:
        addresses.append(put(store, each))
        home.clock.advance(1)
    put(store, data[1], owner=BEN)
    submit(store, spec(addresses[0]))
    assert store.retain(Retention(content_bytes=4 * len(data[0]))).contents == 0
    assert store.retain(Retention(content_bytes=3 * len(data[0]))).contents == 2
    with pytest.raises(ContentUnknown):
        store.content(ANN, addresses[1])
    with pytest.raises(ContentUnknown):
        store.content(ANN, addresses[2])
    assert store.content(BEN, addresses[1]).size_bytes == len(data[1])
    assert store.retain(Retention(content_bytes=0)).contents == 2
    lease = claim_one(store)
    assert (lease.graph.data or lease.graph.path.read_bytes()) == data[0]  # type: ignore[union-attr]


def test_uploads_that_nobody_continues_are_dropped(home: Home) -> None:
    store = home.open()
    stale, held = graph(1).data, graph(2).data
    upload = begin(store, stale)
    upload.write(stale[:5])
    upload.release()
    busy = begin(store, held)
    busy.write(held)
    home.clock.advance(86_400)
    assert store.retain(Retention()).uploads == 0
    home.clock.advance(1)
    assert store.retain(Retention()).uploads == 1
    assert store.upload_state(ANN, hashlib.sha256(stale).hexdigest()) == (0, False)
    busy.publish(lambda _: (1, 1))
    busy.release()


def test_what_retention_drops_no_longer_counts_against_quotas(home: Home) -> None:
    store = home.open()
    limits = Limits(unfinished_jobs=1, content_bytes=len(graph().data))
    for i in range(3):
        job = store.submit(submission(spec(graph(i))), limits).job
        store.cancel_job(ANN, job.id)
        home.clock.advance(10)
        assert store.retain(Retention(content_age=5)) == Dropped(0, 0, 1, 0)
