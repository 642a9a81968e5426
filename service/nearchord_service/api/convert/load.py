"""What the server is and does."""

from __future__ import annotations

import datetime as dt

from nearchord.v1 import load_service_pb2

from nearchord_service.api.convert.enums import VERDICTS
from nearchord_service.api.convert.questions import from_budget
from nearchord_service.api.convert.times import to_timestamp
from nearchord_service.api.limits import LOAD_INTERVALS, PIECE_BYTES, Caps, refuse
from nearchord_service.metrics import Load, QuestionLoad
from nearchord_service.model.question import QuestionName

_DEFAULT_INTERVAL = 1.0


def to_interval(request: load_service_pb2.WatchLoadRequest) -> float:
    """Read the seconds between messages; raises FieldInvalid."""
    interval = request.interval_seconds or _DEFAULT_INTERVAL
    if not LOAD_INTERVALS[0] <= interval <= LOAD_INTERVALS[1]:
        raise refuse(
            "interval_seconds",
            f"is {interval}; it must be from {LOAD_INTERVALS[0]} to {LOAD_INTERVALS[1]} seconds, or 0 for "
            f"{_DEFAULT_INTERVAL}",
        )
    return interval


def from_caps(version: str, solver_version: str, caps: Caps) -> load_service_pb2.GetServerResponse:
    """Write what the server can do."""
    return load_service_pb2.GetServerResponse(
        version=version,
        solver_version=solver_version,
        questions=list(QuestionName),
        default_budget=from_budget(caps.default_budget),
        largest_budget=from_budget(caps.largest_budget),
        inline_bytes=caps.inline_bytes,
        piece_bytes=PIECE_BYTES,
        content_bytes=caps.content_bytes,
        batch_jobs=caps.batch_jobs,
        unfinished_jobs=caps.owner.unfinished_jobs,
    )


def from_load(load: Load, time: dt.datetime) -> load_service_pb2.WatchLoadResponse:
    """Write live figures."""
    return load_service_pb2.WatchLoadResponse(
        time=to_timestamp(time),
        waiting=load.queue.waiting,
        solving=load.queue.solving,
        oldest_waiting_seconds=load.queue.oldest_waiting_seconds,
        slots=load_service_pb2.Slots(
            warming=load.slots.warming,
            idle=load.slots.idle,
            busy=load.slots.busy,
            warm_fraction=load.slots.warm_fraction,
        ),
        submitted=load.submitted,
        finished=load.finished,
        finished_per_second=load.finished_per_second,
        watch_streams=load.watch_streams,
        questions=[_question(question) for question in load.questions],
    )


def _question(question: QuestionLoad) -> load_service_pb2.QuestionLoad:
    return load_service_pb2.QuestionLoad(
        question=question.question,
        verdict=VERDICTS[question.verdict],
        finished=question.finished,
        seconds_p50=question.seconds_p50,
        seconds_p90=question.seconds_p90,
        seconds_p99=question.seconds_p99,
    )
