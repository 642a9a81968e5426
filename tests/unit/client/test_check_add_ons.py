"""The checker on prices, best sets, counts, limits and scenarios: right ones pass, faults are named."""

from __future__ import annotations

import re
from dataclasses import replace
from itertools import islice
from typing import Any

import networkx as nx
import numpy as np
import pytest
from add_on_answers import choice_answer, numbers
from nearchord import (
    Answer,
    BadInput,
    CheckFailed,
    ColourableSubgraph,
    Graph,
    IndependentSet,
    InducedForest,
    Verdict,
    check,
)
from nearchord.question import Question

# a house: the roof 4 on the square 0 1 2 3; the best independent set is {0, 2}
HOUSE = Graph.from_edges(
    5, [(0, 1), (1, 2), (2, 3), (0, 3), (0, 4), (1, 4)], weights=[3, 1, 4, 1, 2], names=["a", "b", "c", "d", "e"]
)
EVERYTHING = IndependentSet(prices=True, conflict_prices=True, best=4, count=True)
SCENARIOS = [[3, 1, 4, 1, 2], [0, 0, 0, 0, 0], [1, 5, 1, 5, 1]]
OPEN = "the answer carries no proof of it; computing it again confirms it"


def small_graphs() -> list[Graph]:
    """Graphs of the atlas on up to five vertices, under weights that repeat."""
    atlas = islice(nx.graph_atlas_g(), 1, 53)
    return [
        Graph.from_edges(source.number_of_nodes(), list(source.edges), [v * v % 5 for v in range(len(source))])
        for source in atlas
    ]


def faulty(graph: Graph, question: Any, **columns: Any) -> Answer:
    """The right answer with some columns or fields changed; a column of None is left out."""
    answer = choice_answer(graph, question)
    fields = {name: value for name, value in columns.items() if name in vars(answer)}
    merged = {**answer.columns, **{name: value for name, value in columns.items() if name not in fields}}
    return replace(answer, columns={n: c for n, c in merged.items() if c is not None}, **fields)


@pytest.mark.parametrize("pins", [{}, {"must": [0]}, {"never": [0, 1]}], ids=str)
@pytest.mark.parametrize("kind", [EVERYTHING, ColourableSubgraph(prices=True), InducedForest(prices=True)], ids=str)
def test_right_add_ons_are_never_refused(kind: Any, pins: dict[str, Any]) -> None:
    """Nothing that the checker holds against them is more than follows from the definition."""
    for graph in small_graphs():
        asked = replace(kind, **{field: [v for v in vs if v < graph.n] for field, vs in pins.items()})
        answer = choice_answer(graph, asked)
        confirmed = check(graph, answer, question=asked)
        assert "no price contradicts the choice" in " ".join(confirmed.what)


def test_what_is_confirmed_and_what_is_not_is_said_in_words() -> None:
    confirmed = check(HOUSE, choice_answer(HOUSE, EVERYTHING))
    assert confirmed.what == (
        "no edge lies inside the 2 chosen vertices",
        "the chosen vertices weigh 7",
        "no price contradicts the choice: none is below 0 or above what a change by hand costs",
        "no price of a conflict is below 0 or above the lighter end",
        "the 4 best sets differ, meet the question, and are worth what is said",
    )
    assert confirmed.not_confirmed == (
        "the bound 7: it rests on a search, which leaves no proof",
        f"that the prices are exact: {OPEN}",
        f"that the prices of conflicts are exact: {OPEN}",
        f"that no other set is better than the last of these: {OPEN}",
        f"the number of best sets: {OPEN}",
    )


def prices(name: str, **changes: int) -> dict[str, Any]:
    """A price column of the house with some vertices changed."""
    column = choice_answer(HOUSE, EVERYTHING).columns[name].copy()
    for vertex, price in changes.items():
        column[HOUSE.vertex(vertex)] = price
    return {name: column}


