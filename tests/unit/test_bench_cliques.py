"""The cliques that the benchmark gives to the general solvers are right, or its ratios mean nothing."""

from __future__ import annotations

import networkx as nx
import numpy as np
import pytest
from bench import cliques
from bench.problem import Problem, windows


def problem_of(graph: nx.Graph) -> Problem:
    pairs = sorted((min(u, v), max(u, v)) for u, v in graph.edges)
    low, high = np.array(pairs, np.uint32).reshape(-1, 2).T
    return Problem(graph.number_of_nodes(), low, high, np.ones(graph.number_of_nodes(), np.int64))


def listed(groups: cliques.Groups) -> list[list[int]]:
    return sorted(sorted(part.tolist()) for part in np.split(groups.index, groups.ptr[1:-1]))


@pytest.mark.parametrize("seed", range(30))
def test_maximal_cliques_agree_with_networkx_on_random_graphs(seed: int) -> None:
    """Every maximal clique with an edge is listed, once, and nothing else."""
    graph = nx.gnp_random_graph(12 + seed, 0.1 + seed / 40, seed=seed)
    expected = sorted(sorted(clique) for clique in nx.find_cliques(graph) if len(clique) > 1)
    assert listed(cliques.maximal_cliques(problem_of(graph))) == expected


def test_maximal_cliques_agree_with_networkx_on_time_windows_with_cleared_pairs() -> None:
    """The graph that the benchmark times, at a smaller size."""
    problem = windows(400, 12, 40, seed=3)
    graph = nx.Graph(zip(problem.low.tolist(), problem.high.tolist(), strict=True))
    expected = sorted(sorted(clique) for clique in nx.find_cliques(graph) if len(clique) > 1)
    assert listed(cliques.maximal_cliques(problem)) == expected


def test_more_cliques_than_wanted_are_refused() -> None:
    """A cocktail-party graph of 2k vertices has 2^k maximal cliques."""
    problem = problem_of(nx.complete_multipartite_graph(*[2] * 6))
    assert cliques.maximal_cliques(problem, most=64).count == 64
    with pytest.raises(cliques.TooManyCliquesError, match="more than 63"):
        cliques.maximal_cliques(problem, most=63)


def test_rows_built_by_numpy_hold_every_neighbour_in_order() -> None:
    """The baseline of the scale scenario builds the rows that it is compared on."""
    problem = windows(200, 10, 5, seed=2)
    graph = nx.Graph(zip(problem.low.tolist(), problem.high.tolist(), strict=True))
    graph.add_nodes_from(range(problem.n))
    ptr, neighbours = problem.symmetric()
    for v in range(problem.n):
        assert neighbours[ptr[v] : ptr[v + 1]].tolist() == sorted(graph[v])


def test_a_shuffled_problem_is_the_same_graph_under_other_numbers() -> None:
    """Weight and neighbours' weights go with each vertex; edges come back in canonical order."""
    problem = windows(50, 8, 3, seed=4)
    weights = np.arange(problem.n)  # tells the vertices apart
    before = Problem(problem.n, problem.low, problem.high, weights)
    after = before.shuffled(seed=1)
    old = after.weights
    pairs = {frozenset(pair) for pair in zip(old[after.low].tolist(), old[after.high].tolist(), strict=True)}
    assert pairs == {frozenset(pair) for pair in zip(problem.low.tolist(), problem.high.tolist(), strict=True)}
    keys = after.low.astype(np.int64) * after.n + after.high
    assert (after.low < after.high).all()
    assert (np.diff(keys) > 0).all()
    assert old.tolist() != weights.tolist()
