"""What the solver says beside its choice is what trying every set gives, and the checker never refuses it."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import nearchord
import numpy as np
import pytest
import strategies
from add_on_answers import choice_answer, digest
from certified import answered
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord.question import Choice

EXACT = ("price_in", "price_out", "conflict_price", "best_value", "scenario_value", "scenario_bound")
KINDS: list[tuple[type[Choice], dict[str, Any]]] = [
    (nearchord.IndependentSet, {}),
    (nearchord.ColourableSubgraph, {"colours": 1}),
    (nearchord.ColourableSubgraph, {"colours": 2}),
    (nearchord.InducedForest, {}),
]


@st.composite
def small_cases(draw: st.DrawFn) -> tuple[nearchord.Graph, dict[str, list[int]]]:
    """A graph small enough to try every set, with weights that repeat and vanish, and a few pins."""
    n, edges = draw(strategies.arbitrary_graphs(most=7))
    weights = draw(st.lists(st.integers(0, 5), min_size=n, max_size=n))
    pins = draw(st.lists(st.integers(0, n - 1), unique=True, max_size=2)) if n else []
    cut = draw(st.integers(0, len(pins)))
    return nearchord.Graph.from_edges(n, edges, weights), {"must": pins[:cut], "never": pins[cut:]}


def agree(graph: nearchord.Graph, asked: Choice, answer: nearchord.Answer) -> None:
    """The same figures as by trying, and confirmed as far as anything can be."""
    right = choice_answer(graph, asked)
    assert (answer.verdict, answer.value, answer.count) == (right.verdict, right.value, right.count)
    for name in EXACT:
        assert (name in answer.columns) == (name in right.columns), name
        assert np.array_equal(answer.columns.get(name, ()), right.columns.get(name, ())), name
    nearchord.check(graph, answer, question=asked)


@settings(deadline=None)
@given(small_cases(), st.integers(0, 9))
def test_prices_best_sets_and_counts_of_independent_sets(
    case: tuple[nearchord.Graph, dict[str, list[int]]], best: int
) -> None:
    """All together, with pins."""
    graph, pins = case
    asked = nearchord.IndependentSet(**pins, prices=True, conflict_prices=True, best=best, count=True)
    agree(graph, asked, answered(graph, asked))


@settings(deadline=None)
@given(small_cases(), st.integers(0, 5))
def test_limits(case: tuple[nearchord.Graph, dict[str, list[int]]], limit: int) -> None:
    """Also below the number of pins."""
    graph, pins = case
    asked = nearchord.IndependentSet(**pins, limit=limit)
    agree(graph, asked, answered(graph, asked))


@pytest.mark.parametrize(("kind", "fields"), KINDS[1:], ids=str)
@settings(deadline=None, max_examples=40)
@given(case=small_cases())
def test_prices_of_colours_and_forests(
    kind: type[Choice], fields: dict[str, Any], case: tuple[nearchord.Graph, dict[str, list[int]]]
) -> None:
    graph, pins = case
    asked = kind(**pins, **fields, prices=True)
    agree(graph, asked, answered(graph, asked))


@pytest.mark.parametrize(("kind", "fields"), KINDS, ids=str)
@settings(deadline=None, max_examples=40)
@given(case=small_cases(), data=st.data())
def test_scenarios(
    kind: type[Choice],
    fields: dict[str, Any],
    case: tuple[nearchord.Graph, dict[str, list[int]]],
    data: st.DataObject,
) -> None:
    """The answer's question has their number, the one that was asked their weights."""
    graph, pins = case
    row = st.lists(st.integers(0, 5), min_size=graph.n, max_size=graph.n)
    rows = np.array(data.draw(st.lists(row, min_size=1, max_size=4)), np.int64)
    asked = kind(**pins, **fields, scenarios=rows)
    answer = answered(graph, asked)
    origin = replace(answer.provenance, weights_address=digest(rows.reshape(-1)))
    agree(graph, asked, replace(answer, question=replace(asked, scenarios=len(rows)), provenance=origin))