def best(place: int, chosen: list[int] | None, value: int | None = None) -> dict[str, Any]:
    """The best sets of the house with one changed, or dropped."""
    answer = choice_answer(HOUSE, EVERYTHING)
    sets = [(v, c.tolist()) for v, c in answer.best]
    if chosen is None:
        del sets[place]
    else:
        sets[place] = (sets[place][0] if value is None else value, chosen)
    return {
        "best_value": numbers(v for v, _ in sets),
        "best_start": numbers(np.cumsum([0, *(len(c) for _, c in sets)])),
        "best_chosen": numbers((v for _, c in sets for v in c), np.uint32),
    }


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        (prices("price_in", b=-2), "vertex b has a price below 0"),
        (prices("price_in", a=1), "vertex a is where the choice has it, but not at the price 0"),
        (prices("price_out", e=1), "vertex e is where the choice has it, but not at the price 0"),
        (prices("price_out", a=4), "vertex a costs more to leave out than its weight"),
        (prices("price_out", a=-1), "vertex a may be left out, but has no price out"),
        (prices("price_in", b=-1), "vertex b may be chosen, but has no price in"),
        (prices("price_in", b=7), "vertex b costs more to take in than the neighbours that would have to go"),
        ({"price_in": None}, "the answer has no column price_in"),
        ({"price_in": numbers([0])}, "the column price_in has 1 entries instead of 5"),
        (
            {"price_in": numbers([0] * 5, np.uint32)},
            "no column price_in of one dimension and type int64",
        ),
        ({"conflict_price": numbers([0] * 6 + [0])}, "the column conflict_price has 7 entries instead of 6"),
        ({"conflict_price": numbers([2, 0, 0, 0, 0, 0])}, "the price 2 of the conflict {a, b} is not from 0 to 1"),
        ({"conflict_price": numbers([0, 0, -1, 0, 0, 0])}, "the price -1 of the conflict {a, e} is not from 0 to 2"),
        (best(0, [0, 3]), "the first of the best sets is not the choice of the answer"),
        (best(1, [0, 4]), "best set 2: the chosen set has the edge {a, e} inside"),
        (best(1, [2, 5]), "best set 2: vertex 5 is chosen, but the graph has 5 vertices"),
        (best(1, [4, 2]), "best set 2: the chosen vertices do not ascend at vertex c"),
        (best(1, [3, 4]), "best set 2 is given the value 6, but weighs 3"),
        (best(1, [0, 2], 7), "two of the best sets are the same"),
        (best(3, [2, 4], 7), "best set 4 is worth more than the one before"),
        (best(1, None), "the second best set is worse by 3, the least price is another"),
        ({"best_start": numbers([0, 2, 1, 4, 5])}, "the column best_start does not ascend from 0 to"),
        ({"count": 0}, "the number of best sets is given as 0"),
        ({"count": 2}, "the number of best sets is not the 1 of greatest value that are listed"),
        ({"verdict": Verdict.BOUNDED, "bound": 8}, "the answer has the prices, but the verdict is BOUNDED"),
    ],
)
def test_faults_are_named(changes: dict[str, Any], message: str) -> None:
    with pytest.raises(CheckFailed, match=re.sub(r"([{}])", r"\\\1", message)):
        check(HOUSE, faulty(HOUSE, EVERYTHING, **changes))


def test_more_best_sets_than_asked_for_are_refused() -> None:
    with pytest.raises(CheckFailed, match="there are 4 best sets, but 3 were asked for"):
        check(HOUSE, replace(choice_answer(HOUSE, EVERYTHING), question=replace(EVERYTHING, best=3)))


def test_counts_and_prices_have_to_agree() -> None:
    """A tie is where changing sides is free."""
    asked = IndependentSet(prices=True, count=True)
    pair = Graph.from_edges(2, [(0, 1)])
    assert choice_answer(pair, asked).count == 2
    check(pair, choice_answer(pair, asked))
    with pytest.raises(CheckFailed, match="disagree whether there is only one"):
        check(pair, choice_answer(pair, asked, count=1))


def test_pinned_vertices_have_one_price() -> None:
    asked = IndependentSet(must=[0], never=[2], prices=True)
    good = choice_answer(HOUSE, asked).columns
    check(HOUSE, choice_answer(HOUSE, asked))
    for column, vertex, message in (
        ("price_out", 0, "vertex a must be chosen, but has a price out"),
        ("price_in", 2, "vertex c must not be chosen, but has a price in"),
        ("price_in", 1, "vertex b cannot be chosen beside what must be, but has a price in"),
    ):
        wrong = good[column].copy()
        wrong[vertex] = 1
        with pytest.raises(CheckFailed, match=message):
            check(HOUSE, faulty(HOUSE, asked, **{column: wrong}))


def test_what_an_answer_lacks_is_said() -> None:
    """A budget may end a job before there are prices."""
    bare = replace(choice_answer(HOUSE, EVERYTHING), columns={}, count=None)
    assert check(HOUSE, bare).not_confirmed[1:] == (
        "the prices: the answer does not have them",
        "the prices of conflicts: the answer does not have them",
        "the best sets: the answer does not have them",
        "the number of best sets: the answer does not have it",
    )


def test_limits_are_confirmed() -> None:
    """At most one vertex: the heaviest weighs most, which needs no proof."""
    confirmed = check(HOUSE, choice_answer(HOUSE, IndependentSet(limit=1)))
    assert confirmed.what == (
        "no edge lies inside the 1 (at most 1) chosen vertices",
        "the chosen vertices weigh 4",
        "the bound 4: no 1 vertices that may be chosen weigh more",
    )
    assert confirmed.not_confirmed == ()
    for graph in small_graphs():
        for limit in range(4):
            check(graph, choice_answer(graph, IndependentSet(limit=limit)))
    pinned = IndependentSet(must=[0], limit=2)
    assert "the bound 7: no 2 vertices" in check(HOUSE, choice_answer(HOUSE, pinned)).what[-1]
    with pytest.raises(CheckFailed, match="2 vertices are chosen, but the limit is 1"):
        check(HOUSE, replace(choice_answer(HOUSE, IndependentSet()), question=IndependentSet(limit=1)))


