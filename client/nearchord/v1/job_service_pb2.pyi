import datetime

from google.protobuf import timestamp_pb2 as _timestamp_pb2
from nearchord.v1 import answer_pb2 as _answer_pb2
from nearchord.v1 import job_pb2 as _job_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from collections.abc import Iterable as _Iterable, Mapping as _Mapping
from typing import ClassVar as _ClassVar, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class SubmitJobRequest(_message.Message):
    __slots__ = ("request_id", "spec")
    REQUEST_ID_FIELD_NUMBER: _ClassVar[int]
    SPEC_FIELD_NUMBER: _ClassVar[int]
    request_id: str
    spec: _job_pb2.JobSpec
    def __init__(self, request_id: _Optional[str] = ..., spec: _Optional[_Union[_job_pb2.JobSpec, _Mapping]] = ...) -> None: ...

class SubmitJobResponse(_message.Message):
    __slots__ = ("job", "repeated_request")
    JOB_FIELD_NUMBER: _ClassVar[int]
    REPEATED_REQUEST_FIELD_NUMBER: _ClassVar[int]
    job: _job_pb2.Job
    repeated_request: bool
    def __init__(self, job: _Optional[_Union[_job_pb2.Job, _Mapping]] = ..., repeated_request: bool = ...) -> None: ...

class BatchOpening(_message.Message):
    __slots__ = ("request_id", "label")
    REQUEST_ID_FIELD_NUMBER: _ClassVar[int]
    LABEL_FIELD_NUMBER: _ClassVar[int]
    request_id: str
    label: str
    def __init__(self, request_id: _Optional[str] = ..., label: _Optional[str] = ...) -> None: ...

class SubmitBatchRequest(_message.Message):
    __slots__ = ("opening", "spec")
    OPENING_FIELD_NUMBER: _ClassVar[int]
    SPEC_FIELD_NUMBER: _ClassVar[int]
    opening: BatchOpening
    spec: _job_pb2.JobSpec
    def __init__(self, opening: _Optional[_Union[BatchOpening, _Mapping]] = ..., spec: _Optional[_Union[_job_pb2.JobSpec, _Mapping]] = ...) -> None: ...

class SubmitBatchResponse(_message.Message):
    __slots__ = ("batch", "repeated_request")
    BATCH_FIELD_NUMBER: _ClassVar[int]
    REPEATED_REQUEST_FIELD_NUMBER: _ClassVar[int]
    batch: _job_pb2.Batch
    repeated_request: bool
    def __init__(self, batch: _Optional[_Union[_job_pb2.Batch, _Mapping]] = ..., repeated_request: bool = ...) -> None: ...

class GetJobRequest(_message.Message):
    __slots__ = ("job_id",)
    JOB_ID_FIELD_NUMBER: _ClassVar[int]
    job_id: str
    def __init__(self, job_id: _Optional[str] = ...) -> None: ...

class GetJobResponse(_message.Message):
    __slots__ = ("job",)
    JOB_FIELD_NUMBER: _ClassVar[int]
    job: _job_pb2.Job
    def __init__(self, job: _Optional[_Union[_job_pb2.Job, _Mapping]] = ...) -> None: ...

class GetBatchRequest(_message.Message):
    __slots__ = ("batch_id",)
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    def __init__(self, batch_id: _Optional[str] = ...) -> None: ...

class GetBatchResponse(_message.Message):
    __slots__ = ("batch",)
    BATCH_FIELD_NUMBER: _ClassVar[int]
    batch: _job_pb2.Batch
    def __init__(self, batch: _Optional[_Union[_job_pb2.Batch, _Mapping]] = ...) -> None: ...

class ListJobsRequest(_message.Message):
    __slots__ = ("batch_id", "label", "stage", "page_size", "page_token")
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    LABEL_FIELD_NUMBER: _ClassVar[int]
    STAGE_FIELD_NUMBER: _ClassVar[int]
    PAGE_SIZE_FIELD_NUMBER: _ClassVar[int]
    PAGE_TOKEN_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    label: str
    stage: _job_pb2.Stage
    page_size: int
    page_token: str
    def __init__(self, batch_id: _Optional[str] = ..., label: _Optional[str] = ..., stage: _Optional[_Union[_job_pb2.Stage, str]] = ..., page_size: _Optional[int] = ..., page_token: _Optional[str] = ...) -> None: ...

class ListJobsResponse(_message.Message):
    __slots__ = ("jobs", "next_page_token")
    JOBS_FIELD_NUMBER: _ClassVar[int]
    NEXT_PAGE_TOKEN_FIELD_NUMBER: _ClassVar[int]
    jobs: _containers.RepeatedCompositeFieldContainer[_job_pb2.Job]
    next_page_token: str
    def __init__(self, jobs: _Optional[_Iterable[_Union[_job_pb2.Job, _Mapping]]] = ..., next_page_token: _Optional[str] = ...) -> None: ...

