"""Predicted states against counting them from the definitions."""

import os
from collections.abc import Iterator
from itertools import combinations, pairwise
from pathlib import Path

import nearchord
import networkx as nx
import numpy as np
import pytest
from definition import networkx_graph
from hypothesis import given, settings
from nearchord_solve import Budget, Graph, InducedForest, Monitor, Structure, solve
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, Forest
from nearchord_solve.outcome import Outcome
from nearchord_solve.structure import Structure as Built
from nearchord_solve.sweep.kernels.state_counts import colour_states, forest_states
from nearchord_solve.tree import build_structure
from strategies import Edges, arbitrary_graphs, graphs

MANY = 10**9
Sets = frozenset[int]


def built(edges: Edges) -> Built:
    structure = build_structure(Graph.from_edges(*edges), Budget(), Monitor())
    assert isinstance(structure, Built)
    return structure


def reported(edges: Edges, budget: Budget | None = None) -> Outcome:
    return solve(Structure(), Graph.from_edges(*edges), None, budget or Budget(), "bound", Monitor())


def bags(edges: Edges, structure: Built) -> list[Sets]:
    """Maximal cliques of the triangulation, by networkx."""
    filled = networkx_graph(*edges)
    filled.add_edges_from(structure.fill_edges().tolist())
    return [frozenset(clique) for clique in nx.find_cliques(filled)] if edges[0] else []


def independent_sets(graph: nx.Graph, vertices: list[int]) -> Iterator[Sets]:
    """All of them that are not empty."""
    for size in range(1, len(vertices) + 1):
        for chosen in combinations(vertices, size):
            if not any(graph.has_edge(u, v) for u, v in combinations(chosen, 2)):
                yield frozenset(chosen)


def families(graph: nx.Graph, bag: Sets, colours: int) -> int:
    """Sets of at most so many disjoint independent sets that are not empty."""
    if colours == 0:
        return 1
    count = 1
    for first in independent_sets(graph, sorted(bag)):
        lowest = min(first)
        count += families(graph, frozenset(v for v in bag if v > lowest) - first, colours - 1)
    return count


@settings(deadline=None)
@given(graphs())
def test_states_of_colour_classes_are_counted_exactly(edges: Edges) -> None:
    """Disjoint independent sets, names of colours not told apart; with up to two colours in bags with fill only."""
    graph, structure = networkx_graph(*edges), built(edges)
    forest = structure.forest
    vertices = structure.numbering.order[forest.slot_place[forest.bag_slot]].tolist()
    core_bags = [frozenset(vertices[a:b]) for a, b in pairwise(forest.bag_ptr.tolist())]
    for colours in (1, 2, 3):
        found = colour_states(forest, colours, MANY, Monitor().cells)
        tried = [bag for bag in core_bags if colours > 2 or any(not graph.has_edge(*p) for p in combinations(bag, 2))]
        assert found == sum(families(graph, bag, colours) for bag in tried)


@settings(deadline=None)
@given(graphs())
def test_states_of_colour_classes_are_no_fewer_than_in_all_maximal_cliques(edges: Edges) -> None:
    """Bags that lie in another one, where a core meets its surroundings, are swept too and counted."""
    graph, outcome = networkx_graph(*edges), reported(edges)
    all_bags = bags(edges, built(edges))
    full = [bag for bag in all_bags if any(not graph.has_edge(*p) for p in combinations(bag, 2))]
    predictions = {(p.question, p.colours): p for p in outcome.report.predictions}
    for colours in (2, 3):
        found = predictions["colourable-subgraph", colours]
        truth = sum(families(graph, bag, colours) for bag in (full if colours == 2 else all_bags))
        assert found.states == truth if colours == 2 or len(all_bags) == outcome.bags else found.states > truth
        assert found.fits
        assert not found.at_least


@settings(deadline=None)
@given(graphs())
def test_states_of_independent_sets_are_those_of_the_bags_with_fill(edges: Edges) -> None:
    """Bags without fill need no table."""
    graph, outcome = networkx_graph(*edges), reported(edges)
    full = [bag for bag in bags(edges, built(edges)) if any(not graph.has_edge(*p) for p in combinations(bag, 2))]
    assert outcome.report.predictions[0].states == sum(families(graph, bag, 1) for bag in full)
    assert outcome.report.predictions[0].states == outcome.states


