"""The blocking shell."""

from __future__ import annotations

import time
from collections.abc import Callable, Generator, Iterable, Iterator
from dataclasses import dataclass, field
from datetime import datetime
from types import TracebackType
from typing import Any, Self, TypeVar

import grpc

from nearchord.answer import Answer
from nearchord.budget import Budget
from nearchord.graph import Graph
from nearchord.jobs import Addresses, BatchInfo, Event, JobInfo, JobRequest
from nearchord.load import Load, ServerInfo
from nearchord.question import Question
from nearchord.session import channel as channels
from nearchord.session import flows_content, flows_jobs, flows_watch, requests, status
from nearchord.session.caller import PATIENCE, Caller
from nearchord.session.steps import Call, Emit, Finish, Flow, Next, Now, Open, Pause, Send, Start, Step, Walk
from nearchord.session.stubs import stubs_of
from nearchord.stages import Stage, WhenOver

T = TypeVar("T")


def connect(target: str, *, token: str | None = None, tls: channels.TLS = None, patience: float = PATIENCE) -> Service:
    """A session with the service at `target` ("127.0.0.1:7411"); no call is made yet.

    `token` is sent with every call, over TLS or loopback only. `tls`: True for the system's root certificates, a path
    to a PEM file of others, or grpc.ChannelCredentials. `patience`: seconds for which streams that had begun are
    resumed while the server is away.
    """
    target = channels.checked_target(target)
    metadata, credentials = channels.call_metadata(target, token, tls), channels.credentials(tls)
    if credentials is None:
        channel = grpc.insecure_channel(target, channels.options())
    else:
        channel = grpc.secure_channel(target, credentials, channels.options())
    return Service(Carrier(channel, target, metadata), Caller(patience))


class Carrier:
    """Carries out the steps of flows on a channel. Safe to use from several threads."""

    def __init__(
        self,
        channel: grpc.Channel,
        target: str,
        metadata: tuple[tuple[str, str], ...] = (),
        *,
        clock: Callable[[], float] = time.monotonic,
        sleep: Callable[[float], None] = time.sleep,
    ) -> None:
        self._channel, self._target, self._metadata = channel, target, metadata
        self._clock, self._sleep = clock, sleep
        self._stubs = stubs_of(channel)
        self._closed = False

    def run(self, flow: Flow[T]) -> T:
        """Runs a flow that emits nothing; returns its result."""
        walk = Walk(flow)
        for _ in self._walk(walk):
            raise AssertionError("a flow that is run emits nothing")
        result: T = walk.result
        return result

    def iterate(self, flow: Flow[None]) -> Iterator[Any]:
        """Gives what a flow emits."""
        return self._walk(Walk(flow))

    def close(self) -> None:
        """Ends the channel and every call on it; a second time is harmless."""
        self._closed = True
        self._channel.close()

    def _walk(self, walk: Walk) -> Generator[Any, None, None]:
        streams: list[Any] = []
        try:
            while (step := walk.next()) is not None:
                if isinstance(step, Emit):
                    yield step.item
                else:
                    self._carry_out(step, walk, streams)
        finally:
            walk.close()
            for stream in streams:
                stream.cancel()

    def _carry_out(self, step: Step, walk: Walk, streams: list[Any]) -> None:
        if self._closed:
            walk.fail(status.closed())
            return
        try:
            walk.give(self._reply(step, streams))
        except grpc.RpcError as failed:
            walk.fail(status.decode(failed, self._target))

    def _reply(self, step: Step, streams: list[Any]) -> Any:
        match step:
            case Call(method, request):
                return self._stubs[method](request, metadata=self._metadata)
            case Send(method, messages):
                return self._stubs[method](messages(), metadata=self._metadata)
            case Start(method, messages):
                streams.append(self._stubs[method].future(messages(), metadata=self._metadata))
                return streams[-1]
            case Finish(stream):
                return stream.result()
            case Open(method, request, seconds):
                streams[:] = [self._stubs[method](request, timeout=seconds, metadata=self._metadata)]
                return streams[0]
            case Next(stream):
                return next(stream, None)
            case Pause(seconds):
                return self._sleep(seconds)
            case Now():
                return self._clock()
        raise AssertionError(step)


