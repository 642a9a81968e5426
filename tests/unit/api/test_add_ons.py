"""Add-ons and demands: there and back, and refused where they are wrong or too much."""

from __future__ import annotations

import struct
from collections.abc import Callable
from typing import Any

import pytest
from nearchord.v1 import job_pb2, question_pb2
from nearchord_service.api.convert.questions import from_question, to_question
from nearchord_service.api.convert.violations import Violations
from nearchord_service.model.errors import FieldInvalid
from nearchord_service.model.job import JobSpec
from nearchord_service.model.question import Question, QuestionName
from unit.api.test_specs import CAPS, STORED, read_one

INDEPENDENT, COLOURABLE, FOREST = (
    QuestionName.INDEPENDENT_SET,
    QuestionName.COLOURABLE_SUBGRAPH,
    QuestionName.INDUCED_FOREST,
)
PLANS = [QuestionName.COLOURING, QuestionName.FRACTIONAL_COLOURING]


@pytest.mark.parametrize(
    "asked",
    [
        Question(INDEPENDENT, prices=True, conflict_prices=True, best=1_000, count=True),
        Question(INDEPENDENT, (1,), (0,), best=1),
        Question(INDEPENDENT, (1,), (0,), limit=0),
        Question(INDEPENDENT, limit=2**32 - 1, best=1),
        Question(INDEPENDENT, (1,), (0,), scenarios=10_000),
        Question(COLOURABLE, (1,), (0,), colours=3, prices=True),
        Question(COLOURABLE, (1,), (0,), colours=4, scenarios=1),
        Question(FOREST, (1,), (0,), prices=True),
        Question(FOREST, (1,), (0,), scenarios=7),
        *map(Question, PLANS),
    ],
    ids=str,
)
def test_what_is_asked_comes_back(asked: Question) -> None:
    wrong = Violations()
    assert to_question(from_question(asked), "question", CAPS, wrong) == asked
    wrong.settle()


def test_absent_add_ons_are_the_plain_question() -> None:
    message = question_pb2.Question(independent_set=question_pb2.IndependentSet())
    assert to_question(message, "question", CAPS, Violations()) == Question(INDEPENDENT)
    assert not from_question(Question(INDEPENDENT)).independent_set.ListFields()


def put(name: str, scenario_weights: bool = True, **fields: Any) -> Callable[[job_pb2.JobSpec], None]:
    """Ask `name` with these fields about the triangle of a valid spec, with weights for its scenarios if it has any."""

    def change(spec: job_pb2.JobSpec) -> None:
        asked = getattr(spec.question, name)
        asked.SetInParent()
        for field, value in fields.items():
            setattr(asked, field, value)
        if scenario_weights and 0 < fields.get("scenarios", 0) < 9:
            spec.input.weights_content = struct.pack(f"<{3 * fields['scenarios']}q", *range(3 * fields["scenarios"]))

    return change


ALONE = "but goes with pins only; ask for one of them in another job"


@pytest.mark.parametrize(
    ("change", "field", "description"),
    [
        (put("independent_set", best=1_001), "best", "is 1001, where at most 1000 are allowed; ask for fewer"),
        (
            put("independent_set", scenarios=10_001, scenario_weights=False),
            "scenarios",
            "is 10001, where at most 10000 are allowed; ask for fewer",
        ),
        (put("induced_forest", scenarios=2**32 - 1), "scenarios", "where at most 10000 are allowed"),
        (put("colourable_subgraph", scenarios=10_001), "scenarios", "where at most 10000 are allowed"),
        (put("independent_set", limit=0, prices=True), "limit", f"stands beside prices, {ALONE}"),
        (put("independent_set", limit=3, best=2, count=True), "limit", f"stands beside best, count, {ALONE}"),
        (put("independent_set", limit=3, scenarios=2), "limit", f"stands beside scenarios, {ALONE}"),
        (put("independent_set", scenarios=2, prices=True), "scenarios", f"stands beside prices, {ALONE}"),
        (put("independent_set", scenarios=2, conflict_prices=True), "scenarios", "stands beside conflict_prices"),
        (put("colourable_subgraph", scenarios=2, prices=True), "scenarios", f"stands beside prices, {ALONE}"),
        (put("induced_forest", scenarios=1, prices=True), "scenarios", f"stands beside prices, {ALONE}"),
    ],
)
def test_wrong_add_ons_are_named(change: Callable[[job_pb2.JobSpec], None], field: str, description: str) -> None:
    with pytest.raises(FieldInvalid) as caught:
        read_one(change)
    found = {violation.field.rpartition(".")[2]: violation.description for violation in caught.value.violations}
    assert description in found.pop(field)
    assert set(found) <= {"input"}  # ten thousand scenarios too many have no weights here


def stored(**fields: Any) -> JobSpec:
    """Ask about the stored graph of five vertices."""

    def change(spec: job_pb2.JobSpec) -> None:
        put("independent_set", scenario_weights=False, **fields)(spec)
        spec.input.graph_address = STORED
        spec.input.weights_address = "77" * 32

    return read_one(change)


@pytest.mark.parametrize(("field", "most"), [("best", 200), ("scenarios", 200)])
def test_sets_that_no_answer_could_hold_are_refused(field: str, most: int, monkeypatch: pytest.MonkeyPatch) -> None:
    """An answer holds a bounded number of vertices in all its sets together."""
    monkeypatch.setattr("nearchord_service.api.convert.add_ons.MOST_CHOSEN", 1_000)
    assert getattr(stored(**{field: most}).question, field) == most
    with pytest.raises(FieldInvalid) as caught:
        stored(**{field: most + 1})
    (violation,) = caught.value.violations
    assert violation.field == f"spec.question.independent_set.{field}"
    assert violation.description == (
        "is 201 on 5 vertices, where an answer holds sets of 1000 vertices together; ask for at most 200"
    )


def test_scenarios_need_weights() -> None:
    with pytest.raises(FieldInvalid) as caught:
        read_one(put("induced_forest", scenario_weights=False, scenarios=2))
    (violation,) = caught.value.violations
    assert violation.field == "spec.input"
    assert violation.description == (
        "has no weights, but the question has 2 scenarios; "
        "give a weight a vertex for each of them, scenario by scenario"
    )


@pytest.mark.parametrize("entries", [3, 5, 7, 9])
def test_scenarios_need_a_weight_a_vertex_each(entries: int) -> None:
    def change(spec: job_pb2.JobSpec) -> None:
        put("independent_set", scenarios=2)(spec)
        spec.input.weights_content = bytes(8 * entries)

    with pytest.raises(FieldInvalid) as caught:
        read_one(change)
    (violation,) = caught.value.violations
    assert violation.field == "spec.input.weights_content"
    assert violation.description == (
        f"has {entries} weights for 3 vertices; send one a vertex for each of 2 scenarios, 6 in all"
    )


def test_scenarios_carry_their_vectors_one_after_the_other() -> None:
    found = read_one(put("independent_set", scenarios=2))
    assert found.question.scenarios == 2
    assert found.inline[1].data == struct.pack("<6q", *range(6))


@pytest.mark.parametrize("name", PLANS)
def test_weights_of_a_colouring_are_its_demands(name: QuestionName) -> None:
    def change(spec: job_pb2.JobSpec) -> None:
        getattr(spec.question, name.name.lower()).SetInParent()
        spec.input.weights_content = struct.pack("<3q", 0, 1, 7)

    found = read_one(change)
    assert (found.question, found.inline[1].data) == (Question(name), struct.pack("<3q", 0, 1, 7))