class Connection:
    """A partition of vertices, growing."""

    def __init__(self, vertices: Sets) -> None:
        self.graph = nx.empty_graph(sorted(vertices))

    def join(self, group: Sets) -> bool:
        """Connect vertices outside; False if two of them are connected already: a cycle."""
        parts = [next(c for c in nx.connected_components(self.graph) if v in c) for v in group]
        if any(a is b or a == b for a, b in combinations(parts, 2)):
            return False
        self.graph.add_edges_from(zip(sorted(group), sorted(group)[1:], strict=False))
        return True

    def groups(self, inside: Sets) -> frozenset[Sets]:
        """What is connected, restricted."""
        return frozenset(frozenset(c & inside) for c in nx.connected_components(self.graph) if c & inside)


def reached(graph: nx.Graph, structure: Built) -> int:
    """States that the forest program over the bags with fill really has: sets, each with what may be below."""
    forest: Forest = structure.forest
    vertex = structure.numbering.order[forest.slot_place]
    count = 0
    sent: dict[int, dict[Sets, set[frozenset[Sets]]]] = {}
    for b in range(forest.bag_kind.size - 1, -1, -1):
        inside = vertex[forest.bag_slot[forest.bag_ptr[b] : forest.bag_ptr[b + 1]]].tolist()
        adhesion = frozenset(inside[: forest.bag_adhesion[b]])
        below = [c for c in np.flatnonzero(forest.bag_above == b).tolist() if forest.bag_kind[c] & ADHESION_FILL]
        sent[b] = {}
        for size in range(len(inside) + 1):
            for chosen in map(frozenset, combinations(inside, size)):
                if size and not nx.is_forest(graph.subgraph(chosen)):
                    continue
                outgoing = list(partitions(graph, chosen, adhesion, [(sent[c], c) for c in below], forest, vertex))
                count += len(outgoing) if forest.bag_kind[b] & BAG_FILL else 0
                sent[b].setdefault(chosen & adhesion, set()).update(outgoing)
    return count


def partitions(graph, chosen, adhesion, below, forest, vertex) -> Iterator[frozenset[Sets]]:
    """Partitions of the chosen part of the adhesion, for every way to connect it below."""
    ways = [()]
    for messages, child in below:
        end = forest.bag_ptr[child] + forest.bag_adhesion[child]
        shared = frozenset(vertex[forest.bag_slot[forest.bag_ptr[child] : end]].tolist())
        ways = [(*way, groups) for way in ways for groups in messages.get(chosen & shared, ())]
    for way in ways:
        whole, outside = Connection(chosen), Connection(chosen)
        whole.graph.add_edges_from(graph.subgraph(chosen).edges)
        outside.graph.add_edges_from((u, v) for u, v in graph.subgraph(chosen).edges if not {u, v} <= adhesion)
        groups = [group for one in way for group in one if len(group) > 1]
        if all(whole.join(group) for group in groups) and all(outside.join(group) for group in groups):
            yield outside.groups(adhesion)


@settings(deadline=None, max_examples=60)
@given(arbitrary_graphs(most=9))
def test_states_of_forests_are_counted_exactly(edges: Edges) -> None:
    """Sets of a bag, once for every way in which the bags below may connect them."""
    structure = built(edges)
    assert forests_of(structure) == reached(networkx_graph(*edges), structure)


def test_counting_forests_goes_on_when_there_are_more_joints_than_there_was_room_for() -> None:
    """The Groetzsch graph's next: nearly a thousand joints.  Against what the question itself goes through."""
    source = nx.mycielski_graph(5)
    graph = Graph.from_edges(source.number_of_nodes(), list(source.edges))
    structure = build_structure(graph, Budget(), Monitor())
    assert isinstance(structure, Built)
    outcome = solve(InducedForest(), graph, None, Budget(), "bound", Monitor())
    assert outcome.states // 2 <= forests_of(structure) <= 2 * outcome.states


