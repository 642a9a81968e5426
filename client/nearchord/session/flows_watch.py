"""Flows that follow a stream and go on after a break where they were."""

from __future__ import annotations

from typing import Any

from nearchord.answer import Answer
from nearchord.errors import NearchordError, ServerFault, TimeoutExceeded
from nearchord.graph import Graph
from nearchord.session.caller import Caller
from nearchord.session.content import graph_from, names_from
from nearchord.session.cursors import AnswerCursor, AnswersCursor, ContentCursor, Cursor, EventCursor, LoadCursor
from nearchord.session.retry import Retry
from nearchord.session.steps import Emit, Flow, Next, Now, Pause, Walk


class Deadline:
    """The moment until which a caller is willing to wait; None: for ever."""

    def __init__(self, timeout: float | None, now: float, what: str) -> None:
        self._end = None if timeout is None else now + timeout
        self.error = TimeoutExceeded(
            f"{what} had not ended after {timeout} seconds; it goes on: wait again, or cancel it",
            reason="TIMEOUT_EXCEEDED",
        )

    def left(self, now: float) -> float | None:
        """Seconds left, None when there is no end; TimeoutExceeded when none are left."""
        if self._end is None:
            return None
        if now >= self._end:
            raise self.error
        return self._end - now


def follow(caller: Caller, cursor: Cursor, deadline: Deadline | None = None) -> Flow[None]:
    """Emits the items of a stream, opening it again at the cursor as long as that makes sense."""
    now = yield Now()
    retry, deadline = Retry(caller.patience, now), deadline or Deadline(None, now, "")
    while True:
        try:
            stream = yield cursor.open(deadline.left((yield Now())))
            while (message := (yield Next(stream))) is not None:
                retry.sign_of_life((yield Now()))
                yield from emit_all(cursor.take(message))
            yield from emit_all(cursor.end())
            return
        except TimeoutExceeded:
            raise deadline.error from None
        except NearchordError as error:
            now = yield Now()
            pause, left = retry.pause_after(error, now), deadline.left(now)
            yield Pause(pause if left is None else min(pause, left))


def emit_all(items: Any) -> Flow[None]:
    """Emits every item."""
    for item in items:
        yield Emit(item)


def collect(flow: Flow[None]) -> Flow[list[Any]]:
    """Runs a flow and keeps what it emits instead of handing it on."""
    walk, kept = Walk(flow), []
    while (step := walk.next()) is not None:
        if isinstance(step, Emit):
            kept.append(step.item)
            continue
        try:
            walk.give((yield step))
        except NearchordError as error:
            walk.fail(error)
    return kept


def watch_job(caller: Caller, job_id: str, after: int) -> Flow[None]:
    """Emits the events of a job after a number; ends after the event that says DONE."""
    yield from follow(caller, EventCursor(after, job_id=job_id))


def watch_batch(caller: Caller, batch_id: str, after: int) -> Flow[None]:
    """Emits the events of a batch after a number; ends when every job is DONE."""
    yield from follow(caller, EventCursor(after, batch_id=batch_id))


def answer(caller: Caller, job_id: str, timeout: float | None) -> Flow[Answer]:
    """The answer of a job, waited for."""
    deadline = Deadline(timeout, (yield Now()), f"job {job_id}")
    yield from collect(follow(caller, EventCursor(0, job_id=job_id), deadline))
    answers = yield from collect(follow(caller, AnswerCursor(job_id)))
    if len(answers) != 1:
        raise ServerFault(f"{len(answers)} answers came for job {job_id}; try again")
    result: Answer = answers[0]
    return result


def batch_answers(caller: Caller, batch_id: str, wait: bool) -> Flow[None]:
    """Emits the answers of a batch by position."""
    yield from follow(caller, AnswersCursor(batch_id, wait))


def load(caller: Caller, interval: float) -> Flow[None]:
    """Emits live figures without end."""
    yield from follow(caller, LoadCursor(interval))


def graph(caller: Caller, address: str) -> Flow[Graph]:
    """The graph stored at an address."""
    data = yield from collect(follow(caller, ContentCursor(address)))
    return graph_from(data[0])


def names(caller: Caller, address: str) -> Flow[tuple[str, ...]]:
    """The names stored at an address; none where the address is empty."""
    if not address:
        return ()
    data = yield from collect(follow(caller, ContentCursor(address)))
    return names_from(data[0])
