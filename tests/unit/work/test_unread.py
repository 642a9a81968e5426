"""Answers without the graph, for questions with colours, shares, limits and scenarios."""

from __future__ import annotations

import numpy as np
import pytest
from contract.executor_stage import task
from contract.scripted_solver import Script
from nearchord_service.model.answer import ElementType
from nearchord_service.model.question import Question, QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.work import unread

DTYPES = {ElementType.UINT32: "<u4", ElementType.INT64: "<i8"}


def answered(name, weights=None, memory_bytes=2**30, **asked):
    """The answer and its columns as lists, of a job on four vertices."""
    one = task(Script.ANSWER, weights=weights, memory_bytes=memory_bytes, question=Question(name, **asked))
    answer = unread.answer(one, 2**40)
    assert answer.verdict is Verdict.BOUNDED
    assert str(2**40) in answer.reason
    return answer, {c.name: np.frombuffer(c.data, DTYPES[c.type]).tolist() for c in answer.columns}


def test_every_vertex_can_have_a_colour_of_its_own():
    answer, columns = answered(QuestionName.COLOURING)
    assert (answer.value, answer.bound, columns) == ((4, 1), (1, 1), {"colour": [1, 2, 3, 4]})


def test_demands_are_met_in_turn():
    """No vertex shares a colour; the largest demand is the least number."""
    answer, columns = answered(QuestionName.COLOURING, [2, 0, 3, 1])
    assert (answer.value, answer.bound) == ((6, 1), (3, 1))
    assert columns == {"colour": [1, 2, 3, 4, 5, 6], "colour_start": [0, 2, 2, 5, 6]}


@pytest.mark.parametrize(("memory_bytes", "fits"), [(24, True), (23, False)])
def test_colours_that_do_not_fit_are_not_named(memory_bytes, fits):
    """A demand can be far above what any list holds."""
    answer, columns = answered(QuestionName.COLOURING, [2, 0, 3, 1], memory_bytes)
    assert (answer.value is not None, bool(columns)) == (fits, fits)
    assert answer.bound == (3, 1)
    answer, columns = answered(QuestionName.COLOURING, [2**60, 0, 0, 0])
    assert (answer.value, answer.bound, columns) == (None, (2**60, 1), {})


def test_a_frame_gives_each_its_share_in_turn():
    answer, columns = answered(QuestionName.FRACTIONAL_COLOURING, [2, 0, 2**60, 1])
    assert (answer.value, answer.bound) == ((2**60 + 3, 1), (2**60, 1))
    assert columns == {
        "share_start": [0, 1, 2, 3],
        "share_vertex": [0, 2, 3],
        "share_numerator": [2, 2**60, 1],
        "share_denominator": [1],
    }


def test_scenarios_are_answered_one_by_one():
    """The first is that of the head."""
    answer, columns = answered(QuestionName.INDUCED_FOREST, [1, 5, 5, 0, 9, 0, 0, 2], scenarios=2)
    assert (answer.value, answer.bound) == ((5, 1), (11, 1))
    assert columns == {
        "chosen": [1],
        "scenario_value": [5, 9],
        "scenario_bound": [11, 11],
        "scenario_start": [0, 1, 2],
        "scenario_chosen": [1, 0],
    }


def test_a_single_vertex_has_a_colour():
    _, columns = answered(QuestionName.COLOURABLE_SUBGRAPH, colours=3)
    assert columns == {"chosen": [0], "colour": [1]}
    _, columns = answered(QuestionName.COLOURABLE_SUBGRAPH, [1, 2, 3, 4, 4, 3, 2, 1], colours=2, scenarios=2)
    assert (columns["scenario_colour"], columns["scenario_chosen"]) == ([1, 1], [3, 0])


def test_a_limit_of_nothing_is_kept():
    answer, columns = answered(QuestionName.INDEPENDENT_SET, limit=0)
    assert (answer.value, answer.bound, columns) == ((0, 1), (0, 1), {"chosen": []})
    answer, columns = answered(QuestionName.INDEPENDENT_SET, limit=1)
    assert (answer.value, answer.bound, columns) == ((1, 1), (4, 1), {"chosen": [0]})


def test_pins_leave_no_choice_in_any_scenario():
    answer, columns = answered(QuestionName.INDUCED_FOREST, range(8), must=(1,), scenarios=2)
    assert (answer.value, answer.bound, columns) == (None, None, {})
