"""Batches: all of their jobs or none, once, in order."""

from __future__ import annotations

import threading
from collections.abc import Iterator

import grpc
import pytest
from nearchord.v1 import job_service_pb2 as pb
from unit.api.serving import DEADLINE, PATH, Serving, a_spec, batching, failure


def test_a_batch_keeps_the_order_of_its_specs(served: Serving) -> None:
    response = served.submit_batch([a_spec(label=f"job {i}") for i in range(150)], label="night")
    batch = response.batch
    assert (batch.label, batch.jobs, batch.waiting, batch.solving, batch.done) == ("night", 150, 150, 0, 0)
    assert served.jobs.GetBatch(pb.GetBatchRequest(batch_id=batch.id)).batch == batch
    jobs = served.jobs.ListJobs(pb.ListJobsRequest(batch_id=batch.id, page_size=1_000)).jobs
    assert [(job.batch_index, job.label, job.batch_id) for job in jobs] == [
        (i, f"job {i}", batch.id) for i in range(150)
    ]
    assert served.metrics.load().submitted == 150


def test_a_repeated_batch_is_the_same_batch(served: Serving) -> None:
    specs = [a_spec(label=str(i)) for i in range(3)]
    first, again = served.submit_batch(specs), served.submit_batch(specs)
    assert again.repeated_request
    assert again.batch.id == first.batch.id
    assert failure(lambda: served.submit_batch(specs[:2])).summary == ("ALREADY_EXISTS", "REQUEST_ID_REUSED")


def test_a_batch_with_a_wrong_spec_leaves_nothing(served: Serving) -> None:
    """The field names the spec by its index; neither the specs before nor their content are kept."""
    wrong = a_spec(PATH)
    wrong.budget.states = 0
    found = failure(lambda: served.submit_batch([*(a_spec() for _ in range(17)), wrong, a_spec()]))
    assert found.summary == ("INVALID_ARGUMENT", "FIELD_INVALID")
    assert found.fields[0][0] == "specs[17].budget.states"
    assert not served.jobs.ListJobs(pb.ListJobsRequest()).jobs
    assert served.submit_batch([a_spec()]).batch.jobs == 1


def test_a_batch_whose_stream_breaks_leaves_nothing(served: Serving) -> None:
    sent, leave = threading.Event(), threading.Event()

    def messages() -> Iterator[pb.SubmitBatchRequest]:
        yield from batching(a_spec() for _ in range(5))
        sent.set()
        leave.wait(DEADLINE)

    call = served.jobs.SubmitBatch.future(messages())
    assert sent.wait(DEADLINE)
    call.cancel()
    leave.set()
    with pytest.raises(grpc.FutureCancelledError):
        call.result()
    assert not served.jobs.ListJobs(pb.ListJobsRequest()).jobs
    assert not served.submit_batch([a_spec()]).repeated_request


@pytest.mark.parametrize(
    ("messages", "field", "description"),
    [
        ([], "opening", "is missing: the first message of a batch is its opening"),
        (list(batching([a_spec()]))[1:], "opening", "is missing: the first message of a batch is its opening"),
        (list(batching([])), "specs", "are missing: a batch has at least one job"),
        ([*batching([a_spec()]), *batching([])], "specs[1]", "is missing: after the opening a batch has only specs"),
        (list(batching([a_spec()], request_id="")), "opening.request_id", "must be 1 to 64 characters"),
        (list(batching([a_spec()], label="a\tb")), "opening.label", "holds the control character U+0009"),
    ],
)
def test_a_batch_has_a_form(
    served: Serving, messages: list[pb.SubmitBatchRequest], field: str, description: str
) -> None:
    found = failure(lambda: served.jobs.SubmitBatch(iter(messages)))
    assert found.summary == ("INVALID_ARGUMENT", "FIELD_INVALID")
    ((name, text),) = found.fields
    assert name == field
    assert text.startswith(description)


def test_a_batch_beyond_the_cap_is_a_quota(served: Serving) -> None:
    found = failure(lambda: served.submit_batch(a_spec() for _ in range(201)))
    assert found.summary == ("RESOURCE_EXHAUSTED", "QUOTA_EXCEEDED")
    assert found.others == ("specs",)
    assert not served.jobs.ListJobs(pb.ListJobsRequest()).jobs


def test_a_message_beyond_four_mebibytes_is_refused(served: Serving) -> None:
    with pytest.raises(grpc.RpcError) as caught:
        served.submit(a_spec(bytes(5 * 2**20)))
    assert caught.value.code() is grpc.StatusCode.RESOURCE_EXHAUSTED
