"""JobService: accepting jobs, telling how they go, giving their answers."""

# ruff: noqa: N802 (methods carry the names of the contract)
from __future__ import annotations

from collections.abc import AsyncGenerator, AsyncIterator, Sequence
from contextlib import aclosing
from dataclasses import replace
from typing import Any

from nearchord.v1 import job_service_pb2 as pb
from nearchord.v1 import job_service_pb2_grpc

from nearchord_service.api.auth import Context, owner
from nearchord_service.api.calls import Calls
from nearchord_service.api.convert.answers import answer_parts
from nearchord_service.api.convert.jobs import from_batch, from_event, from_job, to_query
from nearchord_service.api.convert.specs import SpecReader
from nearchord_service.api.convert.times import to_timestamp
from nearchord_service.api.limits import Caps, check_label, check_request_id, refuse
from nearchord_service.api.watch import Hub, Look, follow, look_at_batch, look_at_job
from nearchord_service.api.windows import Windows
from nearchord_service.metrics import Metrics
from nearchord_service.model.errors import ContentUnknown
from nearchord_service.model.job import Submission
from nearchord_service.store.port import Accepted, Query, Store

_PAGE_BYTES = 3 * 2**20
"""A page of jobs with many pins is cut to fit a message."""


class JobServicer(job_service_pb2_grpc.JobServiceServicer):
    """The queue as its callers see it."""

    def __init__(self, store: Store, calls: Calls, caps: Caps, metrics: Metrics, hub: Hub) -> None:
        self._store = store
        self._calls = calls
        self._caps = caps
        self._metrics = metrics
        self._hub = hub

    def _reader(self, caller: str) -> SpecReader:
        def vertices_of(address: str) -> int | None:
            try:
                return self._store.content(caller, address).vertices
            except ContentUnknown:
                return None

        return SpecReader(self._caps, vertices_of)

    async def SubmitJob(self, request: pb.SubmitJobRequest, context: Context) -> pb.SubmitJobResponse:
        """Accept one job."""
        caller = owner(context)
        check_request_id(request.request_id, "request_id")
        if not request.HasField("spec"):
            raise refuse("spec", "is missing; say what is asked of which graph")
        accepted = await self._calls.quick(self._accept_one, caller, request)
        return pb.SubmitJobResponse(job=from_job(accepted.job), repeated_request=accepted.repeated)

    def _accept_one(self, caller: str, request: pb.SubmitJobRequest) -> Accepted:
        reader = self._reader(caller)
        reader.add(request.spec, "spec")
        return self._accept(reader.submission(caller, request.request_id, None))

    def _accept(self, submission: Submission) -> Accepted:
        accepted = self._store.submit(submission, self._caps.owner)
        if not accepted.repeated:
            for name in {spec.question.name for spec in submission.specs}:
                count = sum(spec.question.name is name for spec in submission.specs)
                self._metrics.job_submitted(name, count)
        return accepted

    async def SubmitBatch(
        self, requests: AsyncIterator[pb.SubmitBatchRequest], context: Context
    ) -> pb.SubmitBatchResponse:
        """Accept many jobs or none."""
        caller = owner(context)
        first = await anext(requests, None)
        if first is None or first.WhichOneof("part") != "opening":
            raise refuse("opening", "is missing: the first message of a batch is its opening")
        request_id = check_request_id(first.opening.request_id, "opening.request_id")
        label = check_label(first.opening.label, "opening.label")
        reader = self._reader(caller)
        async with aclosing(_gathered(requests)) as groups:
            async for group in groups:
                await self._calls.quick(_read, reader, group)
        if not reader.count:
            raise refuse("specs", "are missing: a batch has at least one job")
        accepted = await self._calls.quick(self._accept, reader.submission(caller, request_id, label))
        assert accepted.batch is not None, "the store accepted a batch as a single job"
        return pb.SubmitBatchResponse(batch=from_batch(accepted.batch), repeated_request=accepted.repeated)

    async def GetJob(self, request: pb.GetJobRequest, context: Context) -> pb.GetJobResponse:
        """Return a job."""
        return pb.GetJobResponse(job=from_job(await self._calls.quick(self._store.job, owner(context), request.job_id)))

    async def GetBatch(self, request: pb.GetBatchRequest, context: Context) -> pb.GetBatchResponse:
        """Return a batch."""
        batch = await self._calls.quick(self._store.batch, owner(context), request.batch_id)
        return pb.GetBatchResponse(batch=from_batch(batch))

    async def ListJobs(self, request: pb.ListJobsRequest, context: Context) -> pb.ListJobsResponse:
        """Return a page of jobs."""
        return await self._calls.quick(self._page, owner(context), to_query(request))

    def _page(self, caller: str, query: Query) -> pb.ListJobsResponse:
        page = self._store.jobs(caller, query)
        response = pb.ListJobsResponse(jobs=map(from_job, page.jobs), next_page_token=page.next_token or "")
        if response.ByteSize() > _PAGE_BYTES and len(page.jobs) > 1:
            return self._page(caller, replace(query, page_size=len(page.jobs) // 2))
        return response

    async def WatchJob(self, request: pb.WatchJobRequest, context: Context) -> None:
        """Stream the events of a job."""
        look = look_at_job(self._store, owner(context), request.job_id)
        await self._watch(context, request.job_id, look, request.after_sequence, pb.WatchJobResponse, 0.0)

    async def WatchBatch(self, request: pb.WatchBatchRequest, context: Context) -> None:
        """Stream the events of a batch."""
        look = look_at_batch(self._store, owner(context), request.batch_id)
        pause = self._hub.pause_seconds
        await self._watch(context, request.batch_id, look, request.after_sequence, pb.WatchBatchResponse, pause)

    async def _watch(self, context: Context, key: str, look: Look, after: int, response: Any, pause: float) -> None:
        self._metrics.watch_opened()
        try:
            async with aclosing(follow(self._hub, self._calls, key, look, after, pause)) as rows:
                async for row in rows:
                    await context.write(response(event=from_event(row)))
        finally:
            self._metrics.watch_closed()

    async def CancelJob(self, request: pb.CancelJobRequest, context: Context) -> pb.CancelJobResponse:
        """Withdraw a job."""
        job = await self._calls.quick(self._store.cancel_job, owner(context), request.job_id)
        return pb.CancelJobResponse(job=from_job(job))

    async def CancelBatch(self, request: pb.CancelBatchRequest, context: Context) -> pb.CancelBatchResponse:
        """Withdraw a batch."""
        batch = await self._calls.quick(self._store.cancel_batch, owner(context), request.batch_id)
        return pb.CancelBatchResponse(batch=from_batch(batch))

    async def ReadAnswer(self, request: pb.ReadAnswerRequest, context: Context) -> None:
        """Stream the answer of a job."""
        job, answer = await self._calls.quick(self._store.answer, owner(context), request.job_id)
        for part in answer_parts(job, answer):
            await context.write(pb.ReadAnswerResponse(part=part))

    async def ReadBatchAnswers(self, request: pb.ReadBatchAnswersRequest, context: Context) -> None:
        """Stream the answers of a batch."""
        after = request.after_index if request.HasField("after_index") else -1
        windows = Windows(self._store, self._calls, self._hub, owner(context), request.batch_id)
        async with aclosing(windows.answers(after, wait=request.wait)) as answers:
            async for job, answer in answers:
                for part in answer_parts(job, answer):
                    await context.write(pb.ReadBatchAnswersResponse(part=part))

    async def DeleteJob(self, request: pb.DeleteJobRequest, context: Context) -> pb.DeleteJobResponse:
        """Delete a job that has ended."""
        deleted = await self._calls.quick(self._store.delete_job, owner(context), request.job_id)
        return pb.DeleteJobResponse(deleted_at=to_timestamp(deleted))

    async def DeleteBatch(self, request: pb.DeleteBatchRequest, context: Context) -> pb.DeleteBatchResponse:
        """Delete a batch that has ended."""
        deleted = await self._calls.quick(self._store.delete_batch, owner(context), request.batch_id)
        return pb.DeleteBatchResponse(deleted_at=to_timestamp(deleted))


_GROUP_BYTES = 2**20
_GROUP_SPECS = 256


async def _gathered(
    requests: AsyncIterator[pb.SubmitBatchRequest],
) -> AsyncGenerator[Sequence[pb.SubmitBatchRequest], None]:
    """Yield the messages of a batch in groups, so that each group costs one change of threads."""
    group: list[pb.SubmitBatchRequest] = []
    held = 0
    async for request in requests:
        group.append(request)
        held += request.ByteSize()
        if held >= _GROUP_BYTES or len(group) >= _GROUP_SPECS:
            yield group
            group, held = [], 0
    if group:
        yield group


def _read(reader: SpecReader, group: Sequence[pb.SubmitBatchRequest]) -> None:
    for request in group:
        place = f"specs[{reader.count}]"
        if request.WhichOneof("part") != "spec":
            raise refuse(place, "is missing: after the opening a batch has only specs")
        reader.add(request.spec, place)
