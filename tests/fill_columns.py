"""Columns of fill proofs written down by hand, and small graphs to check them on."""

from __future__ import annotations

from itertools import combinations, permutations

import networkx as nx
import numpy as np
from fill_answers import cut
from nearchord import Graph
from nearchord.checks.edges import Edges


def atlas(most):
    """Every graph on one to `most` vertices."""
    for source in nx.graph_atlas_g()[1:]:
        if source.number_of_nodes() > most:
            break
        yield source


def ours(source):
    return Graph.from_edges(source.number_of_nodes(), [tuple(sorted(edge)) for edge in source.edges])


def edges_of(graph):
    return Edges(graph.n, *graph.edges())


def ints(values):
    return np.array(values, np.int64)


def branches(trees):
    """Columns of trees: a node is a pair, or a leaf with a list of rings and one with their shares (p, q)."""
    nodes = [node for tree in trees for node in tree]
    leaves = [node for node in nodes if isinstance(node[0], list)]
    found = [ring for leaf in leaves for ring in leaf[0]]
    shares = [share for leaf in leaves for share in leaf[1]]
    columns = rings(found, [p for p, _ in shares], [q for _, q in shares])
    return {
        "branch_tree": np.cumsum([0, *map(len, trees)]).astype(np.int64),
        "branch_pair": np.array([(0, 0) if isinstance(node[0], list) else node for node in nodes], np.uint32).ravel(),
        "branch_leaf": np.cumsum([0, *(len(leaf[0]) for leaf in leaves)]).astype(np.int64),
        **{name.replace("packing", "branch"): column for name, column in columns.items()},
    }


def packing(cycles, numerators=None, denominators=None):
    return rings([[[v] for v in cycle] for cycle in cycles], numerators, denominators)


def rings(found, numerators=None, denominators=None):
    group, vertex = cut([group for ring in found for group in ring])
    return {
        "packing_ring": np.cumsum([0, *map(len, found)]).astype(np.int64),
        "packing_group": group,
        "packing_vertex": vertex,
        "packing_numerator": ints(numerators or [1] * len(found)),
        "packing_denominator": ints(denominators or [1] * len(found)),
    }


def all_rings(source):
    """Rings of single vertices in which at most two sides are open, and what twins make of them."""
    for length in range(4, len(source) + 1):
        for corners in permutations(sorted(source), length):
            if corners[0] != min(corners) or corners[1] > corners[-1]:
                continue
            steps = [
                (j - i in (1, length - 1), source.has_edge(corners[i], corners[j]))
                for i, j in combinations(range(length), 2)
            ]
            if (False, True) in steps or steps.count((True, False)) > 2:
                continue
            yield [[v] for v in corners]
            groups = [[v] for v in corners]
            for v in set(source) - set(corners):
                at = [i for i, corner in enumerate(corners) if set(source[v]) - {corner} == set(source[corner]) - {v}]
                if at:
                    groups[at[0]].append(v)
            if any(len(group) > 1 for group in groups):
                yield groups
