"""A service in memory that answers at once, so that commands can be run without a server."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

import nearchord
import numpy as np
import pytest
from nearchord.cli import connection
from nearchord.cli.app import run
from nearchord.stages import Phase

NOW = dt.datetime(2031, 5, 1, 22, 0, tzinfo=dt.UTC)


def make_answer(**changes: Any) -> nearchord.Answer:
    """A PROVEN answer {0, 2} on four vertices, worth 7, with the given fields changed."""
    provenance = nearchord.Provenance(
        graph_address="a" * 64,
        weights_address="",
        solver_version="0.0",
        proof_format=0,
        budget=nearchord.Budget(states=10, seconds=60.0, memory=100),
        when_over=nearchord.WhenOver.BOUND,
        attempt=1,
        phases=((Phase.SWEEP, 0.25),),
        seconds=0.25,
        wait_seconds=0.0,
        peak_memory_bytes=1,
        finished_at=NOW,
    )
    answer = nearchord.Answer(
        job_id="1" * 32,
        batch_index=0,
        label="",
        question=nearchord.IndependentSet(),
        verdict=nearchord.Verdict.PROVEN,
        value=7,
        bound=7,
        chosen=np.array([0, 2], dtype=np.uint32),
        reason="value and bound meet",
        fill=1,
        fill_lower_bound=1,
        states=12,
        bags=2,
        largest_bag=3,
        parts=1,
        fill_cores=1,
        proof=nearchord.ProofKind.SEARCH,
        proof_kinds=(nearchord.ProofKind.SEARCH,),
        seconds=0.25,
        vertices=4,
        names_address="",
        provenance=provenance,
    )
    return replace(answer, **changes)


@dataclass
class FakeJob:
    """A job whose answer is ready, unless `interrupt` stands for Ctrl-C while waiting."""

    service: FakeService
    id: str = "1" * 32

    def watch(self, after: int = 0) -> Iterator[nearchord.Event]:
        verdict = self.service.answers[0].verdict
        stages = [
            (nearchord.Stage.WAITING, None),
            (nearchord.Stage.SOLVING, None),
            (nearchord.Stage.DONE, verdict),
        ]
        for number, (stage, ended) in enumerate(stages, start=1):
            if number > after:
                yield nearchord.Event(number, self.id, 0, NOW, 1, stage=stage, verdict=ended, reason="as told")

    def answer(self, timeout: float | None = None) -> nearchord.Answer:
        if self.service.interrupt:
            raise KeyboardInterrupt
        return self.service.answers[0]

    def done(self) -> bool:
        return self.service.ended

    def cancel(self) -> nearchord.JobInfo:
        self.service.cancelled.append(self.id)
        return self.info()

    def info(self) -> nearchord.JobInfo:
        return self.service.info(0)


@dataclass
class FakeBatch:
    """A batch whose answers are ready."""

    service: FakeService
    id: str = "b" * 32

    def watch(self, after: int = 0) -> Iterator[nearchord.Event]:
        for index, answer in enumerate(self.service.answers):
            yield nearchord.Event(
                index + 1, answer.job_id, index, NOW, 1, stage=nearchord.Stage.DONE, verdict=answer.verdict
            )

    def answers(self, wait: bool = True) -> Iterator[nearchord.Answer]:
        for index, answer in enumerate(self.service.answers):
            if self.service.interrupt:
                raise KeyboardInterrupt
            yield replace(answer, batch_index=index)

    def cancel(self) -> nearchord.BatchInfo:
        self.service.cancelled.append(self.id)
        return self.info()

    def info(self) -> nearchord.BatchInfo:
        done = len(self.service.answers) if self.service.ended else 0
        waiting = len(self.service.answers) - done
        return nearchord.BatchInfo(self.id, "", NOW, len(self.service.answers), waiting, 0, done)


@dataclass
class FakeService:
    """Records what is submitted and hands out prepared answers."""

    answers: list[nearchord.Answer] = field(default_factory=lambda: [make_answer()])
    names_stored: tuple[str, ...] = ("a", "b", "c", "d")
    graphs: dict[str, nearchord.Graph] = field(default_factory=dict)
    interrupt: bool = False
    ended: bool = True
    submitted: list[tuple[nearchord.Graph, nearchord.Question, dict[str, Any]]] = field(default_factory=list)
    batches: list[list[nearchord.JobRequest]] = field(default_factory=list)
    cancelled: list[str] = field(default_factory=list)
    connected: list[tuple[str, str | None]] = field(default_factory=list)

    def __enter__(self) -> FakeService:
        return self

    def __exit__(self, *_: object) -> None:
        return None

    def submit(self, graph: nearchord.Graph, question: nearchord.Question, **terms: Any) -> FakeJob:
        self.submitted.append((graph, question, terms))
        return FakeJob(self)

    def submit_batch(self, items: list[nearchord.JobRequest], *, label: str = "") -> FakeBatch:
        self.batches.append(list(items))
        return FakeBatch(self)

    def job(self, identity: str) -> FakeJob:
        return FakeJob(self, identity)

    def batch(self, identity: str) -> FakeBatch:
        return FakeBatch(self, identity)

    def graph(self, address: str) -> nearchord.Graph:
        return self.graphs[address]

    def names(self, address: str) -> tuple[str, ...]:
        return self.names_stored

    def jobs(self, **filters: Any) -> Iterator[nearchord.JobInfo]:
        return (self.info(index) for index in range(len(self.answers)))

    def info(self, index: int) -> nearchord.JobInfo:
        answer = self.answers[index]
        return nearchord.JobInfo(
            id=answer.job_id,
            batch_id="",
            batch_index=0,
            label=answer.label,
            graph_address="a" * 64,
            weights_address="",
            names_address=answer.names_address,
            vertices=4,
            edges=4,
            question=answer.question,
            budget=nearchord.Budget(),
            when_over=nearchord.WhenOver.BOUND,
            priority=0,
            not_after=None,
            stage=nearchord.Stage.DONE,
            verdict=answer.verdict,
            reason=answer.reason,
            attempt=1,
            cancel_requested=False,
            created_at=NOW,
            started_at=NOW,
            finished_at=NOW,
            sequence=3,
        )


@pytest.fixture
def service(monkeypatch: pytest.MonkeyPatch) -> FakeService:
    """What every command talks to, whether it connects or starts a private service."""
    fake = FakeService()

    def connect(target: str, *, token: str | None = None, tls: object = None) -> FakeService:
        fake.connected.append((target, token))
        return fake

    for name in ("NEARCHORD_SERVER", "NEARCHORD_TOKEN", "NEARCHORD_TOKEN_FILE", "NEARCHORD_TLS"):
        monkeypatch.delenv(name, raising=False)
    monkeypatch.setattr(connection.nearchord, "connect", connect)
    monkeypatch.setattr(connection.nearchord, "embedded", lambda **_: fake)
    return fake


@dataclass(frozen=True)
class Ran:
    """What a command left behind."""

    code: int
    out: str
    err: str


@pytest.fixture
def nearchord_command(capsys: pytest.CaptureFixture[str]) -> Any:
    """Run one command: `nearchord_command("solve", "x.col")` -> Ran."""

    def command(*arguments: str) -> Ran:
        code = run(arguments)
        captured = capsys.readouterr()
        return Ran(code, captured.out, captured.err)

    return command


@pytest.fixture
def square(tmp_path: Path) -> Path:
    """The cycle on four vertices with weights 3, 1, 4, 1 in DIMACS edge format."""
    file = tmp_path / "square.col"
    file.write_text("p edge 4 4\nn 1 3\nn 2 1\nn 3 4\nn 4 1\ne 1 2\ne 2 3\ne 3 4\ne 4 1\n", encoding="utf-8")
    return file
