"""Watching and reading: events from a number on, answers as columns, live figures, and what a drain does to them."""

from __future__ import annotations

import struct
import threading
from collections.abc import Callable
from typing import Any

import grpc
import pytest
from grpc_health.v1 import health_pb2, health_pb2_grpc
from grpc_reflection.v1alpha import reflection_pb2, reflection_pb2_grpc
from nearchord.v1 import answer_pb2, job_pb2, job_service_pb2_grpc, load_service_pb2
from nearchord.v1 import job_service_pb2 as pb
from nearchord_service.model.answer import Column, ElementType
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.model.event import Phase, Progress
from nearchord_service.model.stage import Verdict
from nearchord_service.settings import Address
from nearchord_service.store.sql import SqlStore
from unit.api.serving import DEADLINE, Serving, a_spec, an_answer, failure, wait_until

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


# Answers


def parts(responses: Any) -> list[answer_pb2.AnswerPart]:
    return [response.part for response in responses]


def test_an_answer_is_a_head_and_its_columns(served: Serving) -> None:
    spec = a_spec(label="north")
    spec.budget.fill = 4
    spec.input.names_content = b"a\nb\nc\n"
    job = served.submit(spec)
    found = failure(lambda: served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id)))
    assert (*found.summary, found.others) == ("FAILED_PRECONDITION", "JOB_NOT_DONE", (job.id,))
    (lease,) = served.claim()
    answer = an_answer(fill=1, fill_lower_bound=0, phase_seconds=((Phase.READ, 0.1), (Phase.SWEEP, 0.15)))
    served.finish(lease, answer)
    head, column = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id)))
    assert (head.head.job_id, head.head.label, head.head.verdict) == (job.id, "north", job_pb2.VERDICT_PROVEN)
    assert (head.head.value.numerator, head.head.value.denominator) == (1, 1)
    assert (head.head.fill, head.head.fill_lower_bound, head.head.HasField("states")) == (1, 0, False)
    assert (head.head.proof, head.head.vertices) == (answer_pb2.PROOF_KIND_SEARCH, 3)
    assert head.head.names_address == job.names_address
    origin = head.head.provenance
    assert (origin.graph_address, origin.weights_address) == (job.graph_address, "")
    assert (origin.solver_version, origin.attempt, origin.budget.fill, origin.seconds) == ("4.5.6", 1, 4, 0.25)
    assert [(p.phase, p.seconds) for p in origin.phases] == [(job_pb2.PHASE_READ, 0.1), (job_pb2.PHASE_SWEEP, 0.15)]
    assert origin.wait_seconds >= 0
    assert origin.HasField("finished_at")
    assert [(c.name, c.type, c.length) for c in head.head.columns] == [("chosen", answer_pb2.ELEMENT_TYPE_UINT32, 1)]
    assert (column.column.name, column.column.offset, column.column.data) == ("chosen", 0, struct.pack("<I", 1))


def test_long_columns_come_in_pieces_of_whole_elements(served: Serving) -> None:
    job = served.submit()
    (lease,) = served.claim()
    columns = (
        Column("chosen", ElementType.UINT32, bytes(range(256)) * 10_000),
        Column("empty", ElementType.UINT32, b""),
        Column("price", ElementType.INT64, bytes(range(255, -1, -1)) * 5_000),
    )
    served.finish(lease, an_answer(columns=columns))
    head, *chunks = (part for part in parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id))))
    assert [(c.name, c.length) for c in head.head.columns] == [("chosen", 640_000), ("empty", 0), ("price", 160_000)]
    joined: dict[str, bytes] = {"empty": b""}
    for chunk in (c.column for c in chunks):
        size = 8 if chunk.name == "price" else 4
        assert chunk.offset * size == len(joined.setdefault(chunk.name, b""))
        assert len(chunk.data) <= 2**20
        joined[chunk.name] += chunk.data
    assert joined == {column.name: column.data for column in columns}


def heads(served: Serving, batch_id: str, **options: Any) -> Any:
    request = pb.ReadBatchAnswersRequest(batch_id=batch_id, **options)
    responses = served.jobs.ReadBatchAnswers(request, timeout=DEADLINE)
    return (response.part.head for response in responses if response.part.HasField("head"))


def test_answers_of_a_batch_come_by_position(served: Serving) -> None:
    """Without waiting, jobs that have not ended are left out; the stream can begin after any position."""
    batch = served.submit_batch(a_spec() for _ in range(40)).batch
    for lease in reversed(served.claim(40)):
        if lease.job.batch_index != 7:
            served.finish(lease, an_answer([lease.job.batch_index % 3]))
    indices = [i for i in range(40) if i != 7]
    assert [head.batch_index for head in heads(served, batch.id)] == indices
    assert [head.batch_index for head in heads(served, batch.id, after_index=0)] == indices[1:]
    assert [head.batch_index for head in heads(served, batch.id, after_index=38)] == [39]
    assert list(heads(served, batch.id, after_index=39)) == []