class Service:
    """A session with a service; use it as a context manager, or `close` it."""

    def __init__(self, carrier: Carrier, caller: Caller) -> None:
        self._carrier, self._caller = carrier, caller

    def submit(
        self,
        graph: Graph | Addresses,
        question: Question,
        *,
        budget: Budget | None = None,
        when_over: WhenOver | str = WhenOver.BOUND,
        priority: int = 0,
        not_after: datetime | None = None,
        label: str = "",
        request_id: str | None = None,
    ) -> Job:
        """Submits a job; when this returns the job is durable.

        A graph too large to travel with the job is stored first. `request_id`: repeating a submit under the same id
        gives the same job; without one, one is made up, which covers the repetitions done here.
        """
        request = JobRequest(graph, question, budget, when_over, priority, not_after, label)
        return self.job(self._carrier.run(flows_jobs.submit(self._caller, request, request_id)).id)

    def submit_batch(self, items: Iterable[JobRequest], *, label: str = "", request_id: str | None = None) -> Batch:
        """Submits jobs together: all are accepted or none."""
        flow = flows_jobs.submit_batch(self._caller, requests.request_list(items), label, request_id)
        return self.batch(self._carrier.run(flow).id)

    def job(self, id: str) -> Job:
        """A handle for a job submitted before, by whomever; no call is made."""
        return Job(requests.checked_id("job", id), self._carrier, self._caller)

    def batch(self, id: str) -> Batch:
        """A handle for a batch submitted before; no call is made."""
        return Batch(requests.checked_id("batch", id), self._carrier, self._caller)

    def jobs(
        self, batch: str | None = None, label: str | None = None, stage: Stage | str | None = None
    ) -> Iterator[JobInfo]:
        """The jobs that pass the filters, latest first; those of a batch by position."""
        return self._carrier.iterate(flows_jobs.list_jobs(batch, label, stage))

    def upload(self, graph: Graph) -> Addresses:
        """Stores a graph with its weights and names, so that many jobs can name them by address."""
        return self._carrier.run(flows_content.upload(self._caller, graph))

    def graph(self, address: str) -> Graph:
        """The graph stored at an address, without weights and names."""
        return self._carrier.run(flows_watch.graph(self._caller, address))

    def names(self, address: str) -> tuple[str, ...]:
        """The vertex names stored at an address; none for the empty address."""
        return self._carrier.run(flows_watch.names(self._caller, address))

    def delete_content(self, address: str) -> None:
        """Forgets a stored graph, weight vector or list of names."""
        self._carrier.run(flows_content.delete_content(self._caller, address))

    def server(self) -> ServerInfo:
        """Version, questions and caps of the server."""
        return self._carrier.run(flows_content.server(self._caller))

    def load(self, interval: float = 1.0) -> Iterator[Load]:
        """Live figures every `interval` seconds (0.2 to 60), until the caller stops iterating."""
        return self._carrier.iterate(flows_watch.load(self._caller, interval))

    def close(self) -> None:
        """Ends the session; jobs go on. A second time is harmless."""
        self._carrier.close()

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()


@dataclass(frozen=True)
class Job:
    """A handle for one job."""

    id: str
    _carrier: Carrier = field(repr=False, compare=False)
    _caller: Caller = field(repr=False, compare=False)

    def info(self) -> JobInfo:
        """The job as it stands."""
        return self._carrier.run(flows_jobs.job_info(self.id))

    def watch(self, after: int = 0) -> Iterator[Event]:
        """Its events after a number, until it has ended; resumed where they were when the connection breaks."""
        return self._carrier.iterate(flows_watch.watch_job(self._caller, self.id, after))

    def answer(self, timeout: float | None = None) -> Answer:
        """Its answer, waited for; TimeoutExceeded after `timeout` seconds, and the job goes on."""
        return self._carrier.run(flows_watch.answer(self._caller, self.id, timeout))

    def done(self) -> bool:
        """Whether it has ended."""
        return self._carrier.run(flows_jobs.job_done(self.id))

    def cancel(self) -> JobInfo:
        """Asks for it to be withdrawn; harmless when it has ended."""
        return self._carrier.run(flows_jobs.cancel_job(self.id))

    def delete(self) -> None:
        """Deletes it with its answer; NotReady while it has not ended."""
        self._carrier.run(flows_jobs.delete_job(self.id))


@dataclass(frozen=True)
class Batch:
    """A handle for the jobs of a batch."""

    id: str
    _carrier: Carrier = field(repr=False, compare=False)
    _caller: Caller = field(repr=False, compare=False)

    def info(self) -> BatchInfo:
        """The batch as it stands."""
        return self._carrier.run(flows_jobs.batch_info(self.id))

    def watch(self, after: int = 0) -> Iterator[Event]:
        """The events of its jobs after a number, until all have ended; resumed when the connection breaks."""
        return self._carrier.iterate(flows_watch.watch_batch(self._caller, self.id, after))

    def answers(self, wait: bool = True) -> Iterator[Answer]:
        """Its answers by position; without `wait`, only those there are now."""
        return self._carrier.iterate(flows_watch.batch_answers(self._caller, self.id, wait))

    def cancel(self) -> BatchInfo:
        """Asks for every job that has not ended to be withdrawn."""
        return self._carrier.run(flows_jobs.cancel_batch(self.id))

    def delete(self) -> None:
        """Deletes its jobs with their answers; NotReady while one has not ended."""
        self._carrier.run(flows_jobs.delete_batch(self.id))