def test_a_limit_below_the_pins_is_infeasible() -> None:
    answer = choice_answer(HOUSE, IndependentSet(must=[0, 2], limit=1))
    assert answer.verdict is Verdict.INFEASIBLE
    assert check(HOUSE, answer).what == ("2 vertices must be chosen, but the limit is 1",)
    with pytest.raises(CheckFailed, match="the pins do not contradict each other"):
        check(HOUSE, replace(answer, question=IndependentSet(must=[0, 2], limit=2)))


@pytest.mark.parametrize("kind", [IndependentSet, ColourableSubgraph, InducedForest])
def test_scenarios_are_confirmed_one_by_one(kind: Any) -> None:
    asked = kind(scenarios=SCENARIOS)
    confirmed = check(HOUSE, choice_answer(HOUSE, asked), question=asked)
    assert confirmed.what == (
        "in all 3 scenarios the chosen vertices meet the question and weigh what is said",
        "the bounds of 1 scenarios are plain from the weights",
    )
    assert confirmed.not_confirmed == ("the bounds of 2 scenarios: it rests on a search, which leaves no proof",)


def scenario(column: str, place: int, entry: int) -> dict[str, Any]:
    found = choice_answer(HOUSE, ColourableSubgraph(scenarios=SCENARIOS)).columns[column].copy()
    found[place] = entry
    return {column: found}


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        (scenario("scenario_value", 2, 11), "scenario 3: the value is given as 11, but the chosen vertices weigh 12"),
        (scenario("scenario_value", 0, 11), "are not those of the first scenario"),
        (scenario("scenario_bound", 2, 13), "scenario 3: the verdict is PROVEN, but the bound 13 is not the value"),
        (scenario("scenario_start", 1, 0), "are not those of the first scenario"),
        (scenario("scenario_start", 3, 99), "the column scenario_start does not ascend from 0 to"),
        (scenario("scenario_colour", -1, 3), "scenario 3: a colour lies outside 1 to 2"),
        (scenario("scenario_chosen", -1, 7), "scenario 3: vertex 7 is chosen"),
        ({"scenario_bound": None}, "the answer has no column scenario_bound"),
        ({"scenario_value": numbers([1])}, "the column scenario_value has 1 entries instead of 3"),
    ],
)
def test_faults_in_scenarios_are_named(changes: dict[str, Any], message: str) -> None:
    asked = ColourableSubgraph(scenarios=SCENARIOS)
    with pytest.raises(CheckFailed, match=message):
        check(HOUSE, faulty(HOUSE, asked, **changes), question=asked)


def test_scenarios_that_are_infeasible_rest_on_the_pins() -> None:
    asked = IndependentSet(must=[0, 1], scenarios=SCENARIOS)
    assert "{a, b}" in check(HOUSE, choice_answer(HOUSE, asked), question=asked).what[0]


def test_scenarios_have_to_be_given() -> None:
    """An answer carries no vectors."""
    asked = IndependentSet(scenarios=SCENARIOS)
    answer = choice_answer(HOUSE, asked)
    with pytest.raises(BadInput, match="about scenarios, which it does not carry; give the question as it was asked"):
        check(HOUSE, answer)
    with pytest.raises(BadInput, match="there are 4 scenarios for 5 vertices"):
        check(HOUSE, answer, question=IndependentSet(scenarios=[[1, 1, 1, 1]] * 3))
    with pytest.raises(CheckFailed, match="the answer is about the scenarios"):
        check(HOUSE, answer, question=IndependentSet(scenarios=SCENARIOS[::-1]))


@pytest.mark.parametrize(
    ("asked", "message"),
    [
        (InducedForest(), "the answer is to the question independent-set, not to induced-forest"),
        (replace(EVERYTHING, must=["e"]), "the answer is to a question with other vertices in must"),
        (replace(EVERYTHING, best=3), "the answer is to a question with best=4, not 3"),
        (replace(EVERYTHING, count=False), "the answer is to a question with count=True, not False"),
        (IndependentSet(scenarios=SCENARIOS), "the answer is to a question with prices=True, not False"),
    ],
)
def test_an_answer_to_another_question_is_refused(asked: Question, message: str) -> None:
    with pytest.raises(CheckFailed, match=message):
        check(HOUSE, choice_answer(HOUSE, EVERYTHING), question=asked)


def test_the_question_as_asked_may_name_vertices() -> None:
    answer = choice_answer(HOUSE, IndependentSet(must=[1, 3]))
    check(HOUSE, answer, question=IndependentSet(must=["d", "b"], best=1))
    with pytest.raises(BadInput, match="must has 'z', which is no vertex of the graph"):
        check(HOUSE, answer, question=IndependentSet(must=["z"]))
