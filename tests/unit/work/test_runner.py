"""The runner with a scripted solver in this process."""

from __future__ import annotations

import struct
from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest
from contract import scripted_solver
from contract.executor_stage import edgeless, task
from contract.scripted_solver import Script
from nearchord_service.model.answer import (
    Column,
    ElementType,
    Prediction,
    ProofKind,
    Recognition,
    StructureReport,
)
from nearchord_service.model.content import Bytes
from nearchord_service.model.event import Phase
from nearchord_service.model.question import Question, QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.work import runner, unread


def run(one, solver=scripted_solver, **options):
    return runner.answer(one, solver, np.zeros(16, np.int64), **options)


def solver_with(solve):
    names = {name: getattr(scripted_solver, name) for name in dir(scripted_solver) if not name.startswith("_")}
    return SimpleNamespace(**{**names, "solve": solve})


def test_seconds_are_counted_by_phase():
    """Each phase gets the time until the next, in the order of first entry, and a phase entered again adds up."""
    ticks = iter([0.0, 1.0, 3.0, 6.0, 10.0, 15.0])

    def solve(question, graph, weights, budget, when_over, monitor):
        for phase in ("ORDER", "FILL", "ORDER", "DONE"):
            monitor.enter(scripted_solver.Phase[phase])
        return scripted_solver.outcome()

    answer = run(task(Script.ANSWER), solver_with(solve), clock=lambda: next(ticks))
    assert answer.phase_seconds == ((Phase.READ, 1.0), (Phase.ORDER, 2.0 + 4.0), (Phase.FILL, 3.0))
    assert answer.seconds == 15.0


@pytest.mark.parametrize("name", [name for name in QuestionName if name.chooses])
def test_the_solver_gets_what_the_job_says(name):
    """Question, pins, budget, weights and graph reach the solver."""
    seen = {}

    def solve(question, graph, weights, budget, when_over, monitor):
        seen.update(question=question, graph=graph, weights=weights, budget=budget, when_over=when_over)
        return scripted_solver.outcome()

    one = task(Script.ANSWER, weights=[1, 2, 3, 4], question=Question(name, must=(1,), never=(0, 3)))
    run(one, solver_with(solve))
    assert type(seen["question"]) is scripted_solver.QUESTIONS[name]
    assert (seen["question"].must, seen["question"].never) == ((1,), (0, 3))
    assert (seen["budget"].fill, seen["budget"].states, seen["budget"].memory) == (None, 1, 2**30)
    assert seen["weights"].tolist() == [1, 2, 3, 4]
    assert seen["graph"].n == 4
    assert seen["graph"].row_ptr.tolist() == [0] * 5
    assert seen["when_over"] == "bound"


@pytest.mark.parametrize("name", [name for name in QuestionName if not name.chooses])
def test_questions_get_only_what_they_take(name):
    """A question without pins is made without any."""
    seen = []
    run(
        task(Script.ANSWER, question=Question(name)),
        solver_with(lambda question, *_: seen.append(question) or scripted_solver.outcome()),
    )
    assert seen == [scripted_solver.QUESTIONS[name]()]


def test_a_fill_is_recorded_with_all_its_columns():
    """Types of the solver's arrays decide the types of the columns; what was not settled stays open."""
    answer = run(task(Script.ANSWER, question=Question(QuestionName.FILL)))
    assert (answer.verdict, answer.value, answer.bound) == (Verdict.PROVEN, (1, 1), (1, 1))
    assert answer.proof_kinds == (ProofKind.PACKING,)
    assert answer.recognition == Recognition(chordal=False, interval=False, split=None, splittance=2)
    columns = {column.name: column for column in answer.columns}
    assert list(columns) == list(scripted_solver.fill_outcome().columns)
    assert columns["fill_edge"] == Column("fill_edge", ElementType.UINT32, struct.pack("<2I", 0, 2))
    assert columns["packing_ring"] == Column("packing_ring", ElementType.INT64, struct.pack("<2q", 0, 4))
    assert "chosen" not in columns


def test_a_structure_is_recorded_as_plain_values():
    """Nothing of the solver's types reaches the store."""
    answer = run(task(Script.ANSWER, question=Question(QuestionName.STRUCTURE)))
    assert answer.structure == StructureReport(
        components=1,
        largest_core=4,
        predictions=(
            Prediction("independent-set", 0, 9, at_least=False, memory_bytes=64, fits=True),
            Prediction("colourable-subgraph", 3, 12, at_least=True, memory_bytes=64, fits=False),
        ),
    )
    assert type(answer.structure.components) is int
    assert answer.columns == ()


@pytest.mark.parametrize(
    ("columns", "words"),
    [
        ({"fill_edge": np.array([0, 4], np.uint32)}, "column fill_edge has vertex 4 on 4 vertices"),
        ({"fill_edge": np.array([[0, 1]], np.uint32)}, "column fill_edge has shape (1, 2)"),
        ({"core_start": np.array([0.5])}, "type float64"),
        ({"chosen": np.array([0], np.uint32)}, "stands twice"),
    ],
)
def test_malformed_columns_are_broken(columns, words):
    """What could not be read back is a defect of the solver, named."""
    found = scripted_solver.with_fields(scripted_solver.outcome(), columns=columns)
    answer = run(task(Script.ANSWER), solver_with(lambda *_: found))
    assert (answer.verdict, answer.columns) == (Verdict.BROKEN, ())
    assert words in answer.reason


