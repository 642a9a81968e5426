from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from typing import ClassVar as _ClassVar

DESCRIPTOR: _descriptor.FileDescriptor

class ErrorReason(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    ERROR_REASON_UNSPECIFIED: _ClassVar[ErrorReason]
    ERROR_REASON_FIELD_INVALID: _ClassVar[ErrorReason]
    ERROR_REASON_CONTENT_INVALID: _ClassVar[ErrorReason]
    ERROR_REASON_DIGEST_MISMATCH: _ClassVar[ErrorReason]
    ERROR_REASON_UPLOAD_OFFSET: _ClassVar[ErrorReason]
    ERROR_REASON_UPLOAD_BUSY: _ClassVar[ErrorReason]
    ERROR_REASON_CONTENT_UNKNOWN: _ClassVar[ErrorReason]
    ERROR_REASON_CONTENT_IN_USE: _ClassVar[ErrorReason]
    ERROR_REASON_JOB_UNKNOWN: _ClassVar[ErrorReason]
    ERROR_REASON_BATCH_UNKNOWN: _ClassVar[ErrorReason]
    ERROR_REASON_JOB_NOT_DONE: _ClassVar[ErrorReason]
    ERROR_REASON_BATCH_NOT_DONE: _ClassVar[ErrorReason]
    ERROR_REASON_REQUEST_ID_REUSED: _ClassVar[ErrorReason]
    ERROR_REASON_QUOTA_EXCEEDED: _ClassVar[ErrorReason]
    ERROR_REASON_DRAINING: _ClassVar[ErrorReason]
    ERROR_REASON_STORE_UNAVAILABLE: _ClassVar[ErrorReason]
    ERROR_REASON_INTERNAL: _ClassVar[ErrorReason]
ERROR_REASON_UNSPECIFIED: ErrorReason
ERROR_REASON_FIELD_INVALID: ErrorReason
ERROR_REASON_CONTENT_INVALID: ErrorReason
ERROR_REASON_DIGEST_MISMATCH: ErrorReason
ERROR_REASON_UPLOAD_OFFSET: ErrorReason
ERROR_REASON_UPLOAD_BUSY: ErrorReason
ERROR_REASON_CONTENT_UNKNOWN: ErrorReason
ERROR_REASON_CONTENT_IN_USE: ErrorReason
ERROR_REASON_JOB_UNKNOWN: ErrorReason
ERROR_REASON_BATCH_UNKNOWN: ErrorReason
ERROR_REASON_JOB_NOT_DONE: ErrorReason
ERROR_REASON_BATCH_NOT_DONE: ErrorReason
ERROR_REASON_REQUEST_ID_REUSED: ErrorReason
ERROR_REASON_QUOTA_EXCEEDED: ErrorReason
ERROR_REASON_DRAINING: ErrorReason
ERROR_REASON_STORE_UNAVAILABLE: ErrorReason
ERROR_REASON_INTERNAL: ErrorReason