def test_reading_answers_can_wait_for_each_job(served: Serving) -> None:
    batch = served.submit_batch(a_spec() for _ in range(6)).batch
    leases = served.claim(6)
    found = heads(served, batch.id, wait=True)
    for lease in (leases[0], leases[2], leases[1]):
        served.finish(lease)
    assert [next(found).batch_index for _ in range(3)] == [0, 1, 2]
    for lease in leases[:2:-1]:
        served.finish(lease)
    assert [head.batch_index for head in found] == [3, 4, 5]


def test_a_cancelled_job_has_an_answer_without_columns(served: Serving) -> None:
    job = served.submit()
    served.jobs.CancelJob(pb.CancelJobRequest(job_id=job.id))
    (head,) = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id)))
    assert (head.head.verdict, head.head.HasField("value")) == (job_pb2.VERDICT_CANCELLED, False)
    assert head.head.reason
    assert head.head.provenance.attempt == 0


# Figures


def test_the_server_says_what_it_can_do(served: Serving) -> None:
    found = served.load.GetServer(load_service_pb2.GetServerRequest())
    assert (found.version, found.solver_version) == ("1.2.3", "4.5.6")
    assert list(found.questions) == ["independent-set", "vertex-cover"]
    assert (found.default_budget.states, found.default_budget.seconds) == (10**7, 60.0)
    assert not found.default_budget.HasField("fill")
    assert (found.largest_budget.states, found.largest_budget.HasField("memory_bytes")) == (10**9, False)
    assert (found.inline_bytes, found.piece_bytes, found.content_bytes) == (4_096, 2**20, 2**24)
    assert (found.batch_jobs, found.unfinished_jobs) == (200, 200_000)


def test_live_figures_are_those_of_the_metrics(served: Serving) -> None:
    served.submit_batch(a_spec() for _ in range(4))
    first, _ = served.claim(2)
    answer = an_answer(seconds=0.75)
    served.finish(first, answer)
    served.metrics.job_finished(first.job, answer)
    responses = served.load.WatchLoad(load_service_pb2.WatchLoadRequest(interval_seconds=0.2), timeout=DEADLINE)
    found = next(responses)
    figure = served.metrics.registry.get_sample_value
    assert found.waiting == figure("nearchord_jobs", {"stage": "WAITING"}) == 2
    assert found.solving == figure("nearchord_jobs", {"stage": "SOLVING"}) == 1
    assert found.oldest_waiting_seconds > 0
    assert (found.slots.idle, found.slots.warm_fraction) == (2, 1.0)
    assert found.submitted == figure("nearchord_jobs_submitted_total", {"question": "independent-set"}) == 4
    labels = {"question": "independent-set", "verdict": "PROVEN"}
    assert found.finished == figure("nearchord_jobs_finished_total", labels) == 1
    (line,) = found.questions
    assert (line.question, line.verdict, line.finished) == ("independent-set", job_pb2.VERDICT_PROVEN, 1)
    assert line.seconds_p50 == line.seconds_p99 == 0.75
    assert next(responses).time.ToNanoseconds() > found.time.ToNanoseconds()
    responses.cancel()


@pytest.mark.parametrize("interval", [0.1, -1.0, 61.0, float("nan"), float("inf")])
def test_an_interval_has_bounds(served: Serving, interval: float) -> None:
    request = load_service_pb2.WatchLoadRequest(interval_seconds=interval)
    found = failure(lambda: served.load.WatchLoad(request))
    assert found.fields[0][0] == "interval_seconds"


def test_calls_are_counted_by_method_and_code(served: Serving) -> None:
    served.submit()
    failure(lambda: served.jobs.GetJob(pb.GetJobRequest(job_id="x")))
    figure = served.metrics.registry.get_sample_value

    def counted(method: str, code: str) -> bool:
        return figure("nearchord_calls_total", {"method": method, "code": code}) == 1

    wait_until(lambda: counted("JobService/SubmitJob", "OK"))
    wait_until(lambda: counted("JobService/GetJob", "NOT_FOUND"))
    assert figure("nearchord_call_seconds_count", {"method": "JobService/SubmitJob"}) == 1


# Health, reflection, draining, defects


