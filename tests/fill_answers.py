"""Answers to the question `fill` for small graphs with all their witnesses, found by trying everything."""

from __future__ import annotations

from itertools import combinations, pairwise, permutations
from typing import Any

import nearchord
import networkx as nx
import numpy as np
from nearchord.stages import WhenOver

Pair = tuple[int, int]


def fill_answer(graph: nearchord.Graph, **changes: Any) -> nearchord.Answer:
    """The least fill of a graph on at most six vertices, as a session would give it, with the given fields changed."""
    source = graph.to_networkx()
    source = nx.relabel_nodes(source, {node: number for number, node in enumerate(source)})
    order, fill = least_order(source)
    cycles = disjoint_cycles(source)
    bound = sum(len(cycle) - 3 for cycle in cycles)
    kind = nearchord.ProofKind.PACKING if bound == len(fill) else nearchord.ProofKind.SEARCH
    fields: dict[str, Any] = {
        "job_id": "f" * 32,
        "batch_index": 0,
        "label": "",
        "question": nearchord.Fill(),
        "verdict": nearchord.Verdict.PROVEN,
        "value": len(fill),
        "bound": len(fill),
        "chosen": np.zeros(0, np.uint32),
        "reason": "all cores are settled",
        "fill": len(fill),
        "fill_lower_bound": len(fill),
        "states": None,
        "bags": None,
        "largest_bag": None,
        "parts": 1,
        "fill_cores": 1 if fill else 0,
        "proof": nearchord.ProofKind.CERTIFICATE if kind != "search" else nearchord.ProofKind.SEARCH,
        "proof_kinds": (kind,) if fill else (),
        "seconds": 0.5,
        "vertices": graph.n,
        "names_address": "",
        "provenance": provenance(graph),
        "columns": columns(source, order, fill, cycles),
        "recognition": recognition(source),
    }
    return nearchord.Answer(**{**fields, **changes})


def provenance(graph: nearchord.Graph, fill: int | None = None) -> nearchord.Provenance:
    """An origin that fits the graph, under a fill budget."""
    budget = nearchord.Budget(fill=fill, states=1, seconds=1.0, memory=1)
    return nearchord.Provenance(graph.address, "", "1", 0, budget, WhenOver.BOUND, 1, (), 0.0, 0.0, 0, None)


def vertices(numbers: Any) -> np.ndarray:
    return np.array(list(numbers), np.uint32)


def cut(lists: Any) -> tuple[np.ndarray, np.ndarray]:
    """Starts and entries of lists."""
    starts = np.cumsum([0, *map(len, lists)]).astype(np.int64)
    return starts, vertices(v for one in lists for v in one)


def columns(source: nx.Graph, order: list[int], fill: list[Pair], cycles: list[list[int]]) -> dict[str, np.ndarray]:
    """Every column that the contract names for this graph."""
    found = {"fill_edge": vertices(v for pair in fill for v in pair), "elimination_order": vertices(order)}
    cycle = next(chordless_cycles(source), None)
    if cycle is not None:
        found["chordless_cycle"] = vertices(cycle)
    cliques = consecutive_cliques(source)
    if cliques is not None:
        found["clique_start"], found["clique_vertex"] = cut(cliques)
    clique = split_clique(source)
    if clique is not None:
        found["split_clique"] = vertices(clique)
    found["packing_ring"], found["packing_vertex"] = cut(cycles)
    found["packing_group"] = np.arange(found["packing_vertex"].size + 1)
    found["packing_numerator"] = found["packing_denominator"] = np.ones(len(cycles), np.int64)
    found["core_start"], found["core_vertex"] = cut([sorted(source)] if fill else [])
    return found


def recognition(source: nx.Graph) -> nearchord.Recognition:
    """The classes, from their definitions."""
    edits = least_edits(source)
    chordal = next(chordless_cycles(source), None) is None
    return nearchord.Recognition(chordal, consecutive_cliques(source) is not None, edits == 0, edits)


def least_order(source: nx.Graph) -> tuple[list[int], list[Pair]]:
    """An elimination order of least fill, and that fill."""
    best: tuple[list[int], list[Pair]] | None = None
    for order in permutations(source):
        fill = elimination_fill(source, order)
        if best is None or len(fill) < len(best[1]):
            best = list(order), fill
    assert best is not None
    return best


def elimination_fill(source: nx.Graph, order: Any) -> list[Pair]:
    """Pairs that are joined when the vertices are eliminated in turn."""
    left, fill = source.copy(), []
    for vertex in order:
        for pair in combinations(sorted(left[vertex]), 2):
            if not left.has_edge(*pair):
                left.add_edge(*pair)
                fill.append(pair)
        left.remove_node(vertex)
    return sorted(fill)


def is_chordless(source: nx.Graph, cycle: Any) -> bool:
    """Four or more different vertices, adjacent exactly when they follow each other."""
    c = len(cycle)
    return (
        c >= 4
        and len(set(cycle)) == c
        and all(source.has_edge(cycle[i], cycle[j]) == (j - i in (1, c - 1)) for i, j in combinations(range(c), 2))
    )


def chordless_cycles(source: nx.Graph) -> Any:
    """All of them, each once for its lowest vertex and one direction."""
    for c in range(4, len(source) + 1):
        for chosen in combinations(sorted(source), c):
            for rest in permutations(chosen[1:]):
                if rest[0] < rest[-1] and is_chordless(source, (chosen[0], *rest)):
                    yield [chosen[0], *rest]


def disjoint_cycles(source: nx.Graph) -> list[list[int]]:
    """Chordless cycles without a pair of vertices in common, taken as they come."""
    taken: set[Pair] = set()
    kept = []
    for cycle in chordless_cycles(source):
        pairs = set(combinations(sorted(cycle), 2))
        if not pairs & taken:
            taken |= pairs
            kept.append(cycle)
    return kept


def is_consecutive(cliques: Any) -> bool:
    """Each vertex lies in consecutive ones only."""
    members = {v for clique in cliques for v in clique}
    places = ([i for i, clique in enumerate(cliques) if v in clique] for v in members)
    return all(b == a + 1 for at in places for a, b in pairwise(at))


def consecutive_cliques(source: nx.Graph) -> list[list[int]] | None:
    """All maximal cliques in a consecutive order; None when there is no such order."""
    cliques = [sorted(clique) for clique in nx.find_cliques(source)]
    return next((list(order) for order in permutations(cliques) if is_consecutive(order)), None)


def split_clique(source: nx.Graph) -> list[int] | None:
    """A clique that leaves an independent set; None when there is none."""
    for size in range(len(source) + 1):
        for clique in combinations(sorted(source), size):
            outside = set(source) - set(clique)
            if all(source.has_edge(*pair) for pair in combinations(clique, 2)) and not source.subgraph(outside).edges:
                return list(clique)
    return None


def least_edits(source: nx.Graph) -> int:
    """Fewest edges to add and remove to make the graph split, over all choices of the clique."""
    costs = []
    for size in range(len(source) + 1):
        for clique in combinations(sorted(source), size):
            inside = source.subgraph(clique)
            outside = source.subgraph(set(source) - set(clique))
            costs.append(size * (size - 1) // 2 - inside.number_of_edges() + outside.number_of_edges())
    return min(costs)
