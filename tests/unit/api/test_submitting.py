"""JobService: accepting jobs and batches, once each, and what is refused."""

from __future__ import annotations

import datetime as dt
import struct
import threading
from collections.abc import Callable, Iterator

import grpc
import pytest
from nearchord.v1 import content_pb2, job_pb2
from nearchord.v1 import job_service_pb2 as pb
from unit.api.serving import DEADLINE, PATH, Serving, a_spec, batching, failure

UNKNOWN = "0f" * 32


def test_an_accepted_job_shows_everything_it_was_asked(served: Serving) -> None:
    spec = a_spec(label="north", priority=7, when_over=2)
    spec.input.weights_content = struct.pack("<3q", 4, 5, 6)
    spec.input.names_content = b"a\nb\nc\n"
    spec.question.vertex_cover.must.extend([2, 0])
    spec.budget.fill = 0
    spec.not_after.FromDatetime(dt.datetime(2099, 1, 1, 0, 0, 0, 5))
    response = served.jobs.SubmitJob(pb.SubmitJobRequest(request_id="r-1_A", spec=spec))
    job = response.job
    assert not response.repeated_request
    assert (len(job.id), job.batch_id, job.label, job.priority) == (32, "", "north", 7)
    assert (job.vertices, job.edges, job.stage, job.verdict) == (3, 3, job_pb2.STAGE_WAITING, 0)
    assert list(job.question.vertex_cover.must) == [0, 2]
    assert job.budget.HasField("fill")
    assert (job.budget.fill, job.budget.states, job.budget.seconds, job.budget.memory_bytes) == (0, 10**7, 60.0, 2**30)
    assert job.not_after == spec.not_after
    assert not job.HasField("started_at")
    assert not job.HasField("finished_at")
    assert job.sequence > 0
    assert served.jobs.GetJob(pb.GetJobRequest(job_id=job.id)).job == job


def test_inline_content_is_stored_with_the_job(served: Serving) -> None:
    job = served.submit(a_spec(PATH))
    (lease,) = served.claim()
    assert lease.job.id == job.id
    stored = lease.graph.data if lease.graph.data is not None else lease.graph.path.read_bytes()  # type: ignore[union-attr]
    assert stored == PATH


def test_a_repeated_request_is_the_same_job(served: Serving) -> None:
    first = served.jobs.SubmitJob(pb.SubmitJobRequest(request_id="r", spec=a_spec()))
    by_address = a_spec(input=content_pb2.GraphInput(graph_address=first.job.graph_address))
    again = served.jobs.SubmitJob(pb.SubmitJobRequest(request_id="r", spec=by_address))
    assert again.repeated_request
    assert again.job.id == first.job.id
    assert served.metrics.load().submitted == 1


def test_a_request_id_stands_for_one_request(served: Serving) -> None:
    served.submit()
    for call in (
        lambda: served.submit(a_spec(priority=1)),
        lambda: served.submit_batch([a_spec()], request_id="r"),
    ):
        found = failure(call)
        assert found.summary == ("ALREADY_EXISTS", "REQUEST_ID_REUSED")
        assert found.others == ("request r",)


@pytest.mark.parametrize("request_id", ["", "a b", "x" * 65, "ä", "a/b", "a\n"])
def test_a_request_id_has_a_form(served: Serving, request_id: str) -> None:
    found = failure(lambda: served.submit(request_id=request_id))
    assert found.summary == ("INVALID_ARGUMENT", "FIELD_INVALID")
    assert found.fields[0][0] == "request_id"


def test_a_missing_spec_is_named(served: Serving) -> None:
    found = failure(lambda: served.jobs.SubmitJob(pb.SubmitJobRequest(request_id="r")))
    assert found.fields == (("spec", "is missing; say what is asked of which graph"),)


def change(path: str, value: object) -> job_pb2.JobSpec:
    spec = a_spec()
    *way, name = path.split(".")
    message: object = spec
    for step in way:
        message = getattr(message, step)
    setattr(message, name, value)
    return spec


def pinned(*must: int) -> job_pb2.JobSpec:
    spec = a_spec()
    spec.question.independent_set.must.extend(must)
    return spec


REFUSED = [
    (pinned(3), "spec.question.independent_set.must[0]", "names vertex 3, but the graph has 3, numbered from 0 to 2"),
    (pinned(1, 1), "spec.question.independent_set.must[1]", "names vertex 1 again, after [0]; name it once"),
    (change("budget.fill", -1), "spec.budget.fill", "is -1; it must be at least 0, or absent for the default"),
    (change("budget.seconds", 0.0), "spec.budget.seconds", "is 0.0; it must be above 0, or absent for the default"),
    (change("budget.states", 0), "spec.budget.states", "is 0; it must be at least 1, or absent for the default"),
]


