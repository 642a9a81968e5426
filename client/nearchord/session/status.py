"""From a failed call to an error: the status code chooses the class, the rich details fill it."""

from __future__ import annotations

from typing import Protocol, TypeVar

import grpc
from google.protobuf.any_pb2 import Any as Packed
from google.protobuf.message import DecodeError, Message
from google.rpc import error_details_pb2, status_pb2

from nearchord.errors import (
    AccessDenied,
    AlreadyExists,
    CallFailed,
    NearchordError,
    NotFound,
    NotReady,
    QuotaExceeded,
    Rejected,
    ServerFault,
    TimeoutExceeded,
    Unreachable,
    Violation,
)

M = TypeVar("M", bound=Message)
DETAILS_KEY = "grpc-status-details-bin"
CLASSES: dict[grpc.StatusCode, type[NearchordError]] = {
    grpc.StatusCode.INVALID_ARGUMENT: Rejected,
    grpc.StatusCode.OUT_OF_RANGE: Rejected,
    grpc.StatusCode.NOT_FOUND: NotFound,
    grpc.StatusCode.ALREADY_EXISTS: AlreadyExists,
    grpc.StatusCode.RESOURCE_EXHAUSTED: QuotaExceeded,
    grpc.StatusCode.FAILED_PRECONDITION: NotReady,
    grpc.StatusCode.ABORTED: NotReady,
    grpc.StatusCode.UNAUTHENTICATED: AccessDenied,
    grpc.StatusCode.PERMISSION_DENIED: AccessDenied,
    grpc.StatusCode.UNAVAILABLE: Unreachable,
    grpc.StatusCode.DEADLINE_EXCEEDED: TimeoutExceeded,
    grpc.StatusCode.CANCELLED: CallFailed,
}


class FailedCall(Protocol):
    """What both gRPC stacks tell about a call that failed."""

    def code(self) -> grpc.StatusCode:
        """Status code."""

    def details(self) -> str | None:
        """Text."""

    def trailing_metadata(self) -> object:
        """Trailing metadata: pairs of key and value."""


def decode(failed: FailedCall, target: str) -> NearchordError:
    """The error of a failed call; one that reached no server names the target."""
    details = _details(failed)
    info = _first(details, error_details_pb2.ErrorInfo())
    reason = info.reason if info is not None else failed.code().name
    message = failed.details() or failed.code().name
    kind = CLASSES.get(failed.code(), ServerFault)
    if kind is Unreachable and info is None:
        message = f"no answer from {target} ({message}); check the address and that the service runs"
    return kind(message, reason=reason, violations=_violations(details), retry_after=_retry_after(details))


def _details(failed: FailedCall) -> list[Packed]:
    for key, value in failed.trailing_metadata() or ():  # type: ignore[attr-defined]
        if key == DETAILS_KEY:
            try:
                return list(status_pb2.Status.FromString(value).details)
            except DecodeError:
                return []
    return []


def _first(details: list[Packed], kind: M) -> M | None:
    for packed in details:
        if packed.Unpack(kind):
            return kind
    return None


def _violations(details: list[Packed]) -> tuple[Violation, ...]:
    bad = _first(details, error_details_pb2.BadRequest()) or error_details_pb2.BadRequest()
    quota = _first(details, error_details_pb2.QuotaFailure()) or error_details_pb2.QuotaFailure()
    state = _first(details, error_details_pb2.PreconditionFailure()) or error_details_pb2.PreconditionFailure()
    thing = _first(details, error_details_pb2.ResourceInfo())
    return (
        *(Violation(v.field, v.description) for v in bad.field_violations),
        *(Violation(v.subject, v.description) for v in (*quota.violations, *state.violations)),
        *((Violation(thing.resource_name, thing.description),) if thing is not None else ()),
    )


def _retry_after(details: list[Packed]) -> float | None:
    info = _first(details, error_details_pb2.RetryInfo())
    return None if info is None else info.retry_delay.seconds + info.retry_delay.nanos / 1e9


def closed() -> CallFailed:
    """The error of a call on a session that was closed."""
    return CallFailed("the session is closed; connect again", reason="CLOSED")
