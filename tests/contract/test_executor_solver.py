"""The local executor with the real solver: warm-up, answers, and a stop in the middle of a solve."""

from __future__ import annotations

import random
import struct

import nearchord_solve
import numpy as np
import pytest
from bench.generators import time_windows
from contract.executor_stage import Stage
from nearchord_service.model.answer import ElementType, ProofKind, Recognition
from nearchord_service.model.content import Bytes
from nearchord_service.model.event import Phase
from nearchord_service.model.question import Budget, Question, QuestionName, WhenOver
from nearchord_service.model.stage import Verdict
from nearchord_service.work.local import LocalExecutor
from nearchord_service.work.port import Task, TaskKey

COLD_SECONDS = 280.0
"""Kernels may have to be compiled first."""


def canonical(n, edges):
    """Canonical bytes of a graph, from the definition in the wire contract."""
    rows = [[] for _ in range(n)]
    for low, high in sorted({(min(edge), max(edge)) for edge in edges}):
        rows[low].append(high)
    pointers = np.concatenate([[0], np.cumsum([len(row) for row in rows])]).astype("<u8")
    targets = np.array([target for row in rows for target in row], "<u4")
    return struct.pack("<IQ", n, targets.size) + pointers.tobytes() + targets.tobytes()


@pytest.fixture(scope="module")
def stage():
    made = Stage(LocalExecutor(2))
    with made.audience.changed:
        assert made.audience.changed.wait_for(lambda: made.executor.free() == 2, COLD_SECONDS)
    yield made
    made.executor.stop(0.0)


def solved(stage, n, edges, *, name=QuestionName.INDEPENDENT_SET, weights=None, seconds=60.0, named=None, **pins):
    data = canonical(n, edges)
    one = Task(
        key=TaskKey(f"{name}-{n}-{random.random()}", 1),
        graph=Bytes(data, None),
        weights=None if weights is None else Bytes(np.array(weights, "<i8").tobytes(), None),
        vertices=n,
        edges=len(edges),
        question=Question(name, **pins),
        budget=Budget(seconds=seconds),
        when_over=WhenOver.BOUND,
        **(named or {}),
    )
    stage.executor.run(one)
    return stage.audience.end_of(one).answer


def chosen(answer):
    (column,) = (column for column in answer.columns if column.name == "chosen")
    return np.frombuffer(column.data, "<u4").tolist()


PENTAGON = [(0, 1), (1, 2), (2, 3), (3, 4), (0, 4)]


def test_pentagon_with_weights(stage):
    """Of the five maximal independent sets of a pentagon {1, 3} weighs 5 + 4, the others less."""
    answer = solved(stage, 5, PENTAGON, weights=[3, 5, 1, 4, 2])
    assert (answer.verdict, answer.value, answer.bound) == (Verdict.PROVEN, (9, 1), (9, 1))
    assert chosen(answer) == [1, 3]
    assert (answer.fill, answer.fill_cores) == (2, 1)
    assert Phase.SWEEP in dict(answer.phase_seconds)


def test_pentagon_covered(stage):
    """The complement of the heaviest independent set is the lightest cover."""
    answer = solved(stage, 5, PENTAGON, weights=[3, 5, 1, 4, 2], name=QuestionName.VERTEX_COVER)
    assert (answer.verdict, answer.value) == (Verdict.PROVEN, (6, 1))
    assert chosen(answer) == [0, 2, 4]


def test_pins_reach_the_solver(stage):
    """A vertex that must be in takes its neighbours out; contradicting pins are INFEASIBLE."""
    assert chosen(solved(stage, 5, PENTAGON, must=(0,), never=(2,))) == [0, 3]
    assert solved(stage, 5, PENTAGON, must=(0, 1)).verdict is Verdict.INFEASIBLE


