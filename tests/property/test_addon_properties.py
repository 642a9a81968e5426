"""Properties of best sets, their number and limits over drawn graphs, judged by trial and by what must hold anyway."""

from itertools import pairwise

import numpy as np
from definition import all_independent, is_independent
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, Outcome, Verdict, solve
from nearchord_solve.fill import cores
from strategies import Edges, arbitrary_graphs, chordal_graphs, near_chordal_graphs, weighted_graphs, window_graphs

Weighted = tuple[int, list[tuple[int, int]], list[int]]


@st.composite
def small_weighted(draw: st.DrawFn) -> Weighted:
    """A graph small enough to try all its sets, with weights that tie often or seldom."""
    kinds = st.one_of(arbitrary_graphs(), chordal_graphs(12), window_graphs(13), near_chordal_graphs(13))
    n, edges = draw(kinds)
    most = draw(st.sampled_from([0, 1, 2, 5, 1000]))
    return n, edges, draw(st.lists(st.integers(0, most), min_size=n, max_size=n))


def ask(question: IndependentSet, drawn: Weighted) -> Outcome:
    """Solve with the usual budget."""
    n, edges, weights = drawn
    return solve(question, Graph.from_edges(n, edges), np.array(weights, np.int64), Budget(), "bound", Monitor())


def sets_of(outcome: Outcome) -> list[tuple[int, ...]]:
    """The best sets."""
    start = outcome.columns["best_start"].tolist()
    chosen = outcome.columns["best_chosen"].tolist()
    return [tuple(chosen[start[i] : start[i + 1]]) for i in range(len(start) - 1)]


@settings(max_examples=150, deadline=None)
@given(small_weighted(), st.integers(2, 1000))
def test_best_sets_and_their_number_agree_with_trial(drawn: Weighted, most: int) -> None:
    n, edges, weights = drawn
    known = all_independent(n, edges, weights)
    outcome = ask(IndependentSet(best=most, count=True), drawn)
    assert outcome.columns["best_value"].tolist() == [value for value, _ in known[:most]]
    assert outcome.count == sum(value == known[0][0] for value, _ in known)
    found = sets_of(outcome)
    assert len(set(found)) == len(found)
    for value, chosen in zip(outcome.columns["best_value"].tolist(), found, strict=True):
        assert is_independent(edges, chosen)
        assert sum(weights[v] for v in chosen) == value


@settings(max_examples=100, deadline=None)
@given(weighted_graphs(), st.integers(2, 60))
def test_more_best_sets_begin_with_the_fewer(drawn: Weighted, most: int) -> None:
    """The values do; and as many of the first are worth the optimum as there are best sets."""
    few, many = ask(IndependentSet(best=most), drawn), ask(IndependentSet(best=2 * most, count=True), drawn)
    values = many.columns["best_value"].tolist()
    assert few.columns["best_value"].tolist() == values[:most]
    assert values == sorted(values, reverse=True)
    assert many.count is not None
    assert values.count(many.value) == min(many.count, len(values))


@settings(max_examples=60, deadline=None)
@given(weighted_graphs())
def test_large_cores_give_the_same_sets_and_number(drawn: Weighted) -> None:
    """The sparse way through a core leads to other bags, with and without fill, and to the same values."""
    question = IndependentSet(best=40, count=True)
    dense = ask(question, drawn)
    limit = cores.DENSE_LIMIT
    cores.DENSE_LIMIT = 0
    try:
        sparse = ask(question, drawn)
    finally:
        cores.DENSE_LIMIT = limit
    assert sparse.columns["best_value"].tolist() == dense.columns["best_value"].tolist()
    assert sparse.count == dense.count


@settings(max_examples=60, deadline=None)
@given(weighted_graphs(), st.integers(1, 70))
def test_a_vertex_alone_doubles_the_number_if_it_weighs_nothing(drawn: Weighted, more: int) -> None:
    n, edges, weights = drawn
    before, after = (ask(IndependentSet(count=True), (n + k, edges, weights + [0] * k)).count for k in (0, more))
    assert before is not None
    assert after == before << more


@settings(max_examples=100, deadline=None)
@given(small_weighted())
def test_limits_agree_with_trial(drawn: Weighted) -> None:
    n, edges, weights = drawn
    known = all_independent(n, edges, weights)
    for limit in range(n + 2):
        outcome = ask(IndependentSet(limit=limit), drawn)
        best = max(value for value, chosen in known if len(chosen) <= limit)
        assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.PROVEN, best, best)
        assert outcome.chosen.size <= limit
        assert is_independent(edges, outcome.chosen.tolist())


@settings(max_examples=60, deadline=None)
@given(st.one_of(window_graphs(), near_chordal_graphs()), st.data())
def test_each_vertex_more_is_worth_its_weight_at_most(drawn: Edges, data: st.DataObject) -> None:
    """The value grows with the limit, by no more than the heaviest vertex, up to that without a limit."""
    n, edges = drawn
    weights = data.draw(st.lists(st.integers(0, 30), min_size=n, max_size=n))
    values = [ask(IndependentSet(limit=c), (n, edges, weights)).value for c in range(n + 1)]
    assert values[0] == 0
    assert values[-1] == ask(IndependentSet(), (n, edges, weights)).value
    assert all(0 <= more - less <= max(weights) for less, more in pairwise(values))
