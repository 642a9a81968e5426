"""A server killed in the middle of a batch: every job ends with the right answer, recorded once."""

from __future__ import annotations

import random
import signal
import struct
from collections import Counter
from collections.abc import Iterator
from itertools import combinations
from pathlib import Path

import pytest
from definition import heaviest_independent
from end_to_end.server_process import DEADLINE, ServerProcess
from nearchord.v1 import job_pb2, job_service_pb2, job_service_pb2_grpc

pytestmark = pytest.mark.fault
JOBS = 200
VERTICES = 9


class Conflicts:
    """A random graph with weights."""

    def __init__(self, draw: random.Random) -> None:
        pairs = combinations(range(VERTICES), 2)
        self.edges = [pair for pair in pairs if draw.random() < 0.4]
        self.weights = [draw.randrange(100) for _ in range(VERTICES)]

    def spec(self) -> job_pb2.JobSpec:
        pointers = [sum(u < row for u, _ in self.edges) for row in range(VERTICES + 1)]
        targets = [v for _, v in self.edges]
        header = struct.pack("<IQ", VERTICES, len(targets))
        spec = job_pb2.JobSpec()
        spec.input.graph_content = header + struct.pack(f"<{VERTICES + 1}Q{len(targets)}I", *pointers, *targets)
        spec.input.weights_content = struct.pack(f"<{VERTICES}q", *self.weights)
        spec.question.independent_set.SetInParent()
        return spec


def submit(server: ServerProcess, graphs: list[Conflicts]) -> str:
    def messages() -> Iterator[job_service_pb2.SubmitBatchRequest]:
        yield job_service_pb2.SubmitBatchRequest(opening=job_service_pb2.BatchOpening(request_id="batch"))
        for graph in graphs:
            yield job_service_pb2.SubmitBatchRequest(spec=graph.spec())

    stub = job_service_pb2_grpc.JobServiceStub(server.channel)
    return stub.SubmitBatch(messages(), timeout=DEADLINE).batch.id


def events(server: ServerProcess, batch_id: str) -> Iterator[job_pb2.Event]:
    stub = job_service_pb2_grpc.JobServiceStub(server.channel)
    request = job_service_pb2.WatchBatchRequest(batch_id=batch_id)
    return (response.event for response in stub.WatchBatch(request, timeout=DEADLINE))


def values(server: ServerProcess, batch_id: str) -> list[tuple[int, job_pb2.Verdict, int]]:
    stub = job_service_pb2_grpc.JobServiceStub(server.channel)
    request = job_service_pb2.ReadBatchAnswersRequest(batch_id=batch_id, wait=True)
    parts = (response.part for response in stub.ReadBatchAnswers(request, timeout=DEADLINE))
    heads = (part.head for part in parts if part.HasField("head"))
    return [(head.batch_index, head.verdict, head.value.numerator) for head in heads]


@pytest.mark.parametrize("ends_before_kill", [0, 1, 60, 150])
def test_every_job_of_a_batch_ends_once(tmp_path: Path, ends_before_kill: int) -> None:
    draw = random.Random(ends_before_kill)
    graphs = [Conflicts(draw) for _ in range(JOBS)]
    with ServerProcess(tmp_path, "--workers", "2") as server:
        batch_id = submit(server, graphs)
        ended = 0
        for event in events(server, batch_id):
            ended += event.transition.stage == job_pb2.STAGE_DONE
            if ended >= ends_before_kill:
                break
        server.signal(signal.SIGKILL)
        assert server.ended() == -signal.SIGKILL
    with ServerProcess(tmp_path, "--workers", "2") as server:
        found = values(server, batch_id)
        right = [heaviest_independent(VERTICES, graph.edges, graph.weights) for graph in graphs]
        assert found == [(i, job_pb2.VERDICT_PROVEN, value) for i, value in enumerate(right)]
        ends = Counter(e.job_id for e in events(server, batch_id) if e.transition.stage == job_pb2.STAGE_DONE)
        assert sorted(ends.values()) == [1] * JOBS
