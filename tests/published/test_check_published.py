"""The checker against values from outside the project."""

from __future__ import annotations

from collections import Counter

import nearchord
import networkx as nx
from nearchord.checks.classes import splittance
from nearchord.checks.edges import Edges


def test_split_graphs_are_as_many_as_published() -> None:
    """Graphs of splittance 0 on 1 to 7 vertices: OEIS A048194 (split graphs), over Read and Wilson's atlas."""
    counts: Counter[int] = Counter()
    for source in nx.graph_atlas_g()[1:]:
        graph = nearchord.Graph.from_edges(len(source), [tuple(sorted(edge)) for edge in source.edges])
        counts[graph.n] += splittance(Edges(graph.n, *graph.edges())) == 0
    assert [counts[n] for n in range(1, 8)] == [1, 2, 4, 9, 21, 56, 164]
