"""What a flow may ask its shell to do. Each step's docstring says what the flow gets back from its `yield`.

A failed step raises a NearchordError inside the flow (see `status.decode`). A shell ends every stream it opened when
the flow ends, however it ends.
"""

from __future__ import annotations

from collections.abc import Callable, Generator, Iterator
from dataclasses import dataclass
from enum import Enum
from typing import Any, TypeVar

from google.protobuf.message import Message

from nearchord.errors import NearchordError

T = TypeVar("T")
Flow = Generator["Step", Any, T]
"""A flow that ends with a T."""


class Method(Enum):
    """Calls of the service: which stub, which method."""

    GET_UPLOAD = ("graph", "GetUpload")
    STORE_CONTENT = ("graph", "StoreContent")
    GET_CONTENT = ("graph", "GetContent")
    READ_CONTENT = ("graph", "ReadContent")
    DELETE_CONTENT = ("graph", "DeleteContent")
    SUBMIT_JOB = ("job", "SubmitJob")
    SUBMIT_BATCH = ("job", "SubmitBatch")
    GET_JOB = ("job", "GetJob")
    GET_BATCH = ("job", "GetBatch")
    LIST_JOBS = ("job", "ListJobs")
    WATCH_JOB = ("job", "WatchJob")
    WATCH_BATCH = ("job", "WatchBatch")
    CANCEL_JOB = ("job", "CancelJob")
    CANCEL_BATCH = ("job", "CancelBatch")
    READ_ANSWER = ("job", "ReadAnswer")
    READ_BATCH_ANSWERS = ("job", "ReadBatchAnswers")
    DELETE_JOB = ("job", "DeleteJob")
    DELETE_BATCH = ("job", "DeleteBatch")
    GET_SERVER = ("load", "GetServer")
    WATCH_LOAD = ("load", "WatchLoad")


@dataclass(frozen=True)
class Call:
    """One request, one response: gives the response."""

    method: Method
    request: Message


@dataclass(frozen=True)
class Send:
    """A stream of requests, one response: gives the response. `requests()` starts the stream from its beginning."""

    method: Method
    requests: Callable[[], Iterator[Message]]


@dataclass(frozen=True)
class Start:
    """Like `Send`, but the stream is sent while the flow goes on: gives a handle for `Finish`.
    A request may be given as its bytes where the stub takes that (see `stubs`)."""

    method: Method
    requests: Callable[[], Iterator[Message | bytes]]


@dataclass(frozen=True)
class Finish:
    """Gives the response to a stream that was started, once there is one."""

    stream: Any


@dataclass(frozen=True)
class Open:
    """One request, a stream of responses: gives a handle for `Next`. `seconds` ends the stream with TimeoutExceeded."""

    method: Method
    request: Message
    seconds: float | None = None


@dataclass(frozen=True)
class Next:
    """Gives the next message of an open stream, or None after its last."""

    stream: Any


@dataclass(frozen=True)
class Pause:
    """Waits; gives None."""

    seconds: float


@dataclass(frozen=True)
class Now:
    """Gives the seconds of a clock that never goes back."""


@dataclass(frozen=True)
class Emit:
    """Hands an item to whoever iterates over the flow; gives None."""

    item: Any


Step = Call | Send | Start | Finish | Open | Next | Pause | Now | Emit


class Walk:
    """Walks through a flow: a shell asks for the next step, then says what came of it."""

    def __init__(self, flow: Flow[Any]) -> None:
        self._flow = flow
        self._reply: Any = None
        self._error: NearchordError | None = None
        self.result: Any = None

    def next(self) -> Step | None:
        """The next step; None when the flow has ended and `result` stands."""
        reply, error, self._reply, self._error = self._reply, self._error, None, None
        try:
            return self._flow.send(reply) if error is None else self._flow.throw(error)
        except StopIteration as ended:
            self.result = ended.value
            return None

    def give(self, reply: Any) -> None:
        """What the last step gave."""
        self._reply = reply

    def fail(self, error: NearchordError) -> None:
        """Why the last step failed."""
        self._error = error

    def close(self) -> None:
        """Ends the flow where it stands."""
        self._flow.close()
