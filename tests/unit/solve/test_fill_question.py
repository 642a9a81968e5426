"""Question ``fill`` as a whole: every column is checked from its definition."""

from fractions import Fraction
from itertools import combinations, pairwise

import networkx as nx
import numpy as np
import pytest
from bench.generators import time_windows
from definition import least_fill, networkx_graph
from fill_proof import is_chordal, spare
from hypothesis import given, settings
from nearchord_solve import Budget, Fill, Graph, IndependentSet, Monitor, Outcome, Phase, Stop, Verdict, solve
from nearchord_solve import tree as tree_module
from strategies import Edges, chordal_graphs, graphs, near_chordal_graphs

RING = (7, [(i, i + 1) for i in range(6)] + [(0, 6)])


def asked(edges: Edges, fill: int | None = None, monitor: Monitor | None = None) -> Outcome:
    return solve(Fill(), Graph.from_edges(*edges), None, Budget(fill=fill), "bound", monitor or Monitor())


def pairs(outcome: Outcome) -> list[tuple[int, int]]:
    return [(int(u), int(v)) for u, v in outcome.columns["fill_edge"].reshape(-1, 2)]


def rows(outcome: Outcome, start: str, vertex: str) -> list[list[int]]:
    return [outcome.columns[vertex][a:b].tolist() for a, b in pairwise(outcome.columns[start])]


def confirm(graph: nx.Graph, outcome: Outcome) -> None:
    """Whatever the answer says about a graph."""
    fill = pairs(outcome)
    assert fill == sorted({(u, v) for u, v in fill if u < v})
    assert is_chordal(graph, fill)
    assert not spare(graph, fill)
    assert outcome.value == outcome.fill == len(fill)
    assert outcome.bound == outcome.fill_lower_bound <= outcome.value
    assert outcome.chosen is None
    confirm_order(graph, outcome)
    confirm_classes(graph, outcome)
    confirm_packing(graph, outcome)
    assert len(outcome.proof_kinds) == outcome.fill_cores == len(rows(outcome, "core_start", "core_vertex"))


def confirm_order(graph: nx.Graph, outcome: Outcome) -> None:
    """Later neighbours are pairwise adjacent in the filled graph."""
    filled = graph.copy()
    filled.add_edges_from(pairs(outcome))
    order = outcome.columns["elimination_order"].tolist()
    assert sorted(order) == list(graph.nodes)
    at = {v: i for i, v in enumerate(order)}
    for v in order:
        later = [u for u in filled[v] if at[u] > at[v]]
        assert all(filled.has_edge(a, b) for a, b in combinations(later, 2))


def confirm_classes(graph: nx.Graph, outcome: Outcome) -> None:
    """Chordal, interval, split: each with its witness."""
    found, columns = outcome.recognition, outcome.columns
    assert found.chordal == is_chordal(graph, [])
    if not found.chordal:
        ring = columns["chordless_cycle"].tolist()
        assert len(set(ring)) == len(ring) >= 4
        assert {frozenset(e) for e in graph.subgraph(ring).edges} == {
            frozenset(e) for e in zip(ring, ring[1:] + ring[:1], strict=True)
        }
        assert found.interval is False
    if found.interval:
        cliques = rows(outcome, "clique_start", "clique_vertex")
        assert {frozenset(c) for c in cliques} == {frozenset(c) for c in nx.find_cliques(graph)}
        for v in graph:
            at = [i for i, clique in enumerate(cliques) if v in clique]
            assert at == list(range(at[0], at[-1] + 1))
    assert found.split == (found.splittance == 0) == ("split_clique" in columns)
    if found.split:
        clique = columns["split_clique"].tolist()
        assert all(graph.has_edge(*pair) for pair in combinations(clique, 2))
        assert not graph.subgraph(set(graph) - set(clique)).edges


