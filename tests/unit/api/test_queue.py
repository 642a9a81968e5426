"""The queue as callers see it: listings, cancels, deletes, and what is unknown."""

from __future__ import annotations

import struct
from collections.abc import Callable

import pytest
from nearchord.v1 import content_pb2, job_pb2
from nearchord.v1 import job_service_pb2 as pb
from unit.api.serving import Serving, a_spec, failure


def test_listings_go_on_page_by_page(served: Serving) -> None:
    for i in range(5):
        served.submit(a_spec(label="even" if i % 2 == 0 else "odd"), request_id=f"r{i}")
    found, token, pages = [], "", 0
    while True:
        page = served.jobs.ListJobs(pb.ListJobsRequest(page_size=2, page_token=token))
        found += [job.id for job in page.jobs]
        token, pages = page.next_page_token, pages + 1
        if not token:
            break
    assert (len(set(found)), pages) == (5, 3)
    even = served.jobs.ListJobs(pb.ListJobsRequest(label="even")).jobs
    assert [job.id for job in even] == [found[0], found[2], found[4]]
    assert not served.jobs.ListJobs(pb.ListJobsRequest(stage=job_pb2.STAGE_DONE)).jobs
    assert len(served.jobs.ListJobs(pb.ListJobsRequest(stage=job_pb2.STAGE_WAITING)).jobs) == 5


@pytest.mark.parametrize(
    ("request_", "field"),
    [
        (pb.ListJobsRequest(page_size=-1), "page_size"),
        (pb.ListJobsRequest(page_size=1_001), "page_size"),
        (pb.ListJobsRequest(stage=9), "stage"),  # type: ignore[arg-type]
        (pb.ListJobsRequest(page_token="no token"), "page_token"),
    ],
)
def test_a_wrong_listing_is_named(served: Serving, request_: pb.ListJobsRequest, field: str) -> None:
    found = failure(lambda: served.jobs.ListJobs(request_))
    assert found.summary == ("INVALID_ARGUMENT", "FIELD_INVALID")
    assert found.fields[0][0] == field


def test_a_page_fits_a_message_whatever_its_jobs_pin(serve: Callable[..., Serving]) -> None:
    served = serve()
    n = 120_000
    address = served.upload(struct.pack("<IQ", n, 0) + bytes(8 * (n + 1))).address
    spec = a_spec(input=content_pb2.GraphInput(graph_address=address))
    spec.question.independent_set.must.extend(range(n))
    served.submit_batch([spec] * 20)
    found, token = 0, ""
    while True:
        page = served.jobs.ListJobs(pb.ListJobsRequest(page_size=20, page_token=token))
        found, token = found + len(page.jobs), page.next_page_token
        assert page.ByteSize() < 4 * 2**20
        if not token:
            break
    assert found == 20


def test_a_waiting_job_is_cancelled_at_once(served: Serving) -> None:
    job = served.submit()
    for _ in range(2):
        found = served.jobs.CancelJob(pb.CancelJobRequest(job_id=job.id)).job
        assert (found.stage, found.verdict) == (job_pb2.STAGE_DONE, job_pb2.VERDICT_CANCELLED)
        assert found.reason
        assert found.HasField("finished_at")


def test_a_solving_job_is_marked_for_cancelling(served: Serving) -> None:
    job = served.submit()
    served.claim()
    found = served.jobs.CancelJob(pb.CancelJobRequest(job_id=job.id)).job
    assert (found.stage, found.cancel_requested) == (job_pb2.STAGE_SOLVING, True)


def test_a_batch_is_cancelled_as_a_whole(served: Serving) -> None:
    batch = served.submit_batch(a_spec() for _ in range(3)).batch
    served.claim()
    found = served.jobs.CancelBatch(pb.CancelBatchRequest(batch_id=batch.id)).batch
    assert (found.waiting, found.solving, found.done) == (0, 1, 2)


def test_only_what_has_ended_is_deleted(served: Serving) -> None:
    job = served.submit()
    batch = served.submit_batch([a_spec()]).batch
    found = failure(lambda: served.jobs.DeleteJob(pb.DeleteJobRequest(job_id=job.id)))
    assert (*found.summary, found.others) == ("FAILED_PRECONDITION", "JOB_NOT_DONE", (job.id,))
    found = failure(lambda: served.jobs.DeleteBatch(pb.DeleteBatchRequest(batch_id=batch.id)))
    assert (*found.summary, found.others) == ("FAILED_PRECONDITION", "BATCH_NOT_DONE", (batch.id,))
    for lease in served.claim(2):
        served.finish(lease)
    assert served.jobs.DeleteJob(pb.DeleteJobRequest(job_id=job.id)).HasField("deleted_at")
    assert served.jobs.DeleteBatch(pb.DeleteBatchRequest(batch_id=batch.id)).HasField("deleted_at")
    assert not served.jobs.ListJobs(pb.ListJobsRequest()).jobs


@pytest.mark.parametrize("name", ["", "nobody", "0" * 32, "x" * 100_000])
def test_unknown_jobs_and_batches_are_not_found(served: Serving, name: str) -> None:
    jobs, job, batch = served.jobs, ("NOT_FOUND", "JOB_UNKNOWN"), ("NOT_FOUND", "BATCH_UNKNOWN")
    for call, summary in (
        (lambda: jobs.GetJob(pb.GetJobRequest(job_id=name)), job),
        (lambda: jobs.CancelJob(pb.CancelJobRequest(job_id=name)), job),
        (lambda: jobs.DeleteJob(pb.DeleteJobRequest(job_id=name)), job),
        (lambda: jobs.WatchJob(pb.WatchJobRequest(job_id=name)), job),
        (lambda: jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=name)), job),
        (lambda: jobs.GetBatch(pb.GetBatchRequest(batch_id=name)), batch),
        (lambda: jobs.CancelBatch(pb.CancelBatchRequest(batch_id=name)), batch),
        (lambda: jobs.DeleteBatch(pb.DeleteBatchRequest(batch_id=name)), batch),
        (lambda: jobs.WatchBatch(pb.WatchBatchRequest(batch_id=name)), batch),
        (lambda: jobs.ReadBatchAnswers(pb.ReadBatchAnswersRequest(batch_id=name)), batch),
        (lambda: jobs.ReadBatchAnswers(pb.ReadBatchAnswersRequest(batch_id=name, wait=True)), batch),
    ):
        assert failure(call).summary == summary