def test_a_cancelled_solve_leaves_no_answer():
    """Figures stay; value, columns and report are dropped together."""
    found = scripted_solver.with_fields(
        scripted_solver.fill_outcome(),
        verdict=scripted_solver.Verdict.CANCELLED,
        report=scripted_solver.structure_outcome().report,
    )
    answer = run(task(Script.ANSWER), solver_with(lambda *_: found))
    assert (answer.value, answer.columns, answer.recognition, answer.structure) == (None, (), None, None)
    assert answer.fill == 0


def test_too_small_a_fill_budget_keeps_its_witness():
    """OVER_FILL is shown by the packing, so columns and value stay."""
    found = scripted_solver.with_fields(scripted_solver.fill_outcome(), verdict=scripted_solver.Verdict.OVER_FILL)
    answer = run(task(Script.ANSWER, question=Question(QuestionName.FILL)), solver_with(lambda *_: found))
    assert (answer.verdict, answer.value) == (Verdict.OVER_FILL, (1, 1))
    assert "packing_vertex" in {column.name for column in answer.columns}


@pytest.mark.parametrize(
    ("graph", "words"),
    [
        (Bytes(edgeless(4)[:-1], None), "51 bytes"),
        (Bytes(edgeless(4) + b"\0", None), "53 bytes"),
        (Bytes(b"", None), "0 bytes"),
        (Bytes((5).to_bytes(4, "little") + edgeless(4)[4:], None), "5 vertices"),
        (Bytes(None, None), "neither"),
    ],
)
def test_content_that_does_not_fit_its_job_is_broken(graph, words):
    """Damaged content is a defect of the server, named, and never a wrong answer."""
    answer = run(task(Script.ANSWER, graph=graph))
    assert answer.verdict is Verdict.BROKEN
    assert words in answer.reason


def test_weights_that_do_not_fit_the_graph_are_broken():
    """The number of weights is checked before the solver sees them."""
    answer = run(task(Script.ANSWER, weights=[1, 2]))
    assert answer.verdict is Verdict.BROKEN
    assert "2 weights for 4 vertices" in answer.reason


@pytest.mark.parametrize("chosen", [[0, 0], [1, 0], [-1, 0], [4], [[0]]])
def test_choices_that_are_no_sets_of_vertices_are_broken(chosen):
    """Whatever the solver does, a recorded choice is an ascending list of vertices."""
    answer = run(task(Script.ANSWER), solver_with(lambda *_: scripted_solver.outcome(chosen=chosen)))
    assert answer.verdict is Verdict.BROKEN
    assert answer.columns == ()


def test_memory_errors_pass_through():
    """Running out of memory is not a defect; whoever set the limit deals with it."""

    def solve(*_):
        raise MemoryError

    with pytest.raises(MemoryError):
        run(task(Script.ANSWER), solver_with(solve))


def test_endless_messages_are_cut():
    """Reasons stay short enough to store and to show."""

    def solve(*_):
        raise ValueError("x" * 100_000)

    assert len(run(task(Script.ANSWER), solver_with(solve)).reason) <= runner.REASON_LENGTH


def test_unread_cover_is_everything():
    """Without reading edges the only sure cover is all vertices; no weights mean ones."""
    answer = unread.answer(task(Script.ANSWER, vertices=3, question=Question(QuestionName.VERTEX_COVER)), 10)
    assert (answer.value, answer.bound) == ((3, 1), (0, 1))
    assert np.frombuffer(answer.columns[0].data, "<u4").tolist() == [0, 1, 2]


@pytest.mark.parametrize("name", [QuestionName.FILL, QuestionName.STRUCTURE])
def test_unread_fill_is_at_least_nothing(name):
    """No fill edge can be named without the edges; there is only the plainest bound."""
    answer = unread.answer(task(Script.ANSWER, question=Question(name)), 10)
    assert (answer.verdict, answer.value, answer.bound) == (Verdict.BOUNDED, None, (0, 1))
    assert (answer.columns, answer.fill_lower_bound) == ((), 0)
    assert "choice" not in answer.reason


def test_unread_choice_takes_the_lowest_of_equal_vertices():
    """Ties go to the lowest number, also across the pieces in which weights are read."""
    n = unread._PIECE + 10
    weights = np.ones(n, np.int64)
    weights[[5, n - 1]] = 7
    answer = unread.answer(task(Script.ANSWER, vertices=n, weights=weights), 10)
    assert (answer.value, answer.bound) == ((7, 1), (n - 2 + 14, 1))
    assert answer.columns[0].data == (5).to_bytes(4, "little")


def test_unread_empty_graph_has_no_choice():
    """Nothing to choose from is still a reason."""
    answer = unread.answer(replace(task(Script.ANSWER), vertices=0), 10)
    assert (answer.verdict, answer.columns) == (Verdict.BOUNDED, ())
