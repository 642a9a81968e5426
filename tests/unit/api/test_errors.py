"""The mapping from the domain's errors to rich statuses."""

from __future__ import annotations

import grpc
import pytest
from google.protobuf.any_pb2 import Any as AnyMessage
from google.rpc import error_details_pb2, status_pb2
from nearchord.v1 import error_pb2
from nearchord_service.api import errors as mapping
from nearchord_service.model import errors

VIOLATION = errors.FieldViolation("spec.label", "is too long; shorten it")
ADDRESS = "ab" * 32

# One of each class, with its code, its reason and the details behind the ErrorInfo.
EXAMPLES: list[tuple[errors.ServiceError, str, str, list[str]]] = [
    (errors.FieldInvalid(VIOLATION), "INVALID_ARGUMENT", "FIELD_INVALID", ["BadRequest"]),
    (errors.ContentInvalid(VIOLATION), "INVALID_ARGUMENT", "CONTENT_INVALID", ["BadRequest"]),
    (errors.DigestMismatch(ADDRESS, "cd" * 32), "INVALID_ARGUMENT", "DIGEST_MISMATCH", ["BadRequest"]),
    (errors.UploadOffset(ADDRESS, 7, 5), "FAILED_PRECONDITION", "UPLOAD_OFFSET", ["PreconditionFailure"]),
    (errors.UploadBusy(ADDRESS), "ABORTED", "UPLOAD_BUSY", ["RetryInfo"]),
    (errors.ContentUnknown(ADDRESS), "NOT_FOUND", "CONTENT_UNKNOWN", ["ResourceInfo"]),
    (errors.JobUnknown("j"), "NOT_FOUND", "JOB_UNKNOWN", ["ResourceInfo"]),
    (errors.BatchUnknown("b"), "NOT_FOUND", "BATCH_UNKNOWN", ["ResourceInfo"]),
    (errors.ContentInUse(ADDRESS), "FAILED_PRECONDITION", "CONTENT_IN_USE", ["PreconditionFailure"]),
    (errors.JobNotDone("j"), "FAILED_PRECONDITION", "JOB_NOT_DONE", ["PreconditionFailure"]),
    (errors.BatchNotDone("b"), "FAILED_PRECONDITION", "BATCH_NOT_DONE", ["PreconditionFailure"]),
    (errors.RequestIdReused("r"), "ALREADY_EXISTS", "REQUEST_ID_REUSED", ["ResourceInfo"]),
    (
        errors.QuotaExceeded("jobs", "too many; wait", 2.5),
        "RESOURCE_EXHAUSTED",
        "QUOTA_EXCEEDED",
        ["QuotaFailure", "RetryInfo"],
    ),
    (errors.QuotaExceeded("spec", "too large", None), "RESOURCE_EXHAUSTED", "QUOTA_EXCEEDED", ["QuotaFailure"]),
    (errors.Draining(), "UNAVAILABLE", "DRAINING", ["RetryInfo"]),
    (errors.StoreUnavailable("the disk is full; free some"), "UNAVAILABLE", "STORE_UNAVAILABLE", ["RetryInfo"]),
]

KINDS = {name: getattr(error_details_pb2, name) for name in ("ErrorInfo", *{d for e in EXAMPLES for d in e[3]})}


def details_of(error: Exception) -> tuple[grpc.StatusCode, status_pb2.Status, list[object]]:
    code, message, ((key, data),) = mapping.to_status(error)
    status = status_pb2.Status.FromString(data)
    assert key == "grpc-status-details-bin"
    assert (status.code, status.message) == (code.value[0], message)
    return code, status, [unpacked(detail) for detail in status.details]


def unpacked(detail: AnyMessage) -> object:
    message = KINDS[detail.TypeName().removeprefix("google.rpc.")]()
    assert detail.Unpack(message)
    return message


@pytest.mark.parametrize(("error", "code", "reason", "kinds"), EXAMPLES, ids=lambda v: type(v).__name__)
def test_each_error_has_its_status(error: errors.ServiceError, code: str, reason: str, kinds: list[str]) -> None:
    """The first detail is the ErrorInfo with the stable reason; the rest fits the kind of error."""
    found, status, (info, *rest) = details_of(error)
    assert found.name == code
    assert status.message == str(error)
    assert isinstance(info, error_details_pb2.ErrorInfo)
    assert (info.reason, info.domain) == (reason, "nearchord")
    assert [type(detail).__name__ for detail in rest] == kinds


def leaves(kind: type[errors.ServiceError]) -> set[type[errors.ServiceError]]:
    below = kind.__subclasses__()
    return {kind}.union(*map(leaves, below))


def test_every_class_of_error_is_mapped_and_shown() -> None:
    """Classes that only group others are the ones without a row."""
    groups = {errors.ServiceError, errors.Unknown, errors.NotYet, errors.TryLater}
    assert set(mapping.TABLE) == leaves(errors.ServiceError) - groups
    assert {type(example[0]) for example in EXAMPLES} == set(mapping.TABLE)


def test_every_reason_of_the_contract_is_used_once() -> None:
    used = [row.reason for row in mapping.TABLE.values()]
    unused = set(error_pb2.ErrorReason.values()) - set(used)
    assert len(set(used)) == len(used)
    assert unused == {error_pb2.ERROR_REASON_UNSPECIFIED, error_pb2.ERROR_REASON_INTERNAL}


def test_a_violation_is_named_with_its_field() -> None:
    _, _, (_, bad) = details_of(errors.FieldInvalid(VIOLATION))
    assert [(v.field, v.description) for v in bad.field_violations] == [("spec.label", "is too long; shorten it")]  # type: ignore[attr-defined]


def test_a_wrong_offset_says_the_committed_one() -> None:
    _, _, (info, _) = details_of(errors.UploadOffset(ADDRESS, 7, 5))
    assert info.metadata["committed_bytes"] == "5"  # type: ignore[attr-defined]


def test_a_defect_tells_nothing_of_itself() -> None:
    code, status, (info,) = details_of(RuntimeError("secret"))
    assert code is grpc.StatusCode.INTERNAL
    assert info.reason == "INTERNAL"  # type: ignore[attr-defined]
    assert "secret" not in str(status)


@pytest.mark.parametrize("character", ["x", "\N{SNOWMAN}", "\N{GRINNING FACE}"])
def test_a_status_fits_the_trailers_of_a_call(character: str) -> None:
    """However long the words of a caller are that an error repeats, 8 KiB hold message and details."""
    long = character * 5_000
    for error in (
        errors.FieldInvalid(*[errors.FieldViolation(long, long)] * 50),
        errors.JobUnknown(long),
        errors.QuotaExceeded(long, long, 1.0),
        errors.RequestIdReused(long),
    ):
        _, message, ((_, data),) = mapping.to_status(error)
        percent_encoded = sum(1 if 0x20 <= byte < 0x7F else 3 for byte in message.encode())
        assert percent_encoded + 4 * len(data) / 3 < 8_000
