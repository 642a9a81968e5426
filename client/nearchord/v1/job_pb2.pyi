import datetime

from google.protobuf import timestamp_pb2 as _timestamp_pb2
from nearchord.v1 import content_pb2 as _content_pb2
from nearchord.v1 import question_pb2 as _question_pb2
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from collections.abc import Mapping as _Mapping
from typing import ClassVar as _ClassVar, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class Stage(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    STAGE_UNSPECIFIED: _ClassVar[Stage]
    STAGE_WAITING: _ClassVar[Stage]
    STAGE_SOLVING: _ClassVar[Stage]
    STAGE_DONE: _ClassVar[Stage]

class Verdict(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    VERDICT_UNSPECIFIED: _ClassVar[Verdict]
    VERDICT_PROVEN: _ClassVar[Verdict]
    VERDICT_BOUNDED: _ClassVar[Verdict]
    VERDICT_OVER_FILL: _ClassVar[Verdict]
    VERDICT_INFEASIBLE: _ClassVar[Verdict]
    VERDICT_CANCELLED: _ClassVar[Verdict]
    VERDICT_EXPIRED: _ClassVar[Verdict]
    VERDICT_BROKEN: _ClassVar[Verdict]

class Phase(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    PHASE_UNSPECIFIED: _ClassVar[Phase]
    PHASE_READ: _ClassVar[Phase]
    PHASE_ORDER: _ClassVar[Phase]
    PHASE_FILL: _ClassVar[Phase]
    PHASE_TREE: _ClassVar[Phase]
    PHASE_SWEEP: _ClassVar[Phase]
    PHASE_IMPROVE: _ClassVar[Phase]
STAGE_UNSPECIFIED: Stage
STAGE_WAITING: Stage
STAGE_SOLVING: Stage
STAGE_DONE: Stage
VERDICT_UNSPECIFIED: Verdict
VERDICT_PROVEN: Verdict
VERDICT_BOUNDED: Verdict
VERDICT_OVER_FILL: Verdict
VERDICT_INFEASIBLE: Verdict
VERDICT_CANCELLED: Verdict
VERDICT_EXPIRED: Verdict
VERDICT_BROKEN: Verdict
PHASE_UNSPECIFIED: Phase
PHASE_READ: Phase
PHASE_ORDER: Phase
PHASE_FILL: Phase
PHASE_TREE: Phase
PHASE_SWEEP: Phase
PHASE_IMPROVE: Phase

class JobSpec(_message.Message):
    __slots__ = ("input", "question", "budget", "when_over", "priority", "not_after", "label")
    INPUT_FIELD_NUMBER: _ClassVar[int]
    QUESTION_FIELD_NUMBER: _ClassVar[int]
    BUDGET_FIELD_NUMBER: _ClassVar[int]
    WHEN_OVER_FIELD_NUMBER: _ClassVar[int]
    PRIORITY_FIELD_NUMBER: _ClassVar[int]
    NOT_AFTER_FIELD_NUMBER: _ClassVar[int]
    LABEL_FIELD_NUMBER: _ClassVar[int]
    input: _content_pb2.GraphInput
    question: _question_pb2.Question
    budget: _question_pb2.Budget
    when_over: _question_pb2.WhenOver
    priority: int
    not_after: _timestamp_pb2.Timestamp
    label: str
    def __init__(self, input: _Optional[_Union[_content_pb2.GraphInput, _Mapping]] = ..., question: _Optional[_Union[_question_pb2.Question, _Mapping]] = ..., budget: _Optional[_Union[_question_pb2.Budget, _Mapping]] = ..., when_over: _Optional[_Union[_question_pb2.WhenOver, str]] = ..., priority: _Optional[int] = ..., not_after: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ..., label: _Optional[str] = ...) -> None: ...

class Job(_message.Message):
    __slots__ = ("id", "batch_id", "batch_index", "label", "graph_address", "weights_address", "names_address", "vertices", "edges", "question", "budget", "when_over", "priority", "not_after", "stage", "verdict", "reason", "attempt", "cancel_requested", "created_at", "started_at", "finished_at", "sequence")
    ID_FIELD_NUMBER: _ClassVar[int]
    BATCH_ID_FIELD_NUMBER: _ClassVar[int]
    BATCH_INDEX_FIELD_NUMBER: _ClassVar[int]
    LABEL_FIELD_NUMBER: _ClassVar[int]
    GRAPH_ADDRESS_FIELD_NUMBER: _ClassVar[int]
    WEIGHTS_ADDRESS_FIELD_NUMBER: _ClassVar[int]
    NAMES_ADDRESS_FIELD_NUMBER: _ClassVar[int]
    VERTICES_FIELD_NUMBER: _ClassVar[int]
    EDGES_FIELD_NUMBER: _ClassVar[int]
    QUESTION_FIELD_NUMBER: _ClassVar[int]
    BUDGET_FIELD_NUMBER: _ClassVar[int]
    WHEN_OVER_FIELD_NUMBER: _ClassVar[int]
    PRIORITY_FIELD_NUMBER: _ClassVar[int]
    NOT_AFTER_FIELD_NUMBER: _ClassVar[int]
    STAGE_FIELD_NUMBER: _ClassVar[int]
    VERDICT_FIELD_NUMBER: _ClassVar[int]
    REASON_FIELD_NUMBER: _ClassVar[int]
    ATTEMPT_FIELD_NUMBER: _ClassVar[int]
    CANCEL_REQUESTED_FIELD_NUMBER: _ClassVar[int]
    CREATED_AT_FIELD_NUMBER: _ClassVar[int]
    STARTED_AT_FIELD_NUMBER: _ClassVar[int]
    FINISHED_AT_FIELD_NUMBER: _ClassVar[int]
    SEQUENCE_FIELD_NUMBER: _ClassVar[int]
    id: str
    batch_id: str
    batch_index: int
    label: str
    graph_address: str
    weights_address: str
    names_address: str
    vertices: int
    edges: int
    question: _question_pb2.Question
    budget: _question_pb2.Budget
    when_over: _question_pb2.WhenOver
    priority: int
    not_after: _timestamp_pb2.Timestamp
    stage: Stage
    verdict: Verdict
    reason: str
    attempt: int
    cancel_requested: bool
    created_at: _timestamp_pb2.Timestamp
    started_at: _timestamp_pb2.Timestamp
    finished_at: _timestamp_pb2.Timestamp
    sequence: int
    def __init__(self, id: _Optional[str] = ..., batch_id: _Optional[str] = ..., batch_index: _Optional[int] = ..., label: _Optional[str] = ..., graph_address: _Optional[str] = ..., weights_address: _Optional[str] = ..., names_address: _Optional[str] = ..., vertices: _Optional[int] = ..., edges: _Optional[int] = ..., question: _Optional[_Union[_question_pb2.Question, _Mapping]] = ..., budget: _Optional[_Union[_question_pb2.Budget, _Mapping]] = ..., when_over: _Optional[_Union[_question_pb2.WhenOver, str]] = ..., priority: _Optional[int] = ..., not_after: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ..., stage: _Optional[_Union[Stage, str]] = ..., verdict: _Optional[_Union[Verdict, str]] = ..., reason: _Optional[str] = ..., attempt: _Optional[int] = ..., cancel_requested: bool = ..., created_at: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ..., started_at: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ..., finished_at: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ..., sequence: _Optional[int] = ...) -> None: ...

class Batch(_message.Message):
    __slots__ = ("id", "label", "created_at", "jobs", "waiting", "solving", "done")
    ID_FIELD_NUMBER: _ClassVar[int]
    LABEL_FIELD_NUMBER: _ClassVar[int]
    CREATED_AT_FIELD_NUMBER: _ClassVar[int]
    JOBS_FIELD_NUMBER: _ClassVar[int]
    WAITING_FIELD_NUMBER: _ClassVar[int]
    SOLVING_FIELD_NUMBER: _ClassVar[int]
    DONE_FIELD_NUMBER: _ClassVar[int]
    id: str
    label: str
    created_at: _timestamp_pb2.Timestamp
    jobs: int
    waiting: int
    solving: int
    done: int
    def __init__(self, id: _Optional[str] = ..., label: _Optional[str] = ..., created_at: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ..., jobs: _Optional[int] = ..., waiting: _Optional[int] = ..., solving: _Optional[int] = ..., done: _Optional[int] = ...) -> None: ...

class Transition(_message.Message):
    __slots__ = ("stage", "verdict", "reason")
    STAGE_FIELD_NUMBER: _ClassVar[int]
    VERDICT_FIELD_NUMBER: _ClassVar[int]
    REASON_FIELD_NUMBER: _ClassVar[int]
    stage: Stage
    verdict: Verdict
    reason: str
    def __init__(self, stage: _Optional[_Union[Stage, str]] = ..., verdict: _Optional[_Union[Verdict, str]] = ..., reason: _Optional[str] = ...) -> None: ...

class Progress(_message.Message):
    __slots__ = ("phase", "fraction_done", "fill", "fill_lower_bound", "bags_done", "bags", "states", "incumbent", "bound", "seconds")
    PHASE_FIELD_NUMBER: _ClassVar[int]
    FRACTION_DONE_FIELD_NUMBER: _ClassVar[int]
    FILL_FIELD_NUMBER: _ClassVar[int]
    FILL_LOWER_BOUND_FIELD_NUMBER: _ClassVar[int]
    BAGS_DONE_FIELD_NUMBER: _ClassVar[int]
    BAGS_FIELD_NUMBER: _ClassVar[int]
    STATES_FIELD_NUMBER: _ClassVar[int]
    INCUMBENT_FIELD_NUMBER: _ClassVar[int]
    BOUND_FIELD_NUMBER: _ClassVar[int]
    SECONDS_FIELD_NUMBER: _ClassVar[int]
    phase: Phase
    fraction_done: float
    fill: int
    fill_lower_bound: int
    bags_done: int
    bags: int
    states: int
    incumbent: int
    bound: int
    seconds: float
    def __init__(self, phase: _Optional[_Union[Phase, str]] = ..., fraction_done: _Optional[float] = ..., fill: _Optional[int] = ..., fill_lower_bound: _Optional[int] = ..., bags_done: _Optional[int] = ..., bags: _Optional[int] = ..., states: _Optional[int] = ..., incumbent: _Optional[int] = ..., bound: _Optional[int] = ..., seconds: _Optional[float] = ...) -> None: ...

class Event(_message.Message):
    __slots__ = ("sequence", "job_id", "batch_index", "time", "attempt", "transition", "progress")
    SEQUENCE_FIELD_NUMBER: _ClassVar[int]
    JOB_ID_FIELD_NUMBER: _ClassVar[int]
    BATCH_INDEX_FIELD_NUMBER: _ClassVar[int]
    TIME_FIELD_NUMBER: _ClassVar[int]
    ATTEMPT_FIELD_NUMBER: _ClassVar[int]
    TRANSITION_FIELD_NUMBER: _ClassVar[int]
    PROGRESS_FIELD_NUMBER: _ClassVar[int]
    sequence: int
    job_id: str
    batch_index: int
    time: _timestamp_pb2.Timestamp
    attempt: int
    transition: Transition
    progress: Progress
    def __init__(self, sequence: _Optional[int] = ..., job_id: _Optional[str] = ..., batch_index: _Optional[int] = ..., time: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ..., attempt: _Optional[int] = ..., transition: _Optional[_Union[Transition, _Mapping]] = ..., progress: _Optional[_Union[Progress, _Mapping]] = ...) -> None: ...