@pytest.mark.parametrize(("spec", "field", "description"), REFUSED, ids=[field for _, field, _ in REFUSED])
def test_a_wrong_field_is_named_with_its_remedy(
    served: Serving, spec: job_pb2.JobSpec, field: str, description: str
) -> None:
    found = failure(lambda: served.submit(spec))
    assert found.summary == ("INVALID_ARGUMENT", "FIELD_INVALID")
    assert found.fields == ((field, description),)
    assert found.message == f"{field}: {description}"


def test_wrong_content_is_named_with_its_row(served: Serving) -> None:
    loop = struct.pack("<IQ3QI", 2, 1, 0, 1, 1, 0)
    found = failure(lambda: served.submit(a_spec(loop)))
    assert found.summary == ("INVALID_ARGUMENT", "CONTENT_INVALID")
    assert found.fields == (("spec.input.graph_content", "row 0 names vertex 0 itself: a self-loop; drop it"),)


def test_an_unknown_graph_is_not_found(served: Serving) -> None:
    spec = a_spec(input=content_pb2.GraphInput(graph_address=UNKNOWN))
    for pins in ([], [0]):
        spec.question.independent_set.must.extend(pins)
        found = failure(lambda: served.submit(spec))
        assert found.summary == ("NOT_FOUND", "CONTENT_UNKNOWN")
        assert found.others == (f"content {UNKNOWN}",)


def test_stored_content_of_the_wrong_kind_is_refused(served: Serving) -> None:
    names = served.upload(b"a\nb\nc\n", content_pb2.CONTENT_KIND_NAMES).address
    found = failure(lambda: served.submit(a_spec(input=content_pb2.GraphInput(graph_address=names))))
    assert found.summary == ("INVALID_ARGUMENT", "FIELD_INVALID")
    assert found.fields[0][0] == "spec.input.graph_address"


def test_stored_weights_have_to_fit_the_graph(served: Serving) -> None:
    weights = served.upload(struct.pack("<2q", 1, 2), content_pb2.CONTENT_KIND_WEIGHTS).address
    spec = a_spec()
    spec.input.weights_address = weights
    found = failure(lambda: served.submit_batch([a_spec(), spec]))
    assert found.summary == ("INVALID_ARGUMENT", "FIELD_INVALID")
    assert found.fields[0][0] == "specs[1].input.weights_address"


def test_too_much_inline_is_a_quota(served: Serving) -> None:
    found = failure(lambda: served.submit(change("input.names_content", b"n" * 4_096)))
    assert found.summary == ("RESOURCE_EXHAUSTED", "QUOTA_EXCEEDED")
    assert found.others == ("spec.input",)
    assert found.retry_seconds is None


def test_unfinished_jobs_have_a_quota(serve: Callable[..., Serving]) -> None:
    """The status says when to try again; a job that ends makes room."""
    served = serve(unfinished_jobs=1)
    served.submit()
    found = failure(lambda: served.submit(request_id="other"))
    assert found.summary == ("RESOURCE_EXHAUSTED", "QUOTA_EXCEEDED")
    assert found.retry_seconds is not None
    (lease,) = served.claim()
    served.finish(lease)
    served.submit(request_id="other")


# Batches


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
        ([], "part.opening", "is missing: the first message of a batch is its opening"),
        (list(batching([a_spec()]))[1:], "part.opening", "is missing: the first message of a batch is its opening"),
        (list(batching([])), "specs", "are missing: a batch has at least one job"),
        ([*batching([a_spec()]), *batching([])], "specs[1]", "is missing: after the opening a batch has only specs"),
        (list(batching([a_spec()], request_id="")), "part.opening.request_id", "must be 1 to 64 characters"),
        (list(batching([a_spec()], label="a\tb")), "part.opening.label", "holds the control character U+0009"),
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


# Looking, cancelling, deleting


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
    served.submit_batch([spec] * 12)
    found, token = 0, ""
    while True:
        page = served.jobs.ListJobs(pb.ListJobsRequest(page_size=12, page_token=token))
        found, token = found + len(page.jobs), page.next_page_token
        assert page.ByteSize() < 4 * 2**20
        if not token:
            break
    assert found == 12


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
