"""Every kind of store that the contract suite runs on, and the small things its tests are made of.

Another store joins by a class with `open` and `close`, and its name in `HOMES`.
"""

from __future__ import annotations

import datetime as dt
import hashlib
import itertools
import struct
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any, Protocol

import pytest
from nearchord_service.model.answer import (
    Answer,
    Column,
    ElementType,
    Prediction,
    ProofKind,
    Recognition,
    StructureReport,
)
from nearchord_service.model.content import ContentKind, NewContent
from nearchord_service.model.event import Phase, Progress
from nearchord_service.model.job import Batch, Job, JobSpec, Lease, Submission
from nearchord_service.model.question import Budget, Question, QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.store.port import Limits, Store, Upload
from nearchord_service.store.sql import SqlStore

ANN = "ann"
BEN = "ben"
LIMITS = Limits(unfinished_jobs=1_000_000, content_bytes=1 << 40)


class Clock:
    """Time that stands until it is moved."""

    def __init__(self) -> None:
        self.now = dt.datetime(2031, 5, 6, 7, 8, 9, tzinfo=dt.UTC)

    def __call__(self) -> dt.datetime:
        return self.now

    def advance(self, seconds: float) -> None:
        self.now += dt.timedelta(seconds=seconds)


class Home(Protocol):
    """A place that keeps a store's data while stores come and go."""

    kind: str
    place: Path
    clock: Clock

    def open(self) -> Store:
        """Return a started store on the same data; one that is open is stopped first."""

    def close(self) -> None:
        """Stop the store."""


class SqliteHome:
    """A data folder."""

    kind = "sqlite"

    def __init__(self, place: Path) -> None:
        self.clock = Clock()
        self.place = place
        self._store: SqlStore | None = None

    def open(self) -> SqlStore:
        self.close()
        self._store = SqlStore(self.place, clock=self.clock)
        self._store.start()
        return self._store

    def close(self) -> None:
        if self._store is not None:
            self._store.stop()


HOMES: dict[str, Callable[[Path], Home]] = {SqliteHome.kind: SqliteHome}


@pytest.fixture(params=sorted(HOMES))
def home(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Home]:
    """A place for a store of every kind."""
    place = HOMES[request.param](tmp_path / "data")
    yield place
    place.close()


def content(kind: ContentKind, data: bytes, vertices: int, edges: int = 0) -> NewContent:
    return NewContent(hashlib.sha256(data).hexdigest(), kind, data, vertices, edges)


def graph(tag: int = 0, vertices: int = 3, padding: int = 0) -> NewContent:
    """Bytes that stand for a graph: the store never looks into them."""
    data = struct.pack("<IQQ", vertices, 2, tag) + bytes(padding)
    return content(ContentKind.GRAPH, data, vertices, 2)


def weights(tag: int = 0, entries: int = 3) -> NewContent:
    return content(ContentKind.WEIGHTS, struct.pack(f"<{entries}q", *range(tag, tag + entries)), entries)


def names(tag: int = 0, vertices: int = 3) -> NewContent:
    return content(ContentKind.NAMES, "".join(f"{tag}-{i}\n" for i in range(vertices)).encode(), vertices)


def spec(on: NewContent | str | None = None, **others: Any) -> JobSpec:
    """A spec on inline content, or on stored content when an address is given."""
    on = graph() if on is None else on
    inline = (on,) if isinstance(on, NewContent) else ()
    defaults: dict[str, Any] = {
        "graph_address": on.address if isinstance(on, NewContent) else on,
        "weights_address": None,
        "names_address": None,
        "question": Question(QuestionName.INDEPENDENT_SET, must=(1,), never=(0, 2)),
        "budget": Budget(fill=3, states=2**70, seconds=1.5),
        "inline": inline,
    }
    return JobSpec(**{**defaults, **others})


_request = itertools.count()


def submission(*specs: JobSpec, owner: str = ANN, batch: bool = False, **others: Any) -> Submission:
    specs = specs or (spec(),)
    defaults = {
        "request_id": f"request-{next(_request)}",
        "fingerprint": hashlib.sha256(repr(specs).encode()).digest(),
        "label": "",
    }
    return Submission(owner=owner, specs=specs, batch=batch, **{**defaults, **others})


def submit(store: Store, *specs: JobSpec, owner: str = ANN, **others: Any) -> Job:
    return store.submit(submission(*specs, owner=owner, **others), LIMITS).job


def submit_batch(store: Store, *specs: JobSpec, owner: str = ANN, **others: Any) -> Batch:
    batch = store.submit(submission(*specs, owner=owner, batch=True, **others), LIMITS).batch
    assert batch is not None
    return batch


def claim_one(store: Store, holder: str = "host", seconds: float = 45.0) -> Lease:
    (lease,) = store.claim(holder, 1, seconds)
    return lease


def answer(verdict: Verdict = Verdict.PROVEN, **others: Any) -> Answer:
    """An answer with something in every field."""
    defaults: dict[str, Any] = {
        "reason": "value and bound meet",
        "value": (10**30, 3),
        "bound": (10**30 + 1, 3),
        "fill": 4,
        "fill_lower_bound": 3,
        "states": 2**65,
        "bags": 7,
        "largest_bag": 3,
        "parts": 2,
        "fill_cores": 1,
        "proof": ProofKind.CERTIFICATE,
        "proof_kinds": (ProofKind.CERTIFICATE, ProofKind.SEARCH),
        "solver_version": "1.2",
        "proof_format": 1,
        "phase_seconds": ((Phase.READ, 0.25), (Phase.SWEEP, 0.5)),
        "seconds": 0.75,
        "peak_memory_bytes": 1 << 33,
        "columns": (
            Column("chosen", ElementType.UINT32, struct.pack("<3I", 0, 1, 2)),
            Column("empty", ElementType.INT64, b""),
            Column("price", ElementType.INT64, struct.pack("<2q", -1, 1)),
        ),
        "recognition": Recognition(chordal=False, interval=None, split=True, splittance=2**40),
        "structure": StructureReport(3, 70, (Prediction("induced-forest", 0, 2**65, True, 2**50, False),) * 2),
        "count": "7" * 40,
    }
    return Answer(verdict=verdict, **{**defaults, **others})


def finish(store: Store, lease: Lease, ended: Answer | None = None) -> bool:
    return store.finish(lease.job.id, lease.attempt, ended or answer()).result()


def give_back(store: Store, lease: Lease, reason: str = "worker died", *, worker_lost: bool = True) -> bool:
    return store.give_back(lease.job.id, lease.attempt, reason, worker_lost=worker_lost).result()


def progress(fraction: float = 0.5) -> Progress:
    return Progress(Phase.SWEEP, fraction, 1.25, fill=2, bags_done=1, bags=4, incumbent=-3, bound=2**70)


def accept_all(view: memoryview) -> tuple[int, int]:
    return len(view), 0


def begin(
    store: Store, data: bytes, offset: int = 0, owner: str = ANN, kind: ContentKind = ContentKind.GRAPH
) -> Upload:
    """Take hold of an upload that is not stored yet."""
    upload = store.begin_upload(owner, hashlib.sha256(data).hexdigest(), kind, len(data), offset, LIMITS)
    assert not hasattr(upload, "created_at")
    return upload  # type: ignore[return-value]


def put(store: Store, data: bytes, owner: str = ANN, kind: ContentKind = ContentKind.GRAPH, vertices: int = 3) -> str:
    """Upload content whole; returns its address."""
    upload = begin(store, data, owner=owner, kind=kind)
    upload.write(data)
    address = upload.publish(lambda _: (vertices, 1)).address
    upload.release()
    return address
