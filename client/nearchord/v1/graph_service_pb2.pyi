from nearchord.v1 import content_pb2 as _content_pb2
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from collections.abc import Mapping as _Mapping
from typing import ClassVar as _ClassVar, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class UploadOpening(_message.Message):
    __slots__ = ("kind", "address", "size_bytes", "offset")
    KIND_FIELD_NUMBER: _ClassVar[int]
    ADDRESS_FIELD_NUMBER: _ClassVar[int]
    SIZE_BYTES_FIELD_NUMBER: _ClassVar[int]
    OFFSET_FIELD_NUMBER: _ClassVar[int]
    kind: _content_pb2.ContentKind
    address: str
    size_bytes: int
    offset: int
    def __init__(self, kind: _Optional[_Union[_content_pb2.ContentKind, str]] = ..., address: _Optional[str] = ..., size_bytes: _Optional[int] = ..., offset: _Optional[int] = ...) -> None: ...

class StoreContentRequest(_message.Message):
    __slots__ = ("opening", "piece")
    OPENING_FIELD_NUMBER: _ClassVar[int]
    PIECE_FIELD_NUMBER: _ClassVar[int]
    opening: UploadOpening
    piece: bytes
    def __init__(self, opening: _Optional[_Union[UploadOpening, _Mapping]] = ..., piece: _Optional[bytes] = ...) -> None: ...

class StoreContentResponse(_message.Message):
    __slots__ = ("content",)
    CONTENT_FIELD_NUMBER: _ClassVar[int]
    content: _content_pb2.Content
    def __init__(self, content: _Optional[_Union[_content_pb2.Content, _Mapping]] = ...) -> None: ...

class GetUploadRequest(_message.Message):
    __slots__ = ("address",)
    ADDRESS_FIELD_NUMBER: _ClassVar[int]
    address: str
    def __init__(self, address: _Optional[str] = ...) -> None: ...

class GetUploadResponse(_message.Message):
    __slots__ = ("committed_bytes", "stored")
    COMMITTED_BYTES_FIELD_NUMBER: _ClassVar[int]
    STORED_FIELD_NUMBER: _ClassVar[int]
    committed_bytes: int
    stored: bool
    def __init__(self, committed_bytes: _Optional[int] = ..., stored: bool = ...) -> None: ...

class GetContentRequest(_message.Message):
    __slots__ = ("address",)
    ADDRESS_FIELD_NUMBER: _ClassVar[int]
    address: str
    def __init__(self, address: _Optional[str] = ...) -> None: ...

class GetContentResponse(_message.Message):
    __slots__ = ("content",)
    CONTENT_FIELD_NUMBER: _ClassVar[int]
    content: _content_pb2.Content
    def __init__(self, content: _Optional[_Union[_content_pb2.Content, _Mapping]] = ...) -> None: ...

class ReadContentRequest(_message.Message):
    __slots__ = ("address", "offset")
    ADDRESS_FIELD_NUMBER: _ClassVar[int]
    OFFSET_FIELD_NUMBER: _ClassVar[int]
    address: str
    offset: int
    def __init__(self, address: _Optional[str] = ..., offset: _Optional[int] = ...) -> None: ...

class ReadContentResponse(_message.Message):
    __slots__ = ("piece",)
    PIECE_FIELD_NUMBER: _ClassVar[int]
    piece: bytes
    def __init__(self, piece: _Optional[bytes] = ...) -> None: ...

class DeleteContentRequest(_message.Message):
    __slots__ = ("address",)
    ADDRESS_FIELD_NUMBER: _ClassVar[int]
    address: str
    def __init__(self, address: _Optional[str] = ...) -> None: ...

class DeleteContentResponse(_message.Message):
    __slots__ = ()
    def __init__(self) -> None: ...
