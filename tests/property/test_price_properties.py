"""Properties of prices and scenarios over drawn graphs."""

import numpy as np
from definition import is_independent
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, solve
from strategies import weighted_graphs

Drawn = tuple[int, list[tuple[int, int]], list[int]]


@settings(max_examples=150, deadline=None)
@given(weighted_graphs())
def test_prices_agree_with_the_choice_and_with_each_other(drawn: Drawn) -> None:
    """Whatever is chosen costs nothing, whatever is not can be left out for nothing, and without a chosen vertex its
    weight is gone, or something next to it is chosen."""
    n, edges, weights = drawn
    question = IndependentSet(prices=True, conflict_prices=True)
    graph = Graph.from_edges(n, edges)
    outcome = solve(question, graph, np.array(weights, np.int64), Budget(), "bound", Monitor())
    inside, outside = outcome.columns["price_in"], outcome.columns["price_out"]
    chosen = set(outcome.chosen.tolist())
    for v in range(n):
        around = graph.adj[graph.ptr[v] : graph.ptr[v + 1]]
        if v in chosen:
            assert inside[v] == 0
            assert outside[v] == min([weights[v], *inside[around].tolist()])
        else:
            assert outside[v] == 0
            assert 0 <= inside[v] <= sum(weights[u] for u in around if u in chosen) - weights[v]
    for (u, v), gain in zip(edges, outcome.columns["conflict_price"].tolist(), strict=True):
        assert 0 <= gain <= max(0, min(weights[u] - inside[v], weights[v] - inside[u]))


@settings(max_examples=100, deadline=None)
@given(weighted_graphs(), st.integers(1, 6), st.integers(0, 2**32))
def test_each_scenario_is_worth_what_it_is_alone(drawn: Drawn, count: int, seed: int) -> None:
    n, edges, weights = drawn
    graph = Graph.from_edges(n, edges)
    rows = np.random.default_rng(seed).permuted(np.tile(np.array(weights, np.int64), (count, 1)), axis=1)
    outcome = solve(IndependentSet(scenarios=count), graph, rows, Budget(), "bound", Monitor())
    start, chosen = outcome.columns["scenario_start"], outcome.columns["scenario_chosen"]
    for r, row in enumerate(rows):
        alone = solve(IndependentSet(), graph, row, Budget(), "bound", Monitor())
        mine = chosen[start[r] : start[r + 1]]
        assert is_independent(edges, mine.tolist())
        assert row[mine].sum() == alone.value == outcome.columns["scenario_bound"][r]