def confirm_packing(graph: nx.Graph, outcome: Outcome) -> None:
    """The bound of the rings core by core, from the inequality; a certificate reaches the bound of the answer."""
    cores = [set(core) for core in rows(outcome, "core_start", "core_vertex")]
    load: list[dict[frozenset[int], Fraction]] = [{} for _ in cores]
    value = [Fraction(0)] * len(cores)
    shares = zip(outcome.columns["packing_numerator"], outcome.columns["packing_denominator"], strict=True)
    for ring, (numerator, denominator) in zip(packing_rings(outcome), shares, strict=True):
        share, c, opened = Fraction(int(numerator), int(denominator)), len(ring), 0
        assert c >= 4
        (home,) = (i for i, core in enumerate(cores) if {v for group in ring for v in group} <= core)
        for i, j in combinations(range(c), 2):
            pairs = {frozenset((u, v)) for u in ring[i] for v in ring[j]}
            joined = {graph.has_edge(*pair) for pair in pairs}
            side = j - i in (1, c - 1)
            assert len(joined) == 1
            assert side or joined == {False}
            if joined == {False}:
                opened += side
                for pair in pairs:
                    part = share * (3 - c if side else 1) / len(pairs)
                    load[home][pair] = load[home].get(pair, Fraction(0)) + part
        value[home] += share * (c - 3) * (1 - opened)
    proven = [v - sum(max(Fraction(0), y - 1) for y in loads.values()) for v, loads in zip(value, load, strict=True)]
    total = sum(max(0, -(-v.numerator // v.denominator)) for v in proven)
    assert total <= outcome.fill_lower_bound
    assert total == outcome.fill_lower_bound or outcome.proof != "certificate" or "branch" in outcome.proof_kinds


def packing_rings(outcome: Outcome) -> list[list[list[int]]]:
    """Groups of vertices, ring by ring."""
    groups, ring = rows(outcome, "packing_group", "packing_vertex"), outcome.columns["packing_ring"].tolist()
    return [groups[a:b] for a, b in pairwise(ring)]


@settings(deadline=None)
@given(graphs())
def test_every_column_holds_what_it_says(edges: Edges) -> None:
    confirm(networkx_graph(*edges), asked(edges))


@settings(deadline=None)
@given(near_chordal_graphs(most=10))
def test_answer_is_the_least_fill(edges: Edges) -> None:
    """Against the dynamic program over elimination orders."""
    outcome = asked(edges)
    assert outcome.verdict is Verdict.PROVEN
    assert outcome.value == outcome.bound == least_fill(*edges)


@settings(deadline=None)
@given(chordal_graphs())
def test_chordal_graphs_need_nothing(edges: Edges) -> None:
    outcome = asked(edges, fill=0)
    assert (outcome.verdict, outcome.value, outcome.proof, outcome.fill_cores) == (Verdict.PROVEN, 0, "certificate", 0)
    assert outcome.reason == "the graph is chordal"


def test_budget_below_the_lower_bound_ends_over_fill_with_a_witness() -> None:
    """Whatever happens to jobs over budget: two rings of seven need four edges each."""
    two = (14, RING[1] + [(u + 7, v + 7) for u, v in RING[1]])
    for when_over in ("bound", "stop"):
        outcome = solve(Fill(), Graph.from_edges(*two), None, Budget(fill=7), when_over, Monitor())
        assert outcome.verdict is Verdict.OVER_FILL
        assert outcome.fill_lower_bound == 8
        assert sum(len(ring) - 3 for ring in packing_rings(outcome)) == 8
        assert outcome.reason.startswith("fill budget: at least 8 fill edges are needed, 7 are allowed")
    assert asked(two, fill=8).verdict is Verdict.PROVEN


def test_windows_with_cleared_pairs_are_proven_with_certificate() -> None:
    """The bound of the packing alone reaches the fill, core by core."""
    windows = time_windows(3000, 20.0, 150, 1)
    graph = Graph.from_canonical(windows.n, *windows.canonical())
    outcome = solve(Fill(), graph, None, Budget(), "bound", Monitor())
    assert (outcome.verdict, outcome.proof) == (Verdict.PROVEN, "certificate")
    assert outcome.value <= 150
    plain = nx.from_edgelist(zip(windows.low.tolist(), windows.high.tolist(), strict=True))
    confirm_packing(plain, outcome)
    assert is_chordal(plain, pairs(outcome))


def test_progress_shows_fill_and_bound_falling_together() -> None:
    """The monitor ends with what the answer says."""
    monitor = Monitor()
    outcome = asked(RING, monitor=monitor)
    cells = monitor.cells
    assert cells[Monitor.FILL] == cells[Monitor.INCUMBENT] == outcome.value == 4
    assert cells[Monitor.FILL_LOWER] == cells[Monitor.BOUND] == outcome.bound == 4


@pytest.mark.parametrize("phase", [Phase.READ, Phase.ORDER, Phase.FILL, Phase.TREE, Phase.IMPROVE])
@pytest.mark.parametrize("stop", [Stop.SECONDS, Stop.CANCEL])
def test_stops_leave_an_interval_or_nothing(phase: Phase, stop: Stop) -> None:
    """At every phase; what is known by then is confirmed."""
    entered: list[Phase] = []

    def stop_there(now: Phase) -> None:
        entered.append(now)
        if now is phase:
            monitor.cells[Monitor.STOP] = stop

    monitor = Monitor(on_phase=stop_there)
    grid = nx.convert_node_labels_to_integers(nx.grid_2d_graph(4, 4))
    outcome = asked((16, [(min(e), max(e)) for e in grid.edges]), monitor=monitor)
    assert phase in entered
    if stop is Stop.CANCEL:
        assert (outcome.verdict, outcome.value, dict(outcome.columns)) == (Verdict.CANCELLED, None, {})
    elif outcome.value is None:
        assert (outcome.verdict, outcome.bound) == (Verdict.BOUNDED, 0)
        assert "seconds ran out" in outcome.reason
    else:
        assert outcome.bound <= 18 <= outcome.value
        assert is_chordal(grid, pairs(outcome))
        confirm_order(grid, outcome)


def test_too_little_memory_leaves_nothing_known() -> None:
    outcome = solve(Fill(), Graph.from_edges(*RING), None, Budget(memory=1), "bound", Monitor())
    assert (outcome.verdict, outcome.value, outcome.bound, outcome.fill) == (Verdict.BOUNDED, None, 0, None)
    assert "memory budget" in outcome.reason


def test_parts_too_large_for_the_search_keep_the_fill_of_their_structure(monkeypatch: pytest.MonkeyPatch) -> None:
    """They do not fit into memory; the answer says that they were not searched."""
    monkeypatch.setattr("nearchord_solve.fill.exact.whole.search_bytes", lambda *_: 2**62)
    grid = nx.convert_node_labels_to_integers(nx.grid_2d_graph(3, 3))
    outcome = asked((9, [(min(e), max(e)) for e in grid.edges]))
    assert outcome.bound <= 5 <= outcome.value
    assert is_chordal(grid, pairs(outcome))
    if outcome.verdict is Verdict.BOUNDED:
        assert outcome.reason.startswith("some fill cores are too large to be searched")
        assert outcome.proof_kinds == ("none",)


def test_a_wrong_fill_is_never_answered(monkeypatch: pytest.MonkeyPatch) -> None:
    """The answer is confirmed by eliminating along its order."""
    found = tree_module.Structure.elimination_order
    monkeypatch.setattr(tree_module.Structure, "elimination_order", lambda self: np.roll(found(self), 3))
    with pytest.raises(AssertionError, match="fill found"):
        asked(RING)


def test_other_questions_are_not_disturbed() -> None:
    """A choice and its certificate."""
    outcome = solve(IndependentSet(), Graph.from_edges(*RING), None, Budget(), "bound", Monitor())
    assert outcome.chosen.size == 3
    assert all(name.startswith("proof_") for name in outcome.columns)
    assert outcome.recognition is None
