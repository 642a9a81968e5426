"""LoadService: what the server can do, and live figures that are those of the metrics."""

from __future__ import annotations

import pytest
from nearchord.v1 import job_pb2, load_service_pb2
from nearchord.v1 import job_service_pb2 as pb
from nearchord_service.model.stage import Verdict
from unit.api.serving import DEADLINE, Serving, a_spec, an_answer, failure, wait_until


def test_the_server_says_what_it_can_do(served: Serving) -> None:
    found = served.load.GetServer(load_service_pb2.GetServerRequest())
    assert (found.version, found.solver_version) == ("1.2.3", "4.5.6")
    assert list(found.questions) == [
        "independent-set",
        "vertex-cover",
        "clique",
        "colourable-subgraph",
        "induced-forest",
        "colouring",
        "fractional-colouring",
        "fill",
        "structure",
    ]
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


def test_every_end_is_counted_once_whoever_brings_it_about(served: Serving) -> None:
    """Withdrawn jobs never reach a worker and count all the same; a repeated cancel changes nothing."""
    job = served.submit()
    batch = served.submit_batch(a_spec() for _ in range(2)).batch
    for _ in range(2):
        served.jobs.CancelJob(pb.CancelJobRequest(job_id=job.id))
        served.jobs.CancelBatch(pb.CancelBatchRequest(batch_id=batch.id))
    load = served.metrics.load()
    assert (load.submitted, load.finished) == (3, 3)
    assert [(line.verdict, line.finished) for line in load.questions] == [(Verdict.CANCELLED, 3)]
