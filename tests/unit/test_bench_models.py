"""The programs that the benchmark gives to HiGHS have the right optima, or its ratios mean nothing."""

from __future__ import annotations

from itertools import combinations, product

import networkx as nx
import numpy as np
import pytest

highspy = pytest.importorskip("highspy")
from bench import cliques, cycles, models  # noqa: E402
from bench.problem import Problem  # noqa: E402

N = 8


def problem_of(graph: nx.Graph, seed: int) -> Problem:
    pairs = sorted((min(u, v), max(u, v)) for u, v in graph.edges)
    low, high = np.array(pairs, np.uint32).reshape(-1, 2).T
    return Problem(N, low, high, np.random.default_rng(seed).integers(1, 20, N))


def graph_of(seed: int) -> nx.Graph:
    graph = nx.gnp_random_graph(N, 0.3 + seed / 40, seed=seed)
    graph.add_edge(0, 1)  # a graph without edges has no groups to state
    return graph


def optimum(model: models.Model) -> int:
    """Best value over all 0-1 vectors, by looking at each."""
    columns = model.cost.size
    points = np.array(list(product((0, 1), repeat=columns)), np.int64)
    row = np.repeat(np.arange(model.rows), np.diff(model.ptr))
    matrix = np.zeros((model.rows, columns), np.int64)
    np.add.at(matrix, (row, model.index), model.value)
    sums = points @ matrix.T
    values = points[((sums >= model.lower) & (sums <= model.upper)).all(1)] @ model.cost
    return int(values.max() if model.maximise else values.min())


def heaviest(graph: nx.Graph, weights: np.ndarray, feasible) -> int:  # type: ignore[no-untyped-def]
    """Weight of the heaviest vertex set that is feasible, by looking at each."""
    sets = (set(part) for size in range(N + 1) for part in combinations(range(N), size))
    return max(int(weights[list(part)].sum()) for part in sets if feasible(graph.subgraph(part)))


def two_colours(part: nx.Graph) -> bool:
    return bool(nx.is_bipartite(part))


@pytest.mark.parametrize("seed", range(12))
def test_choices_among_groups_have_the_optimum_of_the_definition(seed: int) -> None:
    """Independent sets over edges and over cliques, the heaviest clique, and two colours."""
    graph = graph_of(seed)
    problem = problem_of(graph, seed)
    groups = cliques.maximal_cliques(problem)
    alone = heaviest(graph, problem.weights, lambda part: part.number_of_edges() == 0)
    assert optimum(models.independent_set(problem.weights, groups)) == alone
    assert optimum(models.independent_set(problem.weights, cliques.edges(problem))) == alone
    together = max(int(problem.weights[list(found)].sum()) for found in nx.find_cliques(graph) if len(found) > 1)
    assert max(models.clique(problem.weights, groups).cost) == together
    assert optimum(models.colour_classes(problem.weights, groups, 2)) == heaviest(graph, problem.weights, two_colours)


@pytest.mark.parametrize("seed", range(12))
def test_cutting_off_cycles_leads_to_the_heaviest_forest(seed: int) -> None:
    """The way the benchmark goes: solve, cut off the cycles in the choice, solve again."""
    from bench import general

    graph = graph_of(seed)
    problem = problem_of(graph, seed)
    model = models.forest(problem.weights, cliques.maximal_cliques(problem))
    run = general.run("HiGHS", model, 1, 60.0, cycles.neighbours(problem))
    assert run.proven
    assert run.value == heaviest(graph, problem.weights, lambda part: part.number_of_nodes() == 0 or nx.is_forest(part))


@pytest.mark.parametrize("seed", range(3))
def test_the_colouring_program_needs_as_many_colours_as_the_graph(seed: int) -> None:
    """Chromatic numbers by looking at every assignment of at most four colours."""
    from bench import general

    graph = graph_of(seed)
    problem = problem_of(graph, seed)
    groups = cliques.maximal_cliques(problem)
    model = models.colouring(N, groups, int(np.diff(groups.ptr).max()) + 1)
    run = general.run("HiGHS", model, 1, 60.0)
    fewest = next(
        q for q in range(1, N + 1)
        if any(all(c[u] != c[v] for u, v in graph.edges) for c in product(range(q), repeat=N))
    )  # fmt: skip
    assert run.proven
    assert run.value == fewest