class WatchJobRequest(_message.Message):
    __slots__ = ("job_id", "after_sequence")
    JOB_ID_FIELD_NUMBER: _ClassVar[int]
    AFTER_SEQUENCE_FIELD_NUMBER: _ClassVar[int]
    job_id: str
    after_sequence: int
    def __init__(self, job_id: _Optional[str] = ..., after_sequence: _Optional[int] = ...) -> None: ...

class WatchJobResponse(_message.Message):
    __slots__ = ("event",)
    EVENT_FIELD_NUMBER: _ClassVar[int]
    event: _job_pb2.Event
    def __init__(self, event: _Optional[_Union[_job_pb2.Event, _Mapping]] = ...) -> None: ...

class WatchBatchRequest(_message.Message):
    __slots__ = ("batch_id", "after_sequence")
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    AFTER_SEQUENCE_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    after_sequence: int
    def __init__(self, batch_id: _Optional[str] = ..., after_sequence: _Optional[int] = ...) -> None: ...

class WatchBatchResponse(_message.Message):
    __slots__ = ("event",)
    EVENT_FIELD_NUMBER: _ClassVar[int]
    event: _job_pb2.Event
    def __init__(self, event: _Optional[_Union[_job_pb2.Event, _Mapping]] = ...) -> None: ...

class CancelJobRequest(_message.Message):
    __slots__ = ("job_id",)
    JOB_ID_FIELD_NUMBER: _ClassVar[int]
    job_id: str
    def __init__(self, job_id: _Optional[str] = ...) -> None: ...

class CancelJobResponse(_message.Message):
    __slots__ = ("job",)
    JOB_FIELD_NUMBER: _ClassVar[int]
    job: _job_pb2.Job
    def __init__(self, job: _Optional[_Union[_job_pb2.Job, _Mapping]] = ...) -> None: ...

class CancelBatchRequest(_message.Message):
    __slots__ = ("batch_id",)
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    def __init__(self, batch_id: _Optional[str] = ...) -> None: ...

class CancelBatchResponse(_message.Message):
    __slots__ = ("batch",)
    BATCH_FIELD_NUMBER: _ClassVar[int]
    batch: _job_pb2.Batch
    def __init__(self, batch: _Optional[_Union[_job_pb2.Batch, _Mapping]] = ...) -> None: ...

class ReadAnswerRequest(_message.Message):
    __slots__ = ("job_id",)
    JOB_ID_FIELD_NUMBER: _ClassVar[int]
    job_id: str
    def __init__(self, job_id: _Optional[str] = ...) -> None: ...

class ReadAnswerResponse(_message.Message):
    __slots__ = ("part",)
    PART_FIELD_NUMBER: _ClassVar[int]
    part: _answer_pb2.AnswerPart
    def __init__(self, part: _Optional[_Union[_answer_pb2.AnswerPart, _Mapping]] = ...) -> None: ...

class ReadBatchAnswersRequest(_message.Message):
    __slots__ = ("batch_id", "after_index", "wait")
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    AFTER_INDEX_FIELD_NUMBER: _ClassVar[int]
    WAIT_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    after_index: int
    wait: bool
    def __init__(self, batch_id: _Optional[str] = ..., after_index: _Optional[int] = ..., wait: bool = ...) -> None: ...

class ReadBatchAnswersResponse(_message.Message):
    __slots__ = ("part",)
    PART_FIELD_NUMBER: _ClassVar[int]
    part: _answer_pb2.AnswerPart
    def __init__(self, part: _Optional[_Union[_answer_pb2.AnswerPart, _Mapping]] = ...) -> None: ...

class DeleteJobRequest(_message.Message):
    __slots__ = ("job_id",)
    JOB_ID_FIELD_NUMBER: _ClassVar[int]
    job_id: str
    def __init__(self, job_id: _Optional[str] = ...) -> None: ...

class DeleteJobResponse(_message.Message):
    __slots__ = ("deleted_at",)
    DELETED_AT_FIELD_NUMBER: _ClassVar[int]
    deleted_at: _timestamp_pb2.Timestamp
    def __init__(self, deleted_at: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ...) -> None: ...

class DeleteBatchRequest(_message.Message):
    __slots__ = ("batch_id",)
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    batch_id: str
    def __init__(self, batch_id: _Optional[str] = ...) -> None: ...

class DeleteBatchResponse(_message.Message):
    __slots__ = ("deleted_at",)
    DELETED_AT_FIELD_NUMBER: _ClassVar[int]
    deleted_at: _timestamp_pb2.Timestamp
    def __init__(self, deleted_at: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ...) -> None: ...