def test_health_is_told_by_service(served: Serving) -> None:
    stub = health_pb2_grpc.HealthStub(served.channel)
    for name in ("", "nearchord.v1.GraphService", "nearchord.v1.JobService", "nearchord.v1.LoadService"):
        found = stub.Check(health_pb2.HealthCheckRequest(service=name))
        assert found.status == health_pb2.HealthCheckResponse.SERVING
    with pytest.raises(grpc.RpcError) as caught:
        stub.Check(health_pb2.HealthCheckRequest(service="nobody"))
    assert caught.value.code() is grpc.StatusCode.NOT_FOUND


def reflected(served: Serving) -> set[str]:
    stub = reflection_pb2_grpc.ServerReflectionStub(served.channel)
    request = reflection_pb2.ServerReflectionRequest(list_services="")
    (response,) = stub.ServerReflectionInfo(iter([request]))
    return {service.name for service in response.list_services_response.service}


def test_services_are_described(served: Serving) -> None:
    assert {"nearchord.v1.GraphService", "nearchord.v1.JobService", "nearchord.v1.LoadService"} <= reflected(served)


def test_descriptions_can_be_switched_off(serve: Callable[..., Serving]) -> None:
    with pytest.raises(grpc.RpcError) as caught:
        reflected(serve(reflection=False))
    assert caught.value.code() is grpc.StatusCode.UNIMPLEMENTED


def test_a_drain_sends_watchers_away_with_a_hint(served: Serving) -> None:
    """Watches end with UNAVAILABLE and DRAINING after all that is known; health says NOT_SERVING before."""
    job = served.submit()
    batch = served.submit_batch([a_spec()]).batch
    health = health_pb2_grpc.HealthStub(served.channel).Watch(health_pb2.HealthCheckRequest())
    assert next(health).status == health_pb2.HealthCheckResponse.SERVING
    streams = [
        served.jobs.WatchJob(pb.WatchJobRequest(job_id=job.id)),
        served.jobs.WatchBatch(pb.WatchBatchRequest(batch_id=batch.id)),
        served.load.WatchLoad(load_service_pb2.WatchLoadRequest(interval_seconds=60)),
    ]
    for stream in streams:
        next(stream)
    streams.append(served.jobs.ReadBatchAnswers(pb.ReadBatchAnswersRequest(batch_id=batch.id, wait=True)))
    figure = served.metrics.registry.get_sample_value
    wait_until(lambda: figure("nearchord_watch_streams") == 2)
    drain = threading.Thread(target=served.drain, args=(1.0,))
    drain.start()
    assert next(health).status == health_pb2.HealthCheckResponse.NOT_SERVING
    for stream in streams:
        found = failure(lambda stream=stream: stream)
        assert found.summary == ("UNAVAILABLE", "DRAINING")
        assert found.retry_seconds == 1.0
    health.cancel()
    drain.join(DEADLINE)
    assert not drain.is_alive()


def test_a_second_stop_is_harmless(served: Serving) -> None:
    served.drain()
    served.drain()


class FailingStore(SqlStore):
    """Fails in ways a test chooses."""

    fault: Exception = RuntimeError("the secret inside")

    def job(self, owner: str, job_id: str) -> Any:
        raise self.fault


def test_a_defect_is_logged_and_told_without_details(
    serve: Callable[..., Serving], caplog: pytest.LogCaptureFixture
) -> None:
    served = serve(FailingStore)
    found = failure(lambda: served.jobs.GetJob(pb.GetJobRequest(job_id="x")))
    assert found.summary == ("INTERNAL", "INTERNAL")
    assert "secret" not in found.message
    assert any("JobService/GetJob failed" in r.message and r.exc_info for r in caplog.records)


def test_a_store_that_fails_is_unavailable(serve: Callable[..., Serving], monkeypatch: pytest.MonkeyPatch) -> None:
    served = serve(FailingStore)
    monkeypatch.setattr(served.store, "fault", StoreUnavailable("the disk is full; free some"))
    found = failure(lambda: served.jobs.GetJob(pb.GetJobRequest(job_id="x")))
    assert found.summary == ("UNAVAILABLE", "STORE_UNAVAILABLE")
    assert found.message == "the disk is full; free some"
    assert found.retry_seconds == 1.0


def test_a_port_has_one_server(served: Serving, serve: Callable[..., Serving]) -> None:
    with pytest.raises(OSError, match=f"cannot listen on 127.0.0.1:{served.port}"):
        serve(listen=Address("127.0.0.1", served.port))


def test_verdicts_without_values_are_told(served: Serving) -> None:
    job = served.submit()
    (lease,) = served.claim()
    served.finish(
        lease, an_answer(verdict=Verdict.INFEASIBLE, reason="0 and 1 are adjacent", value=None, bound=None, columns=())
    )
    (head,) = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id)))
    assert head.head.verdict == job_pb2.VERDICT_INFEASIBLE
    assert not head.head.HasField("bound")
