"""Jobs, batches, listings and events."""

from __future__ import annotations

from nearchord.v1 import job_pb2, job_service_pb2

from nearchord_service.api.convert.enums import PHASES, STAGES, STAGES_BY_NUMBER, VERDICTS, WHEN_OVERS
from nearchord_service.api.convert.questions import from_budget, from_question
from nearchord_service.api.convert.times import to_timestamp
from nearchord_service.api.limits import PAGE_SIZES, refuse
from nearchord_service.model.event import Event, Progress, Reached
from nearchord_service.model.job import Batch, Job
from nearchord_service.store.port import Query

_DEFAULT_PAGE_SIZE = 100


def to_query(request: job_service_pb2.ListJobsRequest) -> Query:
    """Read the filters of a listing; raises FieldInvalid."""
    size = request.page_size or _DEFAULT_PAGE_SIZE
    if not PAGE_SIZES[0] <= size <= PAGE_SIZES[1]:
        raise refuse(
            "page_size", f"is {size}; it must be from {PAGE_SIZES[0]} to {PAGE_SIZES[1]}, or 0 for {_DEFAULT_PAGE_SIZE}"
        )
    if request.stage != job_pb2.STAGE_UNSPECIFIED and request.stage not in STAGES_BY_NUMBER:
        raise refuse("stage", f"is {request.stage}, which is no stage; say WAITING, SOLVING or DONE")
    return Query(
        batch_id=request.batch_id or None,
        label=request.label,
        stage=STAGES_BY_NUMBER.get(request.stage),
        page_size=size,
        page_token=request.page_token or None,
    )


def from_job(job: Job) -> job_pb2.Job:
    """Write a job."""
    return job_pb2.Job(
        id=job.id,
        batch_id=job.batch_id or "",
        batch_index=job.batch_index,
        label=job.label,
        graph_address=job.graph_address,
        weights_address=job.weights_address or "",
        names_address=job.names_address or "",
        vertices=job.vertices,
        edges=job.edges,
        question=from_question(job.question),
        budget=from_budget(job.budget),
        when_over=WHEN_OVERS[job.when_over],
        priority=job.priority,
        not_after=to_timestamp(job.not_after),
        stage=STAGES[job.stage],
        verdict=VERDICTS[job.verdict] if job.verdict else job_pb2.VERDICT_UNSPECIFIED,
        reason=job.reason,
        attempt=job.attempt,
        cancel_requested=job.cancel_requested,
        created_at=to_timestamp(job.created_at),
        started_at=to_timestamp(job.started_at),
        finished_at=to_timestamp(job.finished_at),
        sequence=job.sequence,
    )


def from_batch(batch: Batch) -> job_pb2.Batch:
    """Write a batch."""
    return job_pb2.Batch(
        id=batch.id,
        label=batch.label,
        created_at=to_timestamp(batch.created_at),
        jobs=batch.jobs,
        waiting=batch.waiting,
        solving=batch.solving,
        done=batch.done,
    )


def from_event(event: Event) -> job_pb2.Event:
    """Write a row."""
    message = job_pb2.Event(
        sequence=event.sequence,
        job_id=event.job_id,
        batch_index=event.batch_index,
        time=to_timestamp(event.time),
        attempt=event.attempt,
    )
    if isinstance(event.news, Reached):
        message.transition.CopyFrom(_transition(event.news))
    else:
        message.progress.CopyFrom(_progress(event.news))
    return message


def _transition(news: Reached) -> job_pb2.Transition:
    return job_pb2.Transition(
        stage=STAGES[news.stage],
        verdict=VERDICTS[news.verdict] if news.verdict else job_pb2.VERDICT_UNSPECIFIED,
        reason=news.reason,
    )


def _progress(news: Progress) -> job_pb2.Progress:
    return job_pb2.Progress(
        phase=PHASES[news.phase],
        fraction_done=news.fraction_done,
        fill=news.fill,
        fill_lower_bound=news.fill_lower_bound,
        bags_done=news.bags_done,
        bags=news.bags,
        states=news.states,
        incumbent=news.incumbent,
        bound=news.bound,
        seconds=news.seconds,
    )
