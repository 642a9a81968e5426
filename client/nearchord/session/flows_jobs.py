"""Flows that submit, list, withdraw and delete jobs and batches."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from google.protobuf.message import Message

from nearchord.errors import BadInput, NearchordError, NotFound
from nearchord.graph import Graph
from nearchord.jobs import Addresses, BatchInfo, JobInfo, JobRequest
from nearchord.session import replies, requests
from nearchord.session.caller import Caller
from nearchord.session.content import InputContent, content_of, weight_content
from nearchord.session.flows_content import caps, store_all
from nearchord.session.retry import Retry
from nearchord.session.steps import Call, Emit, Flow, Method, Now, Pause, Send
from nearchord.stages import Stage
from nearchord.v1 import content_pb2, job_pb2, job_service_pb2

SMALL_BYTES = 64 << 10
"""Inline bytes that every server takes; only for more is it worth asking for the cap."""
INLINE_MARGIN = 4 << 10
BATCH_INLINE_BYTES = 64 << 20
"""Inline bytes of one batch that are held for a repetition; what goes beyond is stored first."""
PAGE = 1000


def submit(caller: Caller, request: JobRequest, request_id: str | None) -> Flow[JobInfo]:
    """Submits one job; a graph too large to travel inline is stored first."""
    request_id = request_id or requests.new_request_id()
    for last in (False, True):
        spec = requests.spec(request, (yield from graph_input(caller, request, None)))
        message = job_service_pb2.SubmitJobRequest(request_id=request_id, spec=spec)
        try:
            reply = yield Call(Method.SUBMIT_JOB, message)
            return replies.job_info(reply.job)
        except NotFound as error:
            forget(caller, request, error, last)
    raise AssertionError("unreachable")


def forget(caller: Caller, request: JobRequest, error: NotFound, last: bool) -> None:
    """Content this session had stored is gone (deleted, or past its retention): store it anew, once."""
    named = isinstance(request.graph, Addresses) and request.question.vectors is None
    if last or named or error.reason != "CONTENT_UNKNOWN":
        raise error
    caller.stored.clear()


def graph_input(caller: Caller, request: JobRequest, limit: int | None) -> Flow[content_pb2.GraphInput]:
    """How a graph travels: by address, or inline while its bytes stay under `limit` (None: the server's cap)."""
    if not isinstance(request.graph, Graph | Addresses):
        given = type(request.graph).__name__
        raise BadInput(f"a {given} is no graph", "build one: nearchord.Graph.from_edges, read, ...")
    requests.check_asked(request.question, request.graph)
    graph, vectors = request.subject, request.question.vectors
    if isinstance(graph, Graph):
        content, known = content_of(graph, vectors), Addresses("")
    elif vectors is None:
        return requests.stored_input(graph)
    else:
        content, known = InputContent(None, weight_content(vectors), None), graph
    if (yield from travels_inline(caller, content, limit)):
        return requests.inline_input(content, known)
    return requests.stored_input((yield from store_all(caller, content)), known)


def travels_inline(caller: Caller, content: InputContent, limit: int | None) -> Flow[bool]:
    """Whether the bytes of a job are few enough."""
    if limit is not None or content.size <= SMALL_BYTES:
        return content.size <= (SMALL_BYTES if limit is None else limit)
    return content.size <= (yield from caps(caller)).inline_bytes - INLINE_MARGIN


def submit_batch(caller: Caller, items: list[JobRequest], label: str, request_id: str | None) -> Flow[BatchInfo]:
    """Submits jobs together; the whole stream is repeated under its request id when the connection breaks."""
    request_id = request_id or requests.new_request_id()
    for last in (False, True):
        specs = yield from batch_specs(caller, items)
        try:
            return (yield from send_batch(caller, batch_stream(request_id, label, specs)))
        except NotFound as error:
            forget(caller, items[0], error, last)
    raise AssertionError("unreachable")


def batch_specs(caller: Caller, items: list[JobRequest]) -> Flow[list[job_pb2.JobSpec]]:
    """The specs of a batch, large graphs stored first; errors name the item."""
    specs, held = [], 0
    for place, item in enumerate(items):
        limit = min(SMALL_BYTES, BATCH_INLINE_BYTES - held)
        try:
            spec = requests.spec(item, (yield from graph_input(caller, item, limit)))
        except BadInput as wrong:
            raise BadInput(f"item {place} of the batch: {wrong.problem}", wrong.remedy) from None
        held += spec.ByteSize()
        specs.append(spec)
    return specs


def batch_stream(request_id: str, label: str, specs: list[job_pb2.JobSpec]) -> Callable[[], Iterator[Message]]:
    """The messages of a batch."""

    def messages() -> Iterator[Message]:
        opening = job_service_pb2.BatchOpening(request_id=request_id, label=label)
        yield job_service_pb2.SubmitBatchRequest(opening=opening)
        for spec in specs:
            yield job_service_pb2.SubmitBatchRequest(spec=spec)

    return messages


def send_batch(caller: Caller, messages: Callable[[], Iterator[Message]]) -> Flow[BatchInfo]:
    """Sends a batch until it is accepted or refused."""
    retry = Retry(caller.patience, (yield Now()))
    while True:
        try:
            reply = yield Send(Method.SUBMIT_BATCH, messages)
            return replies.batch_info(reply.batch)
        except NearchordError as error:
            yield Pause(retry.pause_after(error, (yield Now())))


def job_info(job_id: str) -> Flow[JobInfo]:
    """A job as it stands."""
    reply = yield Call(Method.GET_JOB, job_service_pb2.GetJobRequest(job_id=job_id))
    return replies.job_info(reply.job)


def batch_info(batch_id: str) -> Flow[BatchInfo]:
    """A batch as it stands."""
    reply = yield Call(Method.GET_BATCH, job_service_pb2.GetBatchRequest(batch_id=batch_id))
    return replies.batch_info(reply.batch)


def job_done(job_id: str) -> Flow[bool]:
    """Whether a job has ended."""
    return (yield from job_info(job_id)).stage is Stage.DONE


def list_jobs(batch: str | None, label: str | None, stage: Stage | str | None) -> Flow[None]:
    """Emits the jobs that pass the filters, page by page."""
    request = job_service_pb2.ListJobsRequest(
        batch_id=batch or "", label=label or "", stage=requests.stage(stage), page_size=PAGE
    )
    while True:
        reply = yield Call(Method.LIST_JOBS, request)
        for job in reply.jobs:
            yield Emit(replies.job_info(job))
        if not reply.next_page_token:
            return
        request.page_token = reply.next_page_token


def cancel_job(job_id: str) -> Flow[JobInfo]:
    """Asks for a job to be withdrawn."""
    reply = yield Call(Method.CANCEL_JOB, job_service_pb2.CancelJobRequest(job_id=job_id))
    return replies.job_info(reply.job)


def cancel_batch(batch_id: str) -> Flow[BatchInfo]:
    """Asks for every job of a batch to be withdrawn."""
    reply = yield Call(Method.CANCEL_BATCH, job_service_pb2.CancelBatchRequest(batch_id=batch_id))
    return replies.batch_info(reply.batch)


def delete_job(job_id: str) -> Flow[None]:
    """Deletes a job that has ended."""
    yield Call(Method.DELETE_JOB, job_service_pb2.DeleteJobRequest(job_id=job_id))


def delete_batch(batch_id: str) -> Flow[None]:
    """Deletes a batch whose jobs have all ended."""
    yield Call(Method.DELETE_BATCH, job_service_pb2.DeleteBatchRequest(batch_id=batch_id))
