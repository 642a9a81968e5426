"""Everything that can be wrong with a call. Spent budgets, contradicting pins and cancels are verdicts, not errors.

ServiceError
 |- FieldInvalid            a field of a request is wrong (place and remedy for each)
 |   `- ContentInvalid      content is not in canonical form (first offending row)
 |- DigestMismatch          bytes do not hash to the address announced
 |- UploadOffset            an upload goes on at the wrong offset
 |- UploadBusy              two calls write one upload
 |- Unknown                 no such thing for this caller
 |   |- ContentUnknown
 |   |- JobUnknown
 |   `- BatchUnknown
 |- NotYet                  the state of a thing forbids it now
 |   |- ContentInUse
 |   |- JobNotDone
 |   `- BatchNotDone
 |- RequestIdReused         same request id, other content
 |- QuotaExceeded           a limit of this caller is reached
 `- TryLater                nothing wrong with the call
     |- Draining
     `- StoreUnavailable
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class FieldViolation:
    """A wrong field: its path in the request, what is wrong and what to do about it."""

    field: str
    description: str


class ServiceError(Exception):
    """Base of every error that a caller may see; its text says what was wrong, where, and what to do."""


class FieldInvalid(ServiceError):
    """One or more fields are wrong."""

    def __init__(self, *violations: FieldViolation) -> None:
        super().__init__("; ".join(f"{v.field}: {v.description}" for v in violations))
        self.violations = violations


class ContentInvalid(FieldInvalid):
    """Content is not in its canonical form."""


class DigestMismatch(ServiceError):
    """The bytes received do not hash to the address announced for them."""

    def __init__(self, announced: str, computed: str) -> None:
        super().__init__(
            f"the bytes received hash to {computed}, but {announced} was announced; "
            "nothing was stored: upload again from offset 0"
        )


class UploadOffset(ServiceError):
    """An upload goes on at another offset than the committed one."""

    def __init__(self, address: str, offset: int, committed: int) -> None:
        super().__init__(
            f"upload {address} goes on at offset {committed}, not {offset}; ask GetUpload and resume there"
        )
        self.address = address
        self.committed = committed


class UploadBusy(ServiceError):
    """Another call is writing the same upload."""

    def __init__(self, address: str) -> None:
        super().__init__(f"another call is writing upload {address}; try again when it has ended")
        self.address = address


class Unknown(ServiceError):
    """No such thing for this caller."""

    kind = "thing"

    def __init__(self, name: str) -> None:
        super().__init__(f"no {self.kind} {name!r} is stored for this caller")
        self.name = name


class ContentUnknown(Unknown):
    """No such content for this caller."""

    kind = "content"


class JobUnknown(Unknown):
    """No such job for this caller."""

    kind = "job"


class BatchUnknown(Unknown):
    """No such batch for this caller."""

    kind = "batch"


class NotYet(ServiceError):
    """The state of a thing forbids the call now."""

    def __init__(self, name: str, description: str) -> None:
        super().__init__(description)
        self.name = name


class ContentInUse(NotYet):
    """A job that has not ended needs the content."""

    def __init__(self, address: str) -> None:
        super().__init__(address, f"content {address} is needed by a job that has not ended; cancel it or wait")


class JobNotDone(NotYet):
    """The job has not ended."""

    def __init__(self, job_id: str) -> None:
        super().__init__(job_id, f"job {job_id} has not ended; watch it until DONE, or cancel it")


class BatchNotDone(NotYet):
    """Jobs of the batch have not ended."""

    def __init__(self, batch_id: str) -> None:
        super().__init__(
            batch_id, f"jobs of batch {batch_id} have not ended; watch it until all are DONE, or cancel it"
        )


class RequestIdReused(ServiceError):
    """The request id was used before with other content."""

    def __init__(self, request_id: str) -> None:
        super().__init__(f"request id {request_id!r} was used before with other content; choose a new one")
        self.request_id = request_id


class QuotaExceeded(ServiceError):
    """A limit of this caller is reached; `retry_after` in seconds is None when waiting does not help."""

    def __init__(self, subject: str, description: str, retry_after: float | None) -> None:
        super().__init__(f"{subject}: {description}")
        self.subject = subject
        self.description = description
        self.retry_after = retry_after


class TryLater(ServiceError):
    """Nothing is wrong with the call; try again after `retry_after` seconds."""

    retry_after = 1.0


class Draining(TryLater):
    """The server is shutting down."""

    def __init__(self) -> None:
        super().__init__("the server is shutting down; connect again and resume from the last number")


class StoreUnavailable(TryLater):
    """The store cannot read or write now."""
