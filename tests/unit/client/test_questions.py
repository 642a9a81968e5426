"""What a question may be asked for, and what is refused with place and remedy."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from nearchord import (
    BadInput,
    Clique,
    ColourableSubgraph,
    Colouring,
    FractionalColouring,
    IndependentSet,
    InducedForest,
)
from nearchord.question import Question

ROWS = [[1, 2, 3], [4, 5, 6]]
MUCH = 2**61


@pytest.mark.parametrize(
    ("kind", "fields", "message"),
    [
        (IndependentSet, {"best": 1_001}, "best is 1001; give a whole number from 0 to 1000"),
        (IndependentSet, {"best": -1}, "best is -1"),
        (IndependentSet, {"best": "3"}, "best is '3'"),
        (IndependentSet, {"limit": -1}, "limit is -1; give a whole number from 0 to 4294967295"),
        (IndependentSet, {"limit": 2.5}, "limit is 2.5"),
        (IndependentSet, {"limit": 2**32}, "limit is 4294967296"),
        (IndependentSet, {"prices": "yes"}, "prices is 'yes'; write prices=True or prices=False"),
        (IndependentSet, {"count": 1}, "count is 1"),
        (IndependentSet, {"limit": 0, "count": True}, "limit stands beside count, but goes with pins only"),
        (IndependentSet, {"limit": 3, "scenarios": ROWS}, "limit stands beside scenarios"),
        (IndependentSet, {"scenarios": ROWS, "prices": True, "best": 2}, "scenarios stands beside prices, best"),
        (ColourableSubgraph, {"scenarios": ROWS, "prices": True}, "scenarios stands beside prices"),
        (InducedForest, {"scenarios": ROWS, "prices": True}, "scenarios stands beside prices"),
        (IndependentSet, {"scenarios": [1, 2, 3]}, "scenarios are not a table of numbers; give one row a scenario"),
        (IndependentSet, {"scenarios": []}, "scenarios are not a table"),
        (IndependentSet, {"scenarios": [[1, 2], [3]]}, "scenarios are not a table"),
        (IndependentSet, {"scenarios": [[1, 2], [3, -4]]}, "scenario 1: weight 1 is -4, which is negative"),
        (InducedForest, {"scenarios": [[1, 0.5]]}, "scenario 0: weight 1 is 0.5, which is not a whole number"),
        (IndependentSet, {"scenarios": [[1, 1], [MUCH, MUCH]]}, "scenario 1: the weights add up to 2\\^62 or more"),
        (ColourableSubgraph, {"scenarios": np.ones((10_001, 1), int)}, "there are 10001 scenarios; give at most 10000"),
        (IndependentSet, {"scenarios": 10_001}, "scenarios is 10001"),
        (Colouring, {"demands": [1, -1]}, "demand 1 is -1, which is negative; give demands of at least 0"),
        (Colouring, {"demands": [[1]]}, "demands are not a list of numbers"),
        (FractionalColouring, {"demands": [1, 1.5]}, "demand 1 is 1.5, which is not a whole number"),
        (FractionalColouring, {"demands": [MUCH, MUCH]}, "the demands add up to 2\\^62 or more"),
        (FractionalColouring, {"demands": ["many"]}, "demands have dtype"),
    ],
)
def test_wrong_fields_are_named(kind: type[Question], fields: dict[str, Any], message: str) -> None:
    with pytest.raises(BadInput, match=message):
        kind(**fields)


def test_what_goes_together_is_taken() -> None:
    """Prices, further sets and counts in one job; a best of one is the plain answer and stands beside anything."""
    IndependentSet(prices=True, conflict_prices=True, best=1_000, count=True, must=[1], never=["a"])
    assert IndependentSet(limit=0, best=1).limit == 0
    assert IndependentSet(scenarios=ROWS, best=1, must=[0]).scenario_count == 2


def test_vectors_are_kept_as_read_only_numbers() -> None:
    """In the form in which they are sent."""
    asked = IndependentSet(scenarios=ROWS)
    assert asked.vectors is not None
    assert (asked.vectors.dtype, asked.vectors.tolist(), asked.vectors.flags.writeable) == (np.int64, ROWS, False)
    demands = Colouring(demands=(0, 7, 1)).vectors
    assert demands is not None
    assert (demands.dtype, demands.tolist(), demands.flags.writeable) == (np.int64, [0, 7, 1], False)
    assert InducedForest(scenarios=np.uint64([[3]])).vectors == [[3]]


@pytest.mark.parametrize(
    ("asked", "scenarios"),
    [(IndependentSet(), 0), (Clique(), 0), (Colouring(), 0), (IndependentSet(scenarios=3), 3)],
    ids=str,
)
def test_without_vectors_there_are_none(asked: Question, scenarios: int) -> None:
    """The question of an answer knows how many scenarios there were."""
    assert asked.vectors is None
    assert asked.scenario_count == scenarios
