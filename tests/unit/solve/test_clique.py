"""Question clique: against all cliques of small graphs, mixed integer programs of larger ones, and published values."""

import networkx as nx
import numpy as np
import pytest
from definition import is_clique, largest_by_trial
from nearchord_solve import Budget, Clique, Graph, Monitor, Stop, Verdict, solve
from networkx.generators.atlas import graph_atlas_g


def run(question, n, edges, weights=None, budget=None, when_over="bound", monitor=None):  # type: ignore[no-untyped-def]
    """Solve with defaults."""
    array = None if weights is None else np.array(weights, np.int64)
    return solve(question, Graph.from_edges(n, edges), array, budget or Budget(), when_over, monitor or Monitor())


def random_case(rng, n):  # type: ignore[no-untyped-def]
    """A random graph of random density with weights, some of them 0."""
    upper = np.triu(rng.random((n, n)) < rng.random(), 1)
    edges = [(int(u), int(v)) for u, v in zip(*np.nonzero(upper), strict=True)]
    return edges, rng.integers(0, 9, n).tolist()


def test_every_atlas_graph_agrees_with_trial() -> None:
    rng = np.random.default_rng(5)
    for graph in graph_atlas_g()[1:]:
        n, edges = graph.number_of_nodes(), list(graph.edges)
        weights = rng.integers(0, 5, n).tolist()
        outcome = run(Clique(), n, edges, weights)
        assert (outcome.verdict, outcome.bound) == (Verdict.PROVEN, outcome.value)
        assert is_clique(edges, outcome.chosen.tolist())
        assert (
            sum(weights[v] for v in outcome.chosen) == outcome.value == largest_by_trial(n, edges, weights, is_clique)
        )


@pytest.mark.parametrize("n", [9, 10, 11, 12])
def test_random_graphs_with_pins_agree_with_trial(n: int) -> None:
    rng = np.random.default_rng(n)
    for _ in range(12):
        edges, weights = random_case(rng, n)
        must, never = [int(v) for v in rng.choice(n, 1)], [int(v) for v in rng.choice(n, 2, replace=False)]
        outcome = run(Clique(must=must, never=never), n, edges, weights)
        if set(must) & set(never):
            assert outcome.verdict is Verdict.INFEASIBLE
            continue
        best = largest_by_trial(n, edges, weights, is_clique, must, never)
        assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.PROVEN, best, best)
        assert is_clique(edges, outcome.chosen.tolist())
        assert set(must) <= set(outcome.chosen.tolist())
        assert not set(never) & set(outcome.chosen.tolist())


@pytest.mark.parametrize(
    ("graph", "number"),
    [
        (nx.petersen_graph(), 2),
        (nx.icosahedral_graph(), 3),
        (nx.octahedral_graph(), 3),
        (nx.mycielski_graph(5), 2),
        (nx.complement(nx.cycle_graph(11)), 5),
        (nx.complement(nx.petersen_graph()), 4),
    ],
)
def test_clique_numbers_of_named_graphs(graph: nx.Graph, number: int) -> None:
    """Common knowledge: independence number of the complement; Mycielski's graphs have no triangle."""
    plain = nx.convert_node_labels_to_integers(graph)
    assert run(Clique(), plain.number_of_nodes(), plain.edges).value == number


def test_larger_graphs_agree_with_enumeration() -> None:
    """networkx lists all maximal cliques."""
    rng = np.random.default_rng(3)
    for seed in range(8):
        graph = nx.gnp_random_graph(60, 0.3 + 0.05 * seed, seed=seed)
        weights = rng.integers(1, 1000, 60).tolist()
        best = max(sum(weights[v] for v in clique) for clique in nx.find_cliques(graph))
        outcome = run(Clique(), 60, graph.edges, weights)
        assert (outcome.verdict, outcome.value) == (Verdict.PROVEN, best)


def test_pins_without_an_edge_are_infeasible_and_named() -> None:
    outcome = run(Clique(must=(0, 2)), 4, [(0, 1), (1, 2), (2, 3)])
    assert outcome.verdict is Verdict.INFEASIBLE
    assert outcome.reason == (
        "the pins contradict each other: two vertices without an edge 0 and 2 both must be chosen"
    )


def test_clique_number_is_chromatic_number_on_chordal_graphs() -> None:
    """Chordal graphs are perfect: greedy colouring along a perfect elimination order needs no more colours."""
    path = nx.power(nx.path_graph(40), 4)
    colours = max(nx.greedy_color(path, strategy=lambda g, _: sorted(g)).values()) + 1
    assert run(Clique(), 40, path.edges).value == colours == 5


def test_state_budget_bounds_the_search() -> None:
    graph = nx.complement(nx.gnp_random_graph(70, 0.12, seed=2))
    outcome = run(Clique(), 70, graph.edges, budget=Budget(states=1))
    exact = run(Clique(), 70, graph.edges)
    assert exact.verdict is Verdict.PROVEN
    assert outcome.value <= exact.value <= outcome.bound
    assert outcome.verdict is Verdict.BOUNDED
    assert "state budget" in outcome.reason
    assert is_clique(graph.edges, outcome.chosen.tolist())


@pytest.mark.parametrize("budget", [Budget(memory=1), Budget(fill=0)])
def test_other_budgets_leave_a_valid_interval(budget: Budget) -> None:
    graph = nx.gnp_random_graph(40, 0.3, seed=4)
    outcome = run(Clique(), 40, graph.edges, budget=budget, when_over="stop")
    exact = run(Clique(), 40, graph.edges)
    if outcome.verdict is not Verdict.OVER_FILL:
        assert outcome.value <= exact.value <= outcome.bound


@pytest.mark.parametrize("stop", [Stop.SECONDS, Stop.CANCEL])
def test_a_stop_is_heeded(stop: Stop) -> None:
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = stop
    graph = nx.gnp_random_graph(40, 0.3, seed=4)
    outcome = run(Clique(), 40, graph.edges, monitor=monitor)
    if stop is Stop.CANCEL:
        assert (outcome.verdict, outcome.value) == (Verdict.CANCELLED, None)
    else:
        assert is_clique(graph.edges, outcome.chosen.tolist())
        assert outcome.value <= outcome.bound


def test_same_arguments_give_the_same_choice() -> None:
    graph = nx.gnp_random_graph(50, 0.5, seed=8)
    one, other = (run(Clique(), 50, graph.edges) for _ in range(2))
    assert one.chosen.tolist() == other.chosen.tolist()
