"""A server over loopback in this process: the real store in a folder, no workers; tests play the workers."""

from __future__ import annotations

import asyncio
import struct
import threading
from collections.abc import Callable, Coroutine, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, TypeVar

import grpc
from google.rpc import error_details_pb2
from grpc_status import rpc_status
from nearchord.v1 import (
    content_pb2,
    graph_service_pb2,
    graph_service_pb2_grpc,
    job_pb2,
    job_service_pb2,
    job_service_pb2_grpc,
    load_service_pb2_grpc,
)
from nearchord_service.api.canonical import check
from nearchord_service.api.convert.content import address_of
from nearchord_service.api.server import ApiServer, Versions
from nearchord_service.metrics import Metrics
from nearchord_service.model.answer import Answer, Column, ElementType, ProofKind
from nearchord_service.model.content import ContentKind
from nearchord_service.model.job import Lease
from nearchord_service.model.stage import Verdict
from nearchord_service.settings import Address, Settings
from nearchord_service.store.port import Store
from nearchord_service.store.sql import SqlStore
from nearchord_service.work.port import SlotFigures
from prometheus_client import CollectorRegistry

T = TypeVar("T")
DEADLINE = 30.0
"""Seconds that a test waits for anything before it fails."""

TRIANGLE = struct.pack("<IQ4Q3I", 3, 3, 0, 2, 3, 3, 1, 2, 2)
PATH = struct.pack("<IQ4Q2I", 3, 2, 0, 1, 2, 2, 1, 2)


class Serving:
    """A running server with stubs for its services."""

    def __init__(self, data: Path, store: Store | None = None, metrics: Metrics | None = None, **settings: Any) -> None:
        self.settings = replace(Settings(data, listen=Address("127.0.0.1", 0), metrics=None), **settings)
        self.metrics = metrics or Metrics(CollectorRegistry())
        self.store: Store = store or SqlStore(data, on_end=self.metrics.job_ended)
        self._loop = asyncio.new_event_loop()
        self._thread = threading.Thread(target=self._loop.run_forever, daemon=True)

    def start(self) -> Serving:
        """Start store and server, and connect."""
        self.store.start()
        self.metrics.observe(self.store.figures, lambda: SlotFigures(0, 2, 0, 1.0), {"version": "1.2.3"})
        self._thread.start()
        self.port = self.on_loop(self._open())
        self.channel = grpc.insecure_channel(f"127.0.0.1:{self.port}")
        self.graphs = graph_service_pb2_grpc.GraphServiceStub(self.channel)
        self.jobs = job_service_pb2_grpc.JobServiceStub(self.channel)
        self.load = load_service_pb2_grpc.LoadServiceStub(self.channel)
        return self

    async def _open(self) -> int:
        self.api = ApiServer(self.settings, self.store, self.metrics, Versions("1.2.3", "4.5.6"))
        return await self.api.start()

    def __enter__(self) -> Serving:
        try:
            return self.start()
        except BaseException:
            self.stop()
            raise

    def __exit__(self, *_: object) -> None:
        self.stop()

    def on_loop(self, work: Coroutine[Any, Any, T]) -> T:
        """Run something on the server's loop and wait for it."""
        return asyncio.run_coroutine_threadsafe(work, self._loop).result(DEADLINE)

    def drain(self, grace_seconds: float = 5.0) -> None:
        """Stop the server, the store stays open."""
        self.on_loop(self.api.stop(grace_seconds))

    def stop(self) -> None:
        """Stop everything, started or not."""
        if hasattr(self, "channel"):
            self.channel.close()
        self.drain(0.0)
        self._loop.call_soon_threadsafe(self._loop.stop)
        self._thread.join(DEADLINE)
        self._loop.close()
        self.store.stop()

    # What callers do

    def upload(
        self, data: bytes, kind: content_pb2.ContentKind = content_pb2.CONTENT_KIND_GRAPH
    ) -> content_pb2.Content:
        """Store content in one stream."""
        return self.graphs.StoreContent(uploading(data, kind=kind), timeout=DEADLINE).content

    def submit(self, spec: job_pb2.JobSpec | None = None, request_id: str = "r") -> job_pb2.Job:
        """Submit a job."""
        request = job_service_pb2.SubmitJobRequest(request_id=request_id, spec=spec or a_spec())
        return self.jobs.SubmitJob(request, timeout=DEADLINE).job

    def submit_batch(
        self, specs: Iterable[job_pb2.JobSpec], request_id: str = "b", label: str = ""
    ) -> job_service_pb2.SubmitBatchResponse:
        """Submit a batch."""
        return self.jobs.SubmitBatch(batching(specs, request_id, label), timeout=DEADLINE)

    # What workers do

    def claim(self, limit: int = 1) -> Sequence[Lease]:
        """Take jobs."""
        return self.store.claim("tester", limit, 60.0)

    def finish(self, lease: Lease, answer: Answer | None = None) -> None:
        """Answer a job."""
        assert self.store.finish(lease.job.id, lease.attempt, answer or an_answer()).result(DEADLINE)


