"""Where a stream has got to: what to ask for next, and what its messages mean.

A cursor opens a stream at its place, takes messages (giving the items they complete), and after a break opens the next
stream where the last whole item ended.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any, Protocol

from nearchord.answer import Answer
from nearchord.errors import BadInput
from nearchord.jobs import Event
from nearchord.load import Load
from nearchord.session import replies
from nearchord.session.assembly import AnswerAssembly
from nearchord.session.steps import Method, Open
from nearchord.v1 import graph_service_pb2, job_service_pb2, load_service_pb2


class Cursor(Protocol):
    """A place in a stream."""

    def open(self, seconds: float | None) -> Open:
        """The step that goes on from here; `seconds` bounds the stream."""

    def take(self, message: Any) -> Iterable[Any]:
        """Moves on; gives the items that the message completes."""

    def end(self) -> Iterable[Any]:
        """The stream has ended well; gives the items that this completes."""


class EventCursor:
    """Events of a job, or of all jobs of a batch, after a number."""

    def __init__(self, after: int, *, job_id: str = "", batch_id: str = "") -> None:
        if after < 0:
            raise BadInput(f"after is {after}", "give the number of the last event seen, or 0")
        self.after = after
        self._job_id, self._batch_id = job_id, batch_id

    def open(self, seconds: float | None) -> Open:
        """A watch after the last number seen."""
        if self._job_id:
            request = job_service_pb2.WatchJobRequest(job_id=self._job_id, after_sequence=self.after)
            return Open(Method.WATCH_JOB, request, seconds)
        batch = job_service_pb2.WatchBatchRequest(batch_id=self._batch_id, after_sequence=self.after)
        return Open(Method.WATCH_BATCH, batch, seconds)

    def take(self, message: Any) -> Iterable[Event]:
        """One event a message; one seen before (a server that repeats itself) is dropped."""
        if message.event.sequence <= self.after:
            return ()
        self.after = message.event.sequence
        return (replies.event(message.event),)

    def end(self) -> Iterable[Event]:
        """Nothing is left over."""
        return ()


class AnswerCursor:
    """The answer of one job, from its beginning."""

    def __init__(self, job_id: str) -> None:
        self._job_id = job_id
        self._assembly = AnswerAssembly()

    def open(self, seconds: float | None) -> Open:
        """The whole answer again: half an answer is none."""
        self._assembly = AnswerAssembly()
        return Open(Method.READ_ANSWER, job_service_pb2.ReadAnswerRequest(job_id=self._job_id), seconds)

    def take(self, message: Any) -> Iterable[Answer]:
        """Collects."""
        return _present(self._assembly.take(message.part))

    def end(self) -> Iterable[Answer]:
        """The answer."""
        return _present(self._assembly.finish())


class AnswersCursor:
    """The answers of a batch by position, after a position."""

    def __init__(self, batch_id: str, wait: bool) -> None:
        self._batch_id, self._wait = batch_id, wait
        self._after: int | None = None
        self._assembly = AnswerAssembly()

    def open(self, seconds: float | None) -> Open:
        """The answers after the last whole one."""
        self._assembly = AnswerAssembly()
        request = job_service_pb2.ReadBatchAnswersRequest(
            batch_id=self._batch_id, after_index=self._after, wait=self._wait
        )
        return Open(Method.READ_BATCH_ANSWERS, request, seconds)

    def take(self, message: Any) -> Iterable[Answer]:
        """The answer before, when a new one begins."""
        return self._whole(self._assembly.take(message.part))

    def end(self) -> Iterable[Answer]:
        """The last answer."""
        return self._whole(self._assembly.finish())

    def _whole(self, answer: Answer | None) -> Iterable[Answer]:
        if answer is not None:
            self._after = answer.batch_index
        return _present(answer)


class ContentCursor:
    """The bytes of stored content; gives them all at the end."""

    def __init__(self, address: str) -> None:
        self._address = address
        self._data = bytearray()

    def open(self, seconds: float | None) -> Open:
        """The bytes that are missing."""
        request = graph_service_pb2.ReadContentRequest(address=self._address, offset=len(self._data))
        return Open(Method.READ_CONTENT, request, seconds)

    def take(self, message: Any) -> Iterable[bytes]:
        """Collects."""
        self._data += message.piece
        return ()

    def end(self) -> Iterable[bytes]:
        """All bytes."""
        return (bytes(self._data),)


class LoadCursor:
    """Live figures, which have no past."""

    def __init__(self, interval: float) -> None:
        if not 0.2 <= interval <= 60:
            raise BadInput(f"interval is {interval} seconds", "give 0.2 to 60")
        self._interval = interval

    def open(self, seconds: float | None) -> Open:
        """Figures from now on."""
        return Open(Method.WATCH_LOAD, load_service_pb2.WatchLoadRequest(interval_seconds=self._interval), seconds)

    def take(self, message: Any) -> Iterable[Load]:
        """One set of figures a message."""
        return (replies.load(message),)

    def end(self) -> Iterable[Load]:
        """Nothing is left over."""
        return ()


def _present(answer: Answer | None) -> Iterable[Answer]:
    return () if answer is None else (answer,)
