"""Watching: events of a job or a batch from a number on, to the end."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import grpc
from nearchord.v1 import job_pb2, job_service_pb2_grpc
from nearchord.v1 import job_service_pb2 as pb
from nearchord_service.model.event import Phase, Progress
from nearchord_service.store.sql import SqlStore
from unit.api.serving import DEADLINE, Serving, a_spec, wait_until

WAITING, SOLVING, DONE = job_pb2.STAGE_WAITING, job_pb2.STAGE_SOLVING, job_pb2.STAGE_DONE


def watch_job(served: Serving, job_id: str, after: int = 0) -> Any:
    request = pb.WatchJobRequest(job_id=job_id, after_sequence=after)
    return (response.event for response in served.jobs.WatchJob(request, timeout=DEADLINE))


def watch_batch(served: Serving, batch_id: str, after: int = 0) -> Any:
    request = pb.WatchBatchRequest(batch_id=batch_id, after_sequence=after)
    return (response.event for response in served.jobs.WatchBatch(request, timeout=DEADLINE))


def test_a_watch_tells_the_life_of_a_job_and_ends(served: Serving) -> None:
    job = served.submit()
    events = watch_job(served, job.id)
    first = next(events)
    assert (first.job_id, first.transition.stage, first.attempt) == (job.id, WAITING, 0)
    (lease,) = served.claim()
    second = next(events)
    assert (second.transition.stage, second.attempt) == (SOLVING, 1)
    served.store.record_progress([(job.id, 1, Progress(Phase.SWEEP, 0.5, 1.25, fill=3, bags=7, incumbent=9))])
    third = next(events)
    assert third.WhichOneof("kind") == "progress"
    assert (third.progress.phase, third.progress.fraction_done, third.progress.fill) == (job_pb2.PHASE_SWEEP, 0.5, 3)
    assert (third.progress.incumbent, third.progress.seconds) == (9, 1.25)
    assert not third.progress.HasField("bound")
    served.finish(lease)
    (last,) = events
    assert (last.transition.stage, last.transition.verdict) == (DONE, job_pb2.VERDICT_PROVEN)
    assert last.transition.reason == "value and bound meet"
    assert first.sequence < second.sequence < third.sequence < last.sequence


def test_a_watch_goes_on_after_a_number(served: Serving) -> None:
    job = served.submit()
    (lease,) = served.claim()
    served.finish(lease)
    events = list(watch_job(served, job.id))
    for at, event in enumerate(events):
        assert list(watch_job(served, job.id, event.sequence)) == events[at + 1 :]


def test_a_batch_is_watched_to_its_last_job(served: Serving) -> None:
    batch = served.submit_batch(a_spec() for _ in range(3)).batch
    events = watch_batch(served, batch.id)
    assert [next(events).batch_index for _ in range(3)] == [0, 1, 2]
    leases = served.claim(3)
    for lease in reversed(leases):
        served.finish(lease)
    rest = list(events)
    assert [e.batch_index for e in rest if e.transition.stage == DONE] == [2, 1, 0]
    assert [e.sequence for e in rest] == sorted(e.sequence for e in rest)
    assert list(watch_batch(served, batch.id, rest[-1].sequence)) == []


def test_jobs_cancelled_with_their_batch_end_its_watch(served: Serving) -> None:
    batch = served.submit_batch(a_spec() for _ in range(2)).batch
    events = watch_batch(served, batch.id)
    next(events)
    served.jobs.CancelBatch(pb.CancelBatchRequest(batch_id=batch.id))
    assert [e.transition.verdict for e in events][-2:] == [job_pb2.VERDICT_CANCELLED] * 2


class CountingStore(SqlStore):
    """Counts the rows that watchers read."""

    rows_read = 0

    def batch_events(self, owner: str, batch_id: str, after: int, limit: int) -> Any:
        rows = super().batch_events(owner, batch_id, after, limit)
        self.rows_read += len(rows)
        return rows


def test_a_watcher_that_never_reads_costs_bounded_memory(serve: Callable[..., Serving]) -> None:
    """What a silent caller has not taken stays in the store, but for what the connection itself holds."""
    served = serve(CountingStore)
    store = served.store
    assert isinstance(store, CountingStore)
    batch = served.submit_batch(a_spec() for _ in range(20_000)).batch
    # A caller with a window of fixed size; by default it would grow, and what fills it is the caller's memory.
    with grpc.insecure_channel(f"127.0.0.1:{served.port}", options=(("grpc.http2.bdp_probe", 0),)) as channel:
        call = job_service_pb2_grpc.JobServiceStub(channel).WatchBatch(pb.WatchBatchRequest(batch_id=batch.id))
        seen: list[int] = []

        def stands() -> bool:
            seen.append(store.rows_read)
            return seen[-1] > 0 and len(seen) > 40 and seen[-1] == seen[-40]

        wait_until(stands)
        assert store.rows_read < 3_000
        assert served.metrics.load().watch_streams == 1
        call.cancel()
        wait_until(lambda: served.metrics.load().watch_streams == 0)
