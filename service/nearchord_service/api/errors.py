"""From the domain's errors to statuses on the wire: one table, one builder.

Every failed call carries a google.rpc.Status whose first detail is an ErrorInfo with a stable reason of the domain
`nearchord`; the others say which field, quota, thing or state was in the way.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import grpc
from google.protobuf.any_pb2 import Any as AnyMessage
from google.protobuf.duration_pb2 import Duration
from google.protobuf.message import Message
from google.rpc import error_details_pb2 as details
from google.rpc import status_pb2
from nearchord.v1 import error_pb2

from nearchord_service.model import errors

DOMAIN = "nearchord"
STATUS_KEY = "grpc-status-details-bin"

# A status travels in the trailers of a call, where peers accept 8 KiB in all.
_MOST_TEXT = 600
_MOST_NAME = 100
_MOST_VIOLATIONS = 8
_BUSY_RETRY_SECONDS = 1.0


@dataclass(frozen=True)
class Row:
    """How one class of errors is written."""

    code: grpc.StatusCode
    reason: error_pb2.ErrorReason
    detail: Callable[[Any], Sequence[Message]]
    metadata: Callable[[Any], dict[str, str]] = lambda _: {}


def clipped(text: str, most: int) -> str:
    """Return the text, or its beginning when its UTF-8 bytes would not fit."""
    data = text.encode("utf-8", "replace")
    if len(data) <= most:
        return data.decode()
    return data[: most - 3].decode("utf-8", "ignore") + "..."


def _bad_request(error: errors.FieldInvalid) -> Sequence[Message]:
    violations = [
        details.BadRequest.FieldViolation(
            field=clipped(v.field, _MOST_NAME), description=clipped(v.description, _MOST_TEXT // 2)
        )
        for v in error.violations[:_MOST_VIOLATIONS]
    ]
    return [details.BadRequest(field_violations=violations)]


def _digest(error: errors.DigestMismatch) -> Sequence[Message]:
    violation = details.BadRequest.FieldViolation(field="opening.address", description=str(error))
    return [details.BadRequest(field_violations=[violation])]


def _retry(seconds: float | None) -> Sequence[Message]:
    if seconds is None:
        return []
    whole = int(seconds)
    return [details.RetryInfo(retry_delay=Duration(seconds=whole, nanos=int((seconds - whole) * 1e9)))]


def _quota(error: errors.QuotaExceeded) -> Sequence[Message]:
    violation = details.QuotaFailure.Violation(
        subject=clipped(error.subject, _MOST_NAME), description=clipped(error.description, _MOST_TEXT // 2)
    )
    return [details.QuotaFailure(violations=[violation]), *_retry(error.retry_after)]


def _resource(kind: str, name: str, description: str) -> Sequence[Message]:
    return [
        details.ResourceInfo(
            resource_type=kind, resource_name=clipped(name, _MOST_NAME), description=clipped(description, _MOST_TEXT)
        )
    ]


def _precondition(kind: str, subject: str, description: str) -> Sequence[Message]:
    violation = details.PreconditionFailure.Violation(
        type=kind, subject=clipped(subject, _MOST_NAME), description=description
    )
    return [details.PreconditionFailure(violations=[violation])]


def _unknown(reason: error_pb2.ErrorReason) -> Row:
    return Row(grpc.StatusCode.NOT_FOUND, reason, lambda e: _resource(e.kind, e.name, str(e)))


def _not_yet(reason: error_pb2.ErrorReason) -> Row:
    name = reason_name(reason)
    return Row(grpc.StatusCode.FAILED_PRECONDITION, reason, lambda e: _precondition(name, e.name, str(e)))


def reason_name(reason: error_pb2.ErrorReason) -> str:
    """Return the reason as it stands in an ErrorInfo."""
    return error_pb2.ErrorReason.Name(reason).removeprefix("ERROR_REASON_")


TABLE: dict[type[errors.ServiceError], Row] = {
    errors.FieldInvalid: Row(grpc.StatusCode.INVALID_ARGUMENT, error_pb2.ERROR_REASON_FIELD_INVALID, _bad_request),
    errors.ContentInvalid: Row(grpc.StatusCode.INVALID_ARGUMENT, error_pb2.ERROR_REASON_CONTENT_INVALID, _bad_request),
    errors.DigestMismatch: Row(grpc.StatusCode.INVALID_ARGUMENT, error_pb2.ERROR_REASON_DIGEST_MISMATCH, _digest),
    errors.UploadOffset: Row(
        grpc.StatusCode.FAILED_PRECONDITION,
        error_pb2.ERROR_REASON_UPLOAD_OFFSET,
        lambda e: _precondition("UPLOAD_OFFSET", e.address, str(e)),
        lambda e: {"committed_bytes": str(e.committed)},
    ),
    errors.UploadBusy: Row(
        grpc.StatusCode.ABORTED, error_pb2.ERROR_REASON_UPLOAD_BUSY, lambda _: _retry(_BUSY_RETRY_SECONDS)
    ),
    errors.ContentUnknown: _unknown(error_pb2.ERROR_REASON_CONTENT_UNKNOWN),
    errors.JobUnknown: _unknown(error_pb2.ERROR_REASON_JOB_UNKNOWN),
    errors.BatchUnknown: _unknown(error_pb2.ERROR_REASON_BATCH_UNKNOWN),
    errors.ContentInUse: _not_yet(error_pb2.ERROR_REASON_CONTENT_IN_USE),
    errors.JobNotDone: _not_yet(error_pb2.ERROR_REASON_JOB_NOT_DONE),
    errors.BatchNotDone: _not_yet(error_pb2.ERROR_REASON_BATCH_NOT_DONE),
    errors.RequestIdReused: Row(
        grpc.StatusCode.ALREADY_EXISTS,
        error_pb2.ERROR_REASON_REQUEST_ID_REUSED,
        lambda e: _resource("request", e.request_id, str(e)),
    ),
    errors.QuotaExceeded: Row(grpc.StatusCode.RESOURCE_EXHAUSTED, error_pb2.ERROR_REASON_QUOTA_EXCEEDED, _quota),
    errors.Draining: Row(grpc.StatusCode.UNAVAILABLE, error_pb2.ERROR_REASON_DRAINING, lambda e: _retry(e.retry_after)),
    errors.StoreUnavailable: Row(
        grpc.StatusCode.UNAVAILABLE, error_pb2.ERROR_REASON_STORE_UNAVAILABLE, lambda e: _retry(e.retry_after)
    ),
}
"""Every class of `model.errors` that is raised has its row; classes that only group others have none."""

_DEFECT = Row(grpc.StatusCode.INTERNAL, error_pb2.ERROR_REASON_INTERNAL, lambda _: [])


def to_status(error: Exception) -> tuple[grpc.StatusCode, str, tuple[tuple[str, bytes], ...]]:
    """Return code, message and trailers for an error; whatever is not in the table is a defect and tells nothing."""
    row = TABLE.get(type(error), _DEFECT) if isinstance(error, errors.ServiceError) else _DEFECT
    message = "the server failed; its log has the details" if row is _DEFECT else clipped(str(error), _MOST_TEXT)
    info = details.ErrorInfo(reason=reason_name(row.reason), domain=DOMAIN, metadata=row.metadata(error))
    status = status_pb2.Status(code=row.code.value[0], message=message)
    for detail in (info, *row.detail(error)):
        packed = AnyMessage()
        packed.Pack(detail)
        status.details.append(packed)
    return row.code, message, ((STATUS_KEY, status.SerializeToString()),)
