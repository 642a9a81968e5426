"""Graphs to and from networkx, which only this module imports, and only when called."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from nearchord.errors import BadInput
from nearchord.graph import Graph

if TYPE_CHECKING:
    from networkx import Graph as NetworkxGraph


def from_networkx(graph: NetworkxGraph, weight: str | None) -> Graph:
    """See `Graph.from_networkx`. Directions are ignored; repeated edges (both directions, or parallel) are BadInput."""
    number = {node: i for i, node in enumerate(graph.nodes)}
    _check_simple(graph)
    ends = np.fromiter((number[end] for u, v in graph.edges() for end in (u, v)), np.int64)
    names = [str(node) for node in number]
    return Graph.from_arrays(len(names), ends[0::2], ends[1::2], _weights(graph, weight), names)


def _check_simple(graph: NetworkxGraph) -> None:
    """BadInput naming the nodes of a self-loop or of a repeated edge."""
    seen: set[frozenset[Any]] = set()
    may_repeat = graph.is_directed() or graph.is_multigraph()
    for u, v in graph.edges():
        if u == v:
            raise BadInput(f"the edge ({u!r}, {v!r}) is a self-loop", "leave it out: no vertex excludes itself")
        if may_repeat and frozenset((u, v)) in seen:
            raise BadInput(f"the edge ({u!r}, {v!r}) is repeated", "convert it first: networkx.Graph(graph)")
        if may_repeat:
            seen.add(frozenset((u, v)))


def _weights(graph: NetworkxGraph, weight: str | None) -> list[Any] | None:
    if weight is None:
        return None
    given = graph.nodes(data=weight)
    if all(value is None for _, value in given):
        return None
    return [1 if value is None else value for _, value in given]


def to_networkx(graph: Graph, weight: str) -> NetworkxGraph:
    """See `Graph.to_networkx`."""
    try:
        import networkx
    except ImportError:
        raise BadInput("networkx is not installed", 'install it: pip install "nearchord[cli]"') from None
    nodes: list[Any] = list(graph.names) if graph.names is not None else list(range(graph.n))
    result = networkx.Graph()
    weights = None if graph.weights is None else graph.weights.tolist()
    result.add_nodes_from(nodes if weights is None else ((v, {weight: w}) for v, w in zip(nodes, weights, strict=True)))
    u, v = graph.edges()
    result.add_edges_from((nodes[a], nodes[b]) for a, b in zip(u.tolist(), v.tolist(), strict=True))
    return result
