"""Which add-ons of independent-set are accepted."""

from typing import Any

import numpy as np
import pytest
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, SolverError, solve


def refused(**asked: Any) -> tuple[str, str]:
    """The field and the message of the error that a question meets."""
    scenarios = asked.get("scenarios", 0)
    weights = np.ones((scenarios, 3), np.int64) if scenarios > 0 else None
    with pytest.raises(SolverError) as caught:
        solve(IndependentSet(**asked), Graph.from_edges(3, [(0, 1)]), weights, Budget(), "bound", Monitor())
    return caught.value.field, caught.value.message


@pytest.mark.parametrize(
    ("asked", "field", "message"),
    [
        ({"best": -1}, "question.best", "must be 0 to 1000, not -1"),
        ({"best": 1001}, "question.best", "must be 0 to 1000, not 1001"),
        ({"limit": -1}, "question.limit", "must be 0 or more, not -1"),
        ({"scenarios": -2}, "question.scenarios", "must be 0 or more, not -2"),
    ],
)
def test_values_out_of_range_are_named(asked: dict[str, int], field: str, message: str) -> None:
    assert refused(**asked) == (field, message)


@pytest.mark.parametrize(
    "other", [{"prices": True}, {"conflict_prices": True}, {"best": 2}, {"count": True}, {"scenarios": 1}]
)
def test_limit_goes_with_no_other_add_on(other: dict[str, Any]) -> None:
    name = next(iter(other))
    assert refused(limit=1, **other) == (
        "question.limit",
        f"goes with no other add-on: ask for {name} in a job of its own",
    )


@pytest.mark.parametrize("other", [{"prices": True}, {"conflict_prices": True}, {"best": 2}, {"count": True}])
def test_scenarios_go_with_no_other_add_on(other: dict[str, Any]) -> None:
    name = next(iter(other))
    assert refused(scenarios=1, **other) == (
        "question.scenarios",
        f"goes with no other add-on: ask for {name} in a job of its own",
    )


@pytest.mark.parametrize("best", [0, 1])
def test_one_best_set_is_the_usual_answer(best: int) -> None:
    """It has no columns of its own, and a limit does not mind it."""
    graph = Graph.from_edges(3, [(0, 1)])
    outcome = solve(IndependentSet(best=best, limit=2), graph, None, Budget(), "bound", Monitor())
    assert outcome.value == 2
    assert "best_value" not in outcome.columns
    assert outcome.count is None
