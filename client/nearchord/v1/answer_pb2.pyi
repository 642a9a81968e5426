import datetime

from google.protobuf import timestamp_pb2 as _timestamp_pb2
from nearchord.v1 import job_pb2 as _job_pb2
from nearchord.v1 import question_pb2 as _question_pb2
from google.protobuf.internal import containers as _containers
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from collections.abc import Iterable as _Iterable, Mapping as _Mapping
from typing import ClassVar as _ClassVar, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class ProofKind(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    PROOF_KIND_UNSPECIFIED: _ClassVar[ProofKind]
    PROOF_KIND_CERTIFICATE: _ClassVar[ProofKind]
    PROOF_KIND_SEARCH: _ClassVar[ProofKind]
    PROOF_KIND_PACKING: _ClassVar[ProofKind]
    PROOF_KIND_BRANCH: _ClassVar[ProofKind]

class ElementType(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    ELEMENT_TYPE_UNSPECIFIED: _ClassVar[ElementType]
    ELEMENT_TYPE_UINT32: _ClassVar[ElementType]
    ELEMENT_TYPE_INT64: _ClassVar[ElementType]
PROOF_KIND_UNSPECIFIED: ProofKind
PROOF_KIND_CERTIFICATE: ProofKind
PROOF_KIND_SEARCH: ProofKind
PROOF_KIND_PACKING: ProofKind
PROOF_KIND_BRANCH: ProofKind
ELEMENT_TYPE_UNSPECIFIED: ElementType
ELEMENT_TYPE_UINT32: ElementType
ELEMENT_TYPE_INT64: ElementType

class Rational(_message.Message):
    __slots__ = ("numerator", "denominator")
    NUMERATOR_FIELD_NUMBER: _ClassVar[int]
    DENOMINATOR_FIELD_NUMBER: _ClassVar[int]
    numerator: int
    denominator: int
    def __init__(self, numerator: _Optional[int] = ..., denominator: _Optional[int] = ...) -> None: ...

class ColumnInfo(_message.Message):
    __slots__ = ("name", "type", "length")
    NAME_FIELD_NUMBER: _ClassVar[int]
    TYPE_FIELD_NUMBER: _ClassVar[int]
    LENGTH_FIELD_NUMBER: _ClassVar[int]
    name: str
    type: ElementType
    length: int
    def __init__(self, name: _Optional[str] = ..., type: _Optional[_Union[ElementType, str]] = ..., length: _Optional[int] = ...) -> None: ...

class PhaseSeconds(_message.Message):
    __slots__ = ("phase", "seconds")
    PHASE_FIELD_NUMBER: _ClassVar[int]
    SECONDS_FIELD_NUMBER: _ClassVar[int]
    phase: _job_pb2.Phase
    seconds: float
    def __init__(self, phase: _Optional[_Union[_job_pb2.Phase, str]] = ..., seconds: _Optional[float] = ...) -> None: ...

class Provenance(_message.Message):
    __slots__ = ("graph_address", "weights_address", "solver_version", "proof_format", "budget", "when_over", "attempt", "phases", "seconds", "wait_seconds", "peak_memory_bytes", "finished_at")
    GRAPH_ADDRESS_FIELD_NUMBER: _ClassVar[int]
    WEIGHTS_ADDRESS_FIELD_NUMBER: _ClassVar[int]
    SOLVER_VERSION_FIELD_NUMBER: _ClassVar[int]
    PROOF_FORMAT_FIELD_NUMBER: _ClassVar[int]
    BUDGET_FIELD_NUMBER: _ClassVar[int]
    WHEN_OVER_FIELD_NUMBER: _ClassVar[int]
    ATTEMPT_FIELD_NUMBER: _ClassVar[int]
    PHASES_FIELD_NUMBER: _ClassVar[int]
    SECONDS_FIELD_NUMBER: _ClassVar[int]
    WAIT_SECONDS_FIELD_NUMBER: _ClassVar[int]
    PEAK_MEMORY_BYTES_FIELD_NUMBER: _ClassVar[int]
    FINISHED_AT_FIELD_NUMBER: _ClassVar[int]
    graph_address: str
    weights_address: str
    solver_version: str
    proof_format: int
    budget: _question_pb2.Budget
    when_over: _question_pb2.WhenOver
    attempt: int
    phases: _containers.RepeatedCompositeFieldContainer[PhaseSeconds]
    seconds: float
    wait_seconds: float
    peak_memory_bytes: int
    finished_at: _timestamp_pb2.Timestamp
    def __init__(self, graph_address: _Optional[str] = ..., weights_address: _Optional[str] = ..., solver_version: _Optional[str] = ..., proof_format: _Optional[int] = ..., budget: _Optional[_Union[_question_pb2.Budget, _Mapping]] = ..., when_over: _Optional[_Union[_question_pb2.WhenOver, str]] = ..., attempt: _Optional[int] = ..., phases: _Optional[_Iterable[_Union[PhaseSeconds, _Mapping]]] = ..., seconds: _Optional[float] = ..., wait_seconds: _Optional[float] = ..., peak_memory_bytes: _Optional[int] = ..., finished_at: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ...) -> None: ...

class Recognition(_message.Message):
    __slots__ = ("chordal", "interval", "split", "splittance")
    CHORDAL_FIELD_NUMBER: _ClassVar[int]
    INTERVAL_FIELD_NUMBER: _ClassVar[int]
    SPLIT_FIELD_NUMBER: _ClassVar[int]
    SPLITTANCE_FIELD_NUMBER: _ClassVar[int]
    chordal: bool
    interval: bool
    split: bool
    splittance: int
    def __init__(self, chordal: bool = ..., interval: bool = ..., split: bool = ..., splittance: _Optional[int] = ...) -> None: ...

class Prediction(_message.Message):
    __slots__ = ("question", "colours", "states", "at_least", "memory_bytes", "fits")
    QUESTION_FIELD_NUMBER: _ClassVar[int]
    COLOURS_FIELD_NUMBER: _ClassVar[int]
    STATES_FIELD_NUMBER: _ClassVar[int]
    AT_LEAST_FIELD_NUMBER: _ClassVar[int]
    MEMORY_BYTES_FIELD_NUMBER: _ClassVar[int]
    FITS_FIELD_NUMBER: _ClassVar[int]
    question: str
    colours: int
    states: int
    at_least: bool
    memory_bytes: int
    fits: bool
    def __init__(self, question: _Optional[str] = ..., colours: _Optional[int] = ..., states: _Optional[int] = ..., at_least: bool = ..., memory_bytes: _Optional[int] = ..., fits: bool = ...) -> None: ...

class StructureReport(_message.Message):
    __slots__ = ("components", "largest_core", "predictions")
    COMPONENTS_FIELD_NUMBER: _ClassVar[int]
    LARGEST_CORE_FIELD_NUMBER: _ClassVar[int]
    PREDICTIONS_FIELD_NUMBER: _ClassVar[int]
    components: int
    largest_core: int
    predictions: _containers.RepeatedCompositeFieldContainer[Prediction]
    def __init__(self, components: _Optional[int] = ..., largest_core: _Optional[int] = ..., predictions: _Optional[_Iterable[_Union[Prediction, _Mapping]]] = ...) -> None: ...

class AnswerHead(_message.Message):
    __slots__ = ("job_id", "batch_index", "label", "question", "verdict", "value", "bound", "reason", "fill", "fill_lower_bound", "states", "bags", "largest_bag", "parts", "fill_cores", "proof", "proof_kinds", "provenance", "columns", "names_address", "vertices", "recognition", "structure", "count")
    JOB_ID_FIELD_NUMBER: _ClassVar[int]
    BATCH_INDEX_FIELD_NUMBER: _ClassVar[int]
    LABEL_FIELD_NUMBER: _ClassVar[int]
    QUESTION_FIELD_NUMBER: _ClassVar[int]
    VERDICT_FIELD_NUMBER: _ClassVar[int]
    VALUE_FIELD_NUMBER: _ClassVar[int]
    BOUND_FIELD_NUMBER: _ClassVar[int]
    REASON_FIELD_NUMBER: _ClassVar[int]
    FILL_FIELD_NUMBER: _ClassVar[int]
    FILL_LOWER_BOUND_FIELD_NUMBER: _ClassVar[int]
    STATES_FIELD_NUMBER: _ClassVar[int]
    BAGS_FIELD_NUMBER: _ClassVar[int]
    LARGEST_BAG_FIELD_NUMBER: _ClassVar[int]
    PARTS_FIELD_NUMBER: _ClassVar[int]
    FILL_CORES_FIELD_NUMBER: _ClassVar[int]
    PROOF_FIELD_NUMBER: _ClassVar[int]
    PROOF_KINDS_FIELD_NUMBER: _ClassVar[int]
    PROVENANCE_FIELD_NUMBER: _ClassVar[int]
    COLUMNS_FIELD_NUMBER: _ClassVar[int]
    NAMES_ADDRESS_FIELD_NUMBER: _ClassVar[int]
    VERTICES_FIELD_NUMBER: _ClassVar[int]
    RECOGNITION_FIELD_NUMBER: _ClassVar[int]
    STRUCTURE_FIELD_NUMBER: _ClassVar[int]
    COUNT_FIELD_NUMBER: _ClassVar[int]
    job_id: str
    batch_index: int
    label: str
    question: _question_pb2.Question
    verdict: _job_pb2.Verdict
    value: Rational
    bound: Rational
    reason: str
    fill: int
    fill_lower_bound: int
    states: int
    bags: int
    largest_bag: int
    parts: int
    fill_cores: int
    proof: ProofKind
    proof_kinds: _containers.RepeatedScalarFieldContainer[ProofKind]
    provenance: Provenance
    columns: _containers.RepeatedCompositeFieldContainer[ColumnInfo]
    names_address: str
    vertices: int
    recognition: Recognition
    structure: StructureReport
    count: str
    def __init__(self, job_id: _Optional[str] = ..., batch_index: _Optional[int] = ..., label: _Optional[str] = ..., question: _Optional[_Union[_question_pb2.Question, _Mapping]] = ..., verdict: _Optional[_Union[_job_pb2.Verdict, str]] = ..., value: _Optional[_Union[Rational, _Mapping]] = ..., bound: _Optional[_Union[Rational, _Mapping]] = ..., reason: _Optional[str] = ..., fill: _Optional[int] = ..., fill_lower_bound: _Optional[int] = ..., states: _Optional[int] = ..., bags: _Optional[int] = ..., largest_bag: _Optional[int] = ..., parts: _Optional[int] = ..., fill_cores: _Optional[int] = ..., proof: _Optional[_Union[ProofKind, str]] = ..., proof_kinds: _Optional[_Iterable[_Union[ProofKind, str]]] = ..., provenance: _Optional[_Union[Provenance, _Mapping]] = ..., columns: _Optional[_Iterable[_Union[ColumnInfo, _Mapping]]] = ..., names_address: _Optional[str] = ..., vertices: _Optional[int] = ..., recognition: _Optional[_Union[Recognition, _Mapping]] = ..., structure: _Optional[_Union[StructureReport, _Mapping]] = ..., count: _Optional[str] = ...) -> None: ...

class ColumnChunk(_message.Message):
    __slots__ = ("name", "offset", "data")
    NAME_FIELD_NUMBER: _ClassVar[int]
    OFFSET_FIELD_NUMBER: _ClassVar[int]
    DATA_FIELD_NUMBER: _ClassVar[int]
    name: str
    offset: int
    data: bytes
    def __init__(self, name: _Optional[str] = ..., offset: _Optional[int] = ..., data: _Optional[bytes] = ...) -> None: ...

class AnswerPart(_message.Message):
    __slots__ = ("head", "column")
    HEAD_FIELD_NUMBER: _ClassVar[int]
    COLUMN_FIELD_NUMBER: _ClassVar[int]
    head: AnswerHead
    column: ColumnChunk
    def __init__(self, head: _Optional[_Union[AnswerHead, _Mapping]] = ..., column: _Optional[_Union[ColumnChunk, _Mapping]] = ...) -> None: ...