@pytest.mark.parametrize("name", [QuestionName(name) for name in nearchord_solve.QUESTIONS])
def test_empty_graph(stage, name):
    """Nothing to choose from, and nothing to fill, is proven at once."""
    colours = {"colours": 2} if name is QuestionName.COLOURABLE_SUBGRAPH else {}
    answer = solved(stage, 0, [], name=name, **colours)
    assert (answer.verdict, answer.value) == (Verdict.PROVEN, (0, 1))
    columns = {column.name: column.data for column in answer.columns if not column.name.endswith("_denominator")}
    assert ("chosen" in columns) is name.chooses
    assert all(set(data) <= {0} for data in columns.values())


def test_pentagon_filled(stage):
    """A cycle on five vertices needs two chords, as it shows itself; to be split, three of its vertices lack one edge
    among them and the other two have one too many."""
    answer = solved(stage, 5, PENTAGON, name=QuestionName.FILL)
    assert (answer.verdict, answer.value, answer.bound) == (Verdict.PROVEN, (2, 1), (2, 1))
    assert (answer.proof, answer.proof_kinds) == (ProofKind.CERTIFICATE, (ProofKind.PACKING,))
    assert answer.recognition == Recognition(chordal=False, interval=False, split=False, splittance=2)
    columns = {column.name: column for column in answer.columns}
    assert len(np.frombuffer(columns["fill_edge"].data, "<u4")) == 4
    assert sorted(np.frombuffer(columns["packing_vertex"].data, "<u4")) == [0, 1, 2, 3, 4]
    assert columns["packing_ring"].type is ElementType.INT64
    assert "chosen" not in columns


def test_pentagon_reported(stage):
    """One component, one core, and a prediction for each question."""
    answer = solved(stage, 5, PENTAGON, name=QuestionName.STRUCTURE)
    assert (answer.verdict, answer.value, answer.fill_cores) == (Verdict.PROVEN, (2, 1), 1)
    assert (answer.structure.components, answer.structure.largest_core) == (1, 5)
    assert {(one.question, one.colours) for one in answer.structure.predictions} == {
        ("independent-set", 0),
        ("colourable-subgraph", 2),
        ("colourable-subgraph", 3),
        ("induced-forest", 0),
    }
    assert answer.recognition is None


def test_a_hard_graph_ends_at_its_seconds(stage):
    """A random graph far from chordal ends within its seconds, bounded honestly, without a kill."""
    dice = random.Random(7)
    edges = [(u, v) for u in range(400) for v in range(u + 1, 400) if dice.random() < 0.5]
    answer = solved(stage, 400, edges, seconds=0.5)
    assert answer.verdict is Verdict.BOUNDED
    assert answer.value <= answer.bound
    picked = set(chosen(answer))
    assert not any(u in picked and v in picked for u, v in edges)
    assert answer.value == (len(picked), 1)


def test_a_later_task_on_a_graph_finds_what_an_earlier_one_left(tmp_path):
    """Across workers, through the folder; without ordering or triangulating again, and with the same answer."""
    windows = time_windows(20_000, 20.0, 50, 1)
    edges = list(zip(windows.low.tolist(), windows.high.tolist(), strict=True))
    made = Stage(LocalExecutor(1, keep_folder=tmp_path / "kept"))
    try:
        with made.audience.changed:
            assert made.audience.changed.wait_for(lambda: made.executor.free() == 1, COLD_SECONDS)
        named = {"owner": "ann", "graph_address": "f" * 64}
        first, second, other = (
            solved(made, windows.n, edges, weights=weights, named=named)
            for weights in (windows.weights.tolist(), windows.weights.tolist(), windows.weights[::-1].tolist())
        )
    finally:
        made.executor.stop(0.0)
    assert Phase.ORDER in dict(first.phase_seconds)
    for later in (second, other):
        assert Phase.ORDER not in dict(later.phase_seconds)
    assert second.columns == first.columns
    assert (second.value, second.fill, second.states) == (first.value, first.fill, first.states)
    assert other.value != first.value
