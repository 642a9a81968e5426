"""Reasons: one of something reads as one."""

import re

import pytest
from nearchord_solve import (
    Budget,
    Clique,
    ColourableSubgraph,
    Colouring,
    Fill,
    FractionalColouring,
    Graph,
    IndependentSet,
    Monitor,
    Outcome,
    Structure,
    Verdict,
    solve,
)
from nearchord_solve.wording import counted, fill_found, fill_needed, verb

SQUARE = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (0, 3)])
RING_OF_FIVE = Graph.from_edges(5, [(0, 1), (1, 2), (2, 3), (3, 4), (0, 4)])


def asked(question: object, graph: Graph = SQUARE, when_over: str = "bound", **budget: int) -> Outcome:
    return solve(question, graph, None, Budget(**budget), when_over, Monitor())


def test_numbers_are_grouped_and_agree_with_their_noun() -> None:
    assert [counted(number, "state") for number in (0, 1, 2, 10_000)] == [
        "0 states",
        "1 state",
        "2 states",
        "10,000 states",
    ]
    assert [verb(number, "is", "are") for number in (0, 1, 2)] == ["are", "is", "are"]


def test_fill_budgets_agree_with_each_of_their_numbers() -> None:
    assert fill_needed(1, 0) == "fill budget: at least 1 fill edge is needed, 0 are allowed"
    assert fill_needed(2, 1) == "fill budget: at least 2 fill edges are needed, 1 is allowed"
    assert fill_found(3, 1, 1) == "fill budget: 3 fill edges were found, 1 is allowed, at least 1 is needed"


@pytest.mark.parametrize(
    ("question", "reason"),
    [
        (IndependentSet(), "of the bags that hold the only fill edge were tried"),
        (ColourableSubgraph(), "of the bags were tried (1 fill edge)"),
        (Clique(), "all 2 bags were compared, with"),
        (Fill(), "1 fill edge suffices and no fewer do"),
        (Structure(), "1 fill edge in 1 fill core suffices and no fewer do"),
    ],
)
def test_a_square_needs_one_fill_edge(question: object, reason: str) -> None:
    outcome = asked(question)
    assert reason in outcome.reason
    assert not re.search(r"\b1 [a-z]+( [a-z]+)?s\b", outcome.reason)


@pytest.mark.parametrize("question", [Colouring(), FractionalColouring()])
def test_a_single_core_is_the_only_one(question: object) -> None:
    assert asked(question, RING_OF_FIVE).reason == "the only fill core was planned on its own"


def test_the_only_core_that_does_not_fit() -> None:
    found = asked(IndependentSet(), states=1)
    assert found.reason.startswith(
        "state budget: the only fill core does not fit into 1 state (bags of up to 3 vertices)"
    )


def test_a_plan_that_may_be_too_long_says_what_was_not_found() -> None:
    """Without states there is no linear program: the ring takes three in whole turns, 5/2 in shares of them."""
    outcome = asked(FractionalColouring(), RING_OF_FIVE, states=1)
    assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.BOUNDED, 3, 2)
    assert outcome.reason.endswith("; 1 state allowed neither a shorter plan nor a proof that there is none")
