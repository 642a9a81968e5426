"""Submitting a job: accepted once, shown as asked, refused with field and remedy."""

from __future__ import annotations

import datetime as dt
import struct
from collections.abc import Callable

import pytest
from nearchord.v1 import content_pb2, graph_service_pb2, job_pb2
from nearchord.v1 import job_service_pb2 as pb
from unit.api.serving import PATH, Serving, a_spec, failure

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


def test_a_repeated_request_outlives_its_graph(served: Serving) -> None:
    """The job of the first call is found although its pinned graph is gone."""
    spec = a_spec()
    spec.question.independent_set.must.append(2)
    job = served.submit(spec)
    (lease,) = served.claim()
    served.finish(lease)
    served.graphs.DeleteContent(graph_service_pb2.DeleteContentRequest(address=job.graph_address))
    assert served.submit(spec).id == job.id
    by_address = a_spec(input=content_pb2.GraphInput(graph_address=job.graph_address), question=spec.question)
    assert served.submit(by_address).id == job.id
    found = failure(lambda: served.submit(by_address, request_id="another"))
    assert found.summary == ("NOT_FOUND", "CONTENT_UNKNOWN")


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
