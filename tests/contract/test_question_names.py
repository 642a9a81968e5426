"""The client, the contract, the service and the solver each list the questions; the lists must not drift apart."""

from __future__ import annotations

from dataclasses import fields

import nearchord
import nearchord_solve
import pytest
from contract import scripted_solver
from nearchord.v1 import question_pb2
from nearchord_service.model.question import QuestionName


def named(of: type) -> set[str]:
    """The fields of a question's class."""
    return {field.name for field in fields(of)}


def test_all_parts_know_the_same_questions() -> None:
    """By name; the solver that stands in for the real one in other tests included."""
    names = {name.value for name in QuestionName}
    assert set(nearchord.QUESTIONS) == names
    assert set(nearchord_solve.QUESTIONS) == names
    assert set(scripted_solver.QUESTIONS) == names
    assert {field.replace("_", "-") for field in question_pb2.Question.DESCRIPTOR.fields_by_name} == names


@pytest.mark.parametrize("name", QuestionName)
def test_all_parts_know_the_same_fields_of_a_question(name: QuestionName) -> None:
    """The runner hands fields over by name: one that the solver lacks would be dropped without a word."""
    expected = {*name.add_ons, *(("must", "never") if name.chooses else ())}
    assert named(nearchord_solve.QUESTIONS[name]) == expected
    assert named(nearchord.QUESTIONS[name]) - {"demands"} == expected
    assert ("demands" in named(nearchord.QUESTIONS[name])) == name.takes_demands