def a_spec(graph: bytes = TRIANGLE, **fields: Any) -> job_pb2.JobSpec:
    """Return a small valid spec."""
    spec = job_pb2.JobSpec(**fields)
    if spec.input.WhichOneof("graph") is None:
        spec.input.graph_content = graph
    spec.question.independent_set.SetInParent()
    return spec


def an_answer(chosen: Sequence[int] = (1,), **figures: Any) -> Answer:
    """Return a proven answer."""
    column = Column("chosen", ElementType.UINT32, struct.pack(f"<{len(chosen)}I", *chosen))
    return Answer(
        **{
            "verdict": Verdict.PROVEN,
            "reason": "value and bound meet",
            "value": (len(chosen), 1),
            "bound": (len(chosen), 1),
            "proof": ProofKind.SEARCH,
            "solver_version": "4.5.6",
            "seconds": 0.25,
            "columns": (column,),
            **figures,
        }
    )


def uploading(
    data: bytes,
    *,
    kind: content_pb2.ContentKind = content_pb2.CONTENT_KIND_GRAPH,
    address: str | None = None,
    size: int | None = None,
    offset: int = 0,
    piece: int = 2**20,
) -> Iterator[graph_service_pb2.StoreContentRequest]:
    """Yield the messages of an upload of `data[offset:]`."""
    opening = graph_service_pb2.UploadOpening(
        kind=kind,
        address=address_of(data) if address is None else address,
        size_bytes=len(data) if size is None else size,
        offset=offset,
    )
    yield graph_service_pb2.StoreContentRequest(opening=opening)
    for first in range(offset, len(data), piece):
        yield graph_service_pb2.StoreContentRequest(piece=data[first : first + piece])


def batching(
    specs: Iterable[job_pb2.JobSpec], request_id: str = "b", label: str = ""
) -> Iterator[job_service_pb2.SubmitBatchRequest]:
    """Yield the messages of a batch."""
    opening = job_service_pb2.BatchOpening(request_id=request_id, label=label)
    yield job_service_pb2.SubmitBatchRequest(opening=opening)
    for spec in specs:
        yield job_service_pb2.SubmitBatchRequest(spec=spec)


def a_big_graph(n: int) -> bytes:
    """Return a path on n vertices in canonical form."""
    pointers = (*range(n), n - 1)
    data = struct.pack(f"<IQ{n + 1}Q{n - 1}I", n, n - 1, *pointers, *range(1, n))
    assert check(ContentKind.GRAPH, data, "") == (n, n - 1)
    return data


@dataclass(frozen=True)
class Failure:
    """How a call failed."""

    code: str
    reason: str
    message: str
    fields: tuple[tuple[str, str], ...]
    metadata: dict[str, str]
    retry_seconds: float | None
    others: tuple[str, ...]

    @property
    def summary(self) -> tuple[str, str]:
        """Code and reason."""
        return self.code, self.reason


_DETAILS = {
    f"google.rpc.{kind.DESCRIPTOR.name}": kind
    for kind in (
        error_details_pb2.ErrorInfo,
        error_details_pb2.BadRequest,
        error_details_pb2.QuotaFailure,
        error_details_pb2.RetryInfo,
        error_details_pb2.ResourceInfo,
        error_details_pb2.PreconditionFailure,
    )
}


def attempt(call: Callable[[], T]) -> T | Failure:
    """Make a call (streams are read to their end) and return its result or its rich status."""
    try:
        result = call()
        if not hasattr(result, "DESCRIPTOR"):
            list(result)  # type: ignore[call-overload]
    except grpc.RpcError as error:
        return _failure_of(error)
    return result


def failure(call: Callable[[], Any]) -> Failure:
    """Make a call that has to fail and return its rich status."""
    result = attempt(call)
    assert isinstance(result, Failure), f"the call succeeded: {result}"
    return result


def wait_until(condition: Callable[[], bool]) -> None:
    """Ask again and again until it is so, or the deadline has passed."""
    pause = threading.Event()
    for _ in range(int(DEADLINE / 0.01)):
        if condition():
            return
        pause.wait(0.01)
    raise AssertionError("it did not come to it before the deadline")


def _failure_of(error: grpc.RpcError) -> Failure:
    status = rpc_status.from_call(error)
    assert status is not None, f"no rich status: {error}"
    fields: list[tuple[str, str]] = []
    retry, others = None, []
    details = []
    for packed in status.details:
        detail = _DETAILS[packed.TypeName()]()
        packed.Unpack(detail)
        details.append(detail)
    info = details[0]
    assert info.domain == "nearchord"
    for detail in details[1:]:
        if isinstance(detail, error_details_pb2.BadRequest):
            fields += [(v.field, v.description) for v in detail.field_violations]
        elif isinstance(detail, error_details_pb2.RetryInfo):
            retry = detail.retry_delay.seconds + detail.retry_delay.nanos / 1e9
        elif isinstance(detail, error_details_pb2.ResourceInfo):
            others.append(f"{detail.resource_type} {detail.resource_name}")
        else:
            others += [v.subject for v in detail.violations]
    return Failure(
        error.code().name, info.reason, error.details(), tuple(fields), dict(info.metadata), retry, tuple(others)
    )
