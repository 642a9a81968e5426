import datetime

from google.protobuf import timestamp_pb2 as _timestamp_pb2
from nearchord.v1 import job_pb2 as _job_pb2
from nearchord.v1 import question_pb2 as _question_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from collections.abc import Iterable as _Iterable, Mapping as _Mapping
from typing import ClassVar as _ClassVar, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class GetServerRequest(_message.Message):
    __slots__ = ()
    def __init__(self) -> None: ...

class GetServerResponse(_message.Message):
    __slots__ = ("version", "solver_version", "questions", "default_budget", "largest_budget", "inline_bytes", "piece_bytes", "content_bytes", "batch_jobs", "unfinished_jobs")
    VERSION_FIELD_NUMBER: _ClassVar[int]
    SOLVER_VERSION_FIELD_NUMBER: _ClassVar[int]
    QUESTIONS_FIELD_NUMBER: _ClassVar[int]
    DEFAULT_BUDGET_FIELD_NUMBER: _ClassVar[int]
    LARGEST_BUDGET_FIELD_NUMBER: _ClassVar[int]
    INLINE_BYTES_FIELD_NUMBER: _ClassVar[int]
    PIECE_BYTES_FIELD_NUMBER: _ClassVar[int]
    CONTENT_BYTES_FIELD_NUMBER: _ClassVar[int]
    BATCH_JOBS_FIELD_NUMBER: _ClassVar[int]
    UNFINISHED_JOBS_FIELD_NUMBER: _ClassVar[int]
    version: str
    solver_version: str
    questions: _containers.RepeatedScalarFieldContainer[str]
    default_budget: _question_pb2.Budget
    largest_budget: _question_pb2.Budget
    inline_bytes: int
    piece_bytes: int
    content_bytes: int
    batch_jobs: int
    unfinished_jobs: int
    def __init__(self, version: _Optional[str] = ..., solver_version: _Optional[str] = ..., questions: _Optional[_Iterable[str]] = ..., default_budget: _Optional[_Union[_question_pb2.Budget, _Mapping]] = ..., largest_budget: _Optional[_Union[_question_pb2.Budget, _Mapping]] = ..., inline_bytes: _Optional[int] = ..., piece_bytes: _Optional[int] = ..., content_bytes: _Optional[int] = ..., batch_jobs: _Optional[int] = ..., unfinished_jobs: _Optional[int] = ...) -> None: ...

class WatchLoadRequest(_message.Message):
    __slots__ = ("interval_seconds",)
    INTERVAL_SECONDS_FIELD_NUMBER: _ClassVar[int]
    interval_seconds: float
    def __init__(self, interval_seconds: _Optional[float] = ...) -> None: ...

class Slots(_message.Message):
    __slots__ = ("warming", "idle", "busy", "warm_fraction")
    WARMING_FIELD_NUMBER: _ClassVar[int]
    IDLE_FIELD_NUMBER: _ClassVar[int]
    BUSY_FIELD_NUMBER: _ClassVar[int]
    WARM_FRACTION_FIELD_NUMBER: _ClassVar[int]
    warming: int
    idle: int
    busy: int
    warm_fraction: float
    def __init__(self, warming: _Optional[int] = ..., idle: _Optional[int] = ..., busy: _Optional[int] = ..., warm_fraction: _Optional[float] = ...) -> None: ...

class QuestionLoad(_message.Message):
    __slots__ = ("question", "verdict", "finished", "seconds_p50", "seconds_p90", "seconds_p99")
    QUESTION_FIELD_NUMBER: _ClassVar[int]
    VERDICT_FIELD_NUMBER: _ClassVar[int]
    FINISHED_FIELD_NUMBER: _ClassVar[int]
    SECONDS_P50_FIELD_NUMBER: _ClassVar[int]
    SECONDS_P90_FIELD_NUMBER: _ClassVar[int]
    SECONDS_P99_FIELD_NUMBER: _ClassVar[int]
    question: str
    verdict: _job_pb2.Verdict
    finished: int
    seconds_p50: float
    seconds_p90: float
    seconds_p99: float
    def __init__(self, question: _Optional[str] = ..., verdict: _Optional[_Union[_job_pb2.Verdict, str]] = ..., finished: _Optional[int] = ..., seconds_p50: _Optional[float] = ..., seconds_p90: _Optional[float] = ..., seconds_p99: _Optional[float] = ...) -> None: ...

class WatchLoadResponse(_message.Message):
    __slots__ = ("time", "waiting", "solving", "oldest_waiting_seconds", "slots", "submitted", "finished", "finished_per_second", "watch_streams", "questions")
    TIME_FIELD_NUMBER: _ClassVar[int]
    WAITING_FIELD_NUMBER: _ClassVar[int]
    SOLVING_FIELD_NUMBER: _ClassVar[int]
    OLDEST_WAITING_SECONDS_FIELD_NUMBER: _ClassVar[int]
    SLOTS_FIELD_NUMBER: _ClassVar[int]
    SUBMITTED_FIELD_NUMBER: _ClassVar[int]
    FINISHED_FIELD_NUMBER: _ClassVar[int]
    FINISHED_PER_SECOND_FIELD_NUMBER: _ClassVar[int]
    WATCH_STREAMS_FIELD_NUMBER: _ClassVar[int]
    QUESTIONS_FIELD_NUMBER: _ClassVar[int]
    time: _timestamp_pb2.Timestamp
    waiting: int
    solving: int
    oldest_waiting_seconds: float
    slots: Slots
    submitted: int
    finished: int
    finished_per_second: float
    watch_streams: int
    questions: _containers.RepeatedCompositeFieldContainer[QuestionLoad]
    def __init__(self, time: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ..., waiting: _Optional[int] = ..., solving: _Optional[int] = ..., oldest_waiting_seconds: _Optional[float] = ..., slots: _Optional[_Union[Slots, _Mapping]] = ..., submitted: _Optional[int] = ..., finished: _Optional[int] = ..., finished_per_second: _Optional[float] = ..., watch_streams: _Optional[int] = ..., questions: _Optional[_Iterable[_Union[QuestionLoad, _Mapping]]] = ...) -> None: ...