def test_counting_forests_ends_where_the_joints_need_more_memory_than_there_is() -> None:
    """What was counted so far is said to be not all."""
    source = nx.mycielski_graph(5)
    structure = build_structure(Graph.from_edges(source.number_of_nodes(), list(source.edges)), Budget(), Monitor())
    assert isinstance(structure, Built)
    states, whole = forest_states(structure.forest, MANY, 20_000, Monitor().cells)
    assert not whole
    assert states < forests_of(structure)


def forests_of(structure: Built) -> int:
    states, whole = forest_states(structure.forest, MANY, MANY, Monitor().cells)
    assert whole
    return int(states)


SHARED = Path(os.environ.get("NEARCHORD_SHARED_DATA", Path(__file__).resolve().parents[3] / ".." / "shared" / "data"))
SMALL_BAGS = (
    "bn_alarm",
    "bn_hailfinder",
    "iot_grenoble_m3_d8",
    "iv_sat_ama_wallops_24h__del100",
    "snd_abilene_L2",
    "water_Net3",
    "zoo_Geant2012",
)


@pytest.mark.parametrize("name", SMALL_BAGS)
def test_states_on_real_graphs_are_counted_exactly(name: str) -> None:
    """Graphs whose fill cores have bags small enough to try all their sets."""
    path = SHARED / "graphs" / f"{name}.col"
    if not path.exists():
        if os.environ.get("CI") == "true":
            pytest.fail(f"{path} is not there")
        pytest.skip(f"{path} is not there; set NEARCHORD_SHARED_DATA to the folder that holds it")
    read = nearchord.Graph.read(path)
    low, high = read.edges()
    edges = (read.n, [(int(u), int(v)) for u, v in zip(low, high, strict=True)])
    graph, structure = networkx_graph(*edges), built(edges)
    assert forests_of(structure) == reached(graph, structure)
    predictions = {(p.question, p.colours): p.states for p in reported(edges).report.predictions}
    full = [bag for bag in bags(edges, structure) if any(not graph.has_edge(*pair) for pair in combinations(bag, 2))]
    assert predictions["colourable-subgraph", 2] == sum(families(graph, bag, 2) for bag in full)
    assert predictions["independent-set", 0] == sum(families(graph, bag, 1) for bag in full)


def test_counting_ends_above_the_budget() -> None:
    """The true number is that many or more."""
    ring = (30, [(i, i + 1) for i in range(29)] + [(0, 29)])
    budget = Budget(states=40)
    for prediction in reported(ring, budget).report.predictions:
        assert prediction.at_least
        assert prediction.states > budget.states
        assert not prediction.fits


def test_memory_above_the_budget_does_not_fit() -> None:
    """Though the states do."""
    ring = (30, [(i, i + 1) for i in range(29)] + [(0, 29)])
    predictions = reported(ring).report.predictions
    most = predictions[1].memory_bytes - 1
    limited = reported(ring, Budget(memory=most)).report.predictions
    assert [p.states for p in limited] == [p.states for p in predictions]
    assert not limited[1].fits
    assert predictions[1].fits


def test_cliques_are_counted_by_formula() -> None:
    """A path of cliques, with no fill at all: sum of C(b, i) with three colours, nothing to try otherwise."""
    chain = (7, [(u, v) for u, v in combinations(range(7), 2) if v - u <= 2])
    states = [p.states for p in reported(chain).report.predictions]
    assert states == [0, 0, 5 * 8, 0]


def test_components_and_cores_are_reported() -> None:
    """A square, a chorded ring, an edge and a vertex."""
    square = [(0, 1), (1, 2), (2, 3), (0, 3)]
    ring = [(4, 5), (5, 6), (6, 7), (7, 8), (4, 8)]
    outcome = reported((12, [*square, *ring, (9, 10)]))
    assert outcome.report.components == 4
    assert outcome.report.largest_core == 5
    assert outcome.fill_cores == 2
    ptr, vertex = outcome.columns["core_start"], outcome.columns["core_vertex"]
    found = sorted(vertex[a:b].tolist() for a, b in pairwise(ptr))
    assert found == [[0, 1, 2, 3], [4, 5, 6, 7, 8]]
