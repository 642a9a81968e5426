"""Everything that can go wrong for a caller. Spent budgets, contradicting pins and cancels are verdicts, not errors.

NearchordError
 |- BadInput              something handed to the client is wrong (also a ValueError)
 |   `- FileProblem       a file is wrong; says file and line
 |- CallFailed            a call to the service failed
 |   |- Rejected          the server found a field, content or digest wrong; see `violations`
 |   |- NotFound          this caller has no such job, batch or content
 |   |- AlreadyExists     the request id was used before with other content
 |   |- QuotaExceeded     a limit of this caller is reached
 |   |- NotReady          the state of a thing forbids the call now
 |   |- AccessDenied      the token is missing, wrong or not enough
 |   |- Unreachable       no server answers, or it is shutting down (also a ConnectionError)
 |   `- ServerFault       a defect of the server, or a call it does not know
 |- TimeoutExceeded       the time the caller allowed has passed; the job goes on (also a TimeoutError)
 |- EmbeddedFailed        the private service did not start
 `- CheckFailed           an answer is not what it says it is
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Violation:
    """One thing that was wrong with a call: where (a field path, a subject) and what, with the remedy."""

    place: str
    description: str


class NearchordError(Exception):
    """Base of every error of this package.

    `reason` is a stable word in capitals for programs ("" where there is none), `violations` the single faults the
    server named, `retry_after` the seconds after which the server suggests to try again (None: it suggests nothing).
    """

    def __init__(
        self,
        message: str,
        *,
        reason: str = "",
        violations: tuple[Violation, ...] = (),
        retry_after: float | None = None,
    ) -> None:
        super().__init__(message)
        self.reason = reason
        self.violations = violations
        self.retry_after = retry_after


class BadInput(NearchordError, ValueError):
    """Something handed to the client is wrong: `problem` says what and where, `remedy` what to do."""

    def __init__(self, problem: str, remedy: str) -> None:
        super().__init__(f"{problem}; {remedy}", reason="BAD_INPUT")
        self.problem = problem
        self.remedy = remedy


class FileProblem(BadInput):
    """A file cannot be taken: `file` names it, `line` counts from 1 (None where no line is to blame)."""

    def __init__(self, file: str, line: int | None, problem: str, remedy: str) -> None:
        place = file if line is None else f"{file}, line {line}"
        super().__init__(f"{place}: {problem}", remedy)
        self.file = file
        self.line = line
        self.problem = problem


class CallFailed(NearchordError):
    """A call to the service failed."""


class Rejected(CallFailed):
    """The server found something wrong with the call; repeating it unchanged fails again."""


class NotFound(CallFailed):
    """This caller has no such job, batch or content."""


class AlreadyExists(CallFailed):
    """The request id was used before with other content."""


class QuotaExceeded(CallFailed):
    """A limit of this caller is reached."""


class NotReady(CallFailed):
    """The state of a thing forbids the call now."""


class AccessDenied(CallFailed):
    """The token is missing, wrong, or not enough for this call."""


class Unreachable(CallFailed, ConnectionError):
    """No server answers at the target, or it is shutting down."""


class ServerFault(CallFailed):
    """A defect of the server, or a call that it does not know."""


class TimeoutExceeded(NearchordError, TimeoutError):
    """The time that the caller allowed has passed; a submitted job goes on."""


class EmbeddedFailed(NearchordError):
    """The private service did not start, or ended too early."""


class CheckFailed(NearchordError):
    """An answer is not what it says it is; the message names the place."""

    def __init__(self, message: str) -> None:
        super().__init__(message, reason="CHECK_FAILED")
