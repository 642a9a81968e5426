"""What a solver may say beside choices, and how it is recorded."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
from contract import scripted_solver
from contract.executor_stage import task
from contract.scripted_solver import Script
from nearchord_service.model.question import Question, QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.work.outcome import COUNT_DIGITS, REASON_LENGTH, recorded
from unit.work.test_runner import run, solver_with


def outcome(**changes):
    return scripted_solver.with_fields(scripted_solver.outcome(), **changes)


def test_fractions_stay_exact():
    """A frame of 5/2 is no rounded number."""
    answer = recorded(outcome(value=Fraction(5, 2), bound=Fraction(7, 3)), 4)
    assert (answer.value, answer.bound) == ((5, 2), (7, 3))


@pytest.mark.parametrize("value", [Fraction(1, 2**63), Fraction(2**63, 3), 2**63, -(2**63) - 1])
def test_fractions_that_the_contract_cannot_say_are_defects(value):
    """Numerator and denominator travel as int64."""
    with pytest.raises(ValueError, match="no fraction of two int64"):
        recorded(outcome(value=value), 4)
    assert recorded(outcome(value=Fraction(-(2**63), 2**63 - 1)), 4).value == (-(2**63), 2**63 - 1)


@pytest.mark.parametrize("count", [0, 1, 2**64, 10**5_000 - 1], ids=lambda count: f"{count.bit_length()} bits")
def test_a_count_is_written_in_digits(count):
    """Also one that is longer than what Python turns into text by itself."""
    digits = recorded(outcome(count=count), 4).count
    assert digits.isdecimal()
    value = 0
    for start in range(0, len(digits), 1_000):
        piece = digits[start : start + 1_000]
        value = value * 10 ** len(piece) + int(piece)
    assert value == count


def test_no_count_is_none():
    assert recorded(outcome(), 4).count is None


def test_a_count_that_is_too_long_is_left_out_and_said_so():
    """The longest count that is given, and one more; the words are there however long the reason is."""
    assert recorded(outcome(count=10**COUNT_DIGITS - 1), 4).count == "9" * COUNT_DIGITS
    answer = recorded(outcome(count=10**COUNT_DIGITS, reason="r" * 5_000), 4)
    assert answer.count is None
    assert answer.reason.endswith("has more than 100000 digits and is left out")
    assert len(answer.reason) == REASON_LENGTH


def test_a_cancelled_solve_leaves_no_count():
    assert recorded(outcome(count=3, verdict=scripted_solver.Verdict.CANCELLED), 4).count is None


@pytest.mark.parametrize("name", ["colour", "scenario_colour"])
def test_colours_may_exceed_the_vertices(name):
    """Demands can take more colours than there are vertices; every other uint32 is a vertex."""
    columns = {name: np.array([9], np.uint32)}
    (_, column) = recorded(outcome(columns=columns), 4).columns
    assert column.data == (9).to_bytes(4, "little")
    with pytest.raises(ValueError, match="column share_vertex has vertex 9 on 4 vertices"):
        recorded(outcome(columns={"share_vertex": columns[name]}), 4)


def test_add_ons_reach_the_solver():
    """Each question gets those that it takes."""
    asked = Question(QuestionName.INDEPENDENT_SET, prices=True, conflict_prices=True, best=3, count=True, limit=2)
    seen = []
    solver = solver_with(lambda question, *_: seen.append(question) or scripted_solver.outcome())
    run(task(Script.ANSWER, question=asked), solver)
    run(task(Script.ANSWER, question=Question(QuestionName.COLOURABLE_SUBGRAPH, colours=3, prices=True)), solver)
    run(task(Script.ANSWER, question=Question(QuestionName.COLOURING)), solver)
    assert seen == [
        scripted_solver.IndependentSet(prices=True, conflict_prices=True, best=3, count=True, limit=2),
        scripted_solver.ColourableSubgraph(colours=3, prices=True),
        scripted_solver.Colouring(),
    ]


def weights_seen(one):
    seen = []
    answer = run(one, solver_with(lambda question, graph, weights, *_: seen.append(weights) or outcome()))
    return answer, *seen


@pytest.mark.parametrize("name", [name for name in QuestionName if "scenarios" in name.add_ons])
def test_scenarios_reach_the_solver_as_rows(name):
    """One row a scenario, also when there is only one."""
    for count in (1, 2):
        one = task(Script.ANSWER, weights=range(4 * count), question=Question(name, scenarios=count))
        answer, weights = weights_seen(one)
        assert answer.verdict is Verdict.PROVEN
        assert weights.tolist() == [[0, 1, 2, 3], [4, 5, 6, 7]][:count]
        assert weights.flags.c_contiguous


def test_scenarios_of_an_empty_graph_are_empty_rows():
    one = task(Script.ANSWER, vertices=0, weights=[], question=Question(QuestionName.INDUCED_FOREST, scenarios=2))
    seen = weights_seen(one)
    assert seen[1].shape == (2, 0)


def test_demands_reach_the_solver():
    one = task(Script.ANSWER, weights=[0, 1, 2, 3], question=Question(QuestionName.FRACTIONAL_COLOURING))
    assert weights_seen(one)[1].tolist() == [0, 1, 2, 3]


def test_weights_that_do_not_fit_the_scenarios_are_broken():
    asked = Question(QuestionName.INDEPENDENT_SET, scenarios=2)
    (answer,) = weights_seen(replace(task(Script.ANSWER, weights=[1, 2, 3, 4]), question=asked))
    assert answer.verdict is Verdict.BROKEN
    assert "4 weights for 4 vertices in each of 2 scenarios" in answer.reason
