import datetime

from google.protobuf import timestamp_pb2 as _timestamp_pb2
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from collections.abc import Mapping as _Mapping
from typing import ClassVar as _ClassVar, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class ContentKind(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    CONTENT_KIND_UNSPECIFIED: _ClassVar[ContentKind]
    CONTENT_KIND_GRAPH: _ClassVar[ContentKind]
    CONTENT_KIND_WEIGHTS: _ClassVar[ContentKind]
    CONTENT_KIND_NAMES: _ClassVar[ContentKind]
CONTENT_KIND_UNSPECIFIED: ContentKind
CONTENT_KIND_GRAPH: ContentKind
CONTENT_KIND_WEIGHTS: ContentKind
CONTENT_KIND_NAMES: ContentKind

class Content(_message.Message):
    __slots__ = ("address", "kind", "size_bytes", "vertices", "edges", "created_at")
    ADDRESS_FIELD_NUMBER: _ClassVar[int]
    KIND_FIELD_NUMBER: _ClassVar[int]
    SIZE_BYTES_FIELD_NUMBER: _ClassVar[int]
    VERTICES_FIELD_NUMBER: _ClassVar[int]
    EDGES_FIELD_NUMBER: _ClassVar[int]
    CREATED_AT_FIELD_NUMBER: _ClassVar[int]
    address: str
    kind: ContentKind
    size_bytes: int
    vertices: int
    edges: int
    created_at: _timestamp_pb2.Timestamp
    def __init__(self, address: _Optional[str] = ..., kind: _Optional[_Union[ContentKind, str]] = ..., size_bytes: _Optional[int] = ..., vertices: _Optional[int] = ..., edges: _Optional[int] = ..., created_at: _Optional[_Union[datetime.datetime, _timestamp_pb2.Timestamp, _Mapping]] = ...) -> None: ...

class GraphInput(_message.Message):
    __slots__ = ("graph_address", "graph_content", "weights_address", "weights_content", "names_address", "names_content")
    GRAPH_ADDRESS_FIELD_NUMBER: _ClassVar[int]
    GRAPH_CONTENT_FIELD_NUMBER: _ClassVar[int]
    WEIGHTS_ADDRESS_FIELD_NUMBER: _ClassVar[int]
    WEIGHTS_CONTENT_FIELD_NUMBER: _ClassVar[int]
    NAMES_ADDRESS_FIELD_NUMBER: _ClassVar[int]
    NAMES_CONTENT_FIELD_NUMBER: _ClassVar[int]
    graph_address: str
    graph_content: bytes
    weights_address: str
    weights_content: bytes
    names_address: str
    names_content: bytes
    def __init__(self, graph_address: _Optional[str] = ..., graph_content: _Optional[bytes] = ..., weights_address: _Optional[str] = ..., weights_content: _Optional[bytes] = ..., names_address: _Optional[str] = ..., names_content: _Optional[bytes] = ...) -> None: ...
