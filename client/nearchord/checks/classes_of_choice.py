"""Choices with an inner order: colours that differ along every edge, or no cycle."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from nearchord.errors import CheckFailed
from nearchord.graph import Graph


def check_colours(graph: Graph, chosen: NDArray[np.bool_], colour: NDArray[np.uint32], colours: int) -> str:
    """Every chosen vertex has a colour from 1 to `colours`, and no edge has the same at both ends. O(n + m)."""
    count = int(chosen.sum())
    if colour.size != count:
        raise CheckFailed(f"{count} vertices are chosen, but {colour.size} colours are given")
    if count and (int(colour.min()) < 1 or int(colour.max()) > colours):
        raise CheckFailed(f"a colour lies outside 1 to {colours}")
    given = np.zeros(graph.n, np.int64)
    given[chosen] = colour
    u, v = graph.edges()
    clash = np.flatnonzero((given[u] != 0) & (given[u] == given[v]))
    if clash.size:
        pair = f"{{{graph.label(int(u[clash[0]]))}, {graph.label(int(v[clash[0]]))}}}"
        raise CheckFailed(f"both ends of the edge {pair} have the colour {given[u[clash[0]]]}")
    return f"the {count} chosen vertices have {colours} colours that differ along every edge"


def check_forest(graph: Graph, chosen: NDArray[np.bool_]) -> str:
    """No cycle lies inside the chosen vertices. O(n + m log n)."""
    root = np.arange(graph.n).tolist()

    def find(v: int) -> int:
        while root[v] != v:
            root[v] = root[root[v]]
            v = root[v]
        return v

    u, v = graph.edges()
    inside = chosen[u] & chosen[v]
    for a, b in zip(u[inside].tolist(), v[inside].tolist(), strict=True):
        one, other = find(a), find(b)
        if one == other:
            raise CheckFailed(f"the chosen set has a cycle through the edge {{{graph.label(a)}, {graph.label(b)}}}")
        root[one] = other
    return f"no cycle lies inside the {int(chosen.sum())} chosen vertices"
