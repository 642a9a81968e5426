"""The runner with a scripted solver in this process."""

from __future__ import annotations

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest
from contract import scripted_solver
from contract.executor_stage import edgeless, task
from contract.scripted_solver import Script
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


@pytest.mark.parametrize("name", list(QuestionName))
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
