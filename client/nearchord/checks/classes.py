"""Witnesses that a graph is an interval graph, and that it is split.

**Intervals.** Take a list of vertex sets in which every vertex stands, in consecutive ones only: the interval of a
vertex runs from the first set that has it to the last. Two intervals meet exactly when both vertices are in one set.
So the graph is the overlap graph of these intervals if the ends of every edge meet and as many pairs meet as there
are edges; its sets are then cliques, and every clique lies in one of them, because intervals that meet pairwise have
a point in common. A set is contained in another one, and hence in one beside it, exactly when no interval begins or
none ends in it.

**Splittance.** P. L. Hammer and B. Simeone, The splittance of a graph, Combinatorica 1 (1981) 275-284: with degrees
d_1 >= d_2 >= ... and p the largest i with d_i >= i - 1, the fewest edges to add and remove to make a graph split are
half of p (p - 1) + sum of d_i over i > p - sum of d_i over i <= p.
"""

from __future__ import annotations

import numpy as np

from nearchord.checks.chordal import check_known, pair_label
from nearchord.checks.edges import Edges, Ints
from nearchord.errors import CheckFailed
from nearchord.graph import Graph


def check_cliques(graph: Graph, edges: Edges, start: Ints, vertex: Ints) -> None:
    """Raises CheckFailed unless `vertex[start[i] : start[i + 1]]` are all maximal cliques, each vertex in consecutive
    ones. O(m + c log c) for c entries of `vertex`."""
    check_known(graph, vertex, "a clique")
    check_starts(start, vertex.size, "cliques")
    first, last = _spans(graph, np.repeat(np.arange(start.size - 1), np.diff(start)), vertex)
    apart = np.flatnonzero(np.maximum(first[edges.u], first[edges.v]) > np.minimum(last[edges.u], last[edges.v]))
    if apart.size:
        edge = pair_label(graph, int(edges.u[apart[0]]), int(edges.v[apart[0]]))
        raise CheckFailed(f"the edge {edge} lies in none of the cliques")
    meeting = _pairs_that_meet(first, last)
    if meeting != edges.u.size:
        raise CheckFailed(f"the cliques hold {meeting} pairs, but the graph has {edges.u.size} edges")
    cliques = np.arange(start.size - 1)
    spare = np.flatnonzero(~(np.isin(cliques, first) & np.isin(cliques, last)))
    if spare.size:
        raise CheckFailed(f"clique {int(spare[0])} lies inside another one")


def check_starts(start: Ints, entries: int, what: str) -> None:
    """Raises CheckFailed unless `start` cuts so many entries into lists that are not empty."""
    if not start.size or int(start[0]) != 0 or int(start[-1]) != entries or bool((np.diff(start) <= 0).any()):
        raise CheckFailed(f"the {what} are not cut into lists: their starts do not ascend from 0 to {entries}")


def _spans(graph: Graph, clique: Ints, vertex: Ints) -> tuple[Ints, Ints]:
    """First and last clique of each vertex."""
    order = np.lexsort((clique, vertex))
    vertex, clique = vertex[order], clique[order]
    same = vertex[1:] == vertex[:-1]
    skip = np.flatnonzero(same & (clique[1:] != clique[:-1] + 1))
    if skip.size:
        raise CheckFailed(f"the cliques that have vertex {graph.label(int(vertex[skip[0]]))} are not consecutive")
    opens = np.flatnonzero(np.concatenate((np.ones(min(1, vertex.size), np.bool_), ~same)))
    absent = np.flatnonzero(np.bincount(vertex, minlength=graph.n) == 0)
    if absent.size:
        raise CheckFailed(f"vertex {graph.label(int(absent[0]))} is in none of the cliques")
    closes = np.concatenate((opens[1:], [vertex.size])) - 1 if opens.size else opens
    return clique[opens], clique[closes]


def _pairs_that_meet(first: Ints, last: Ints) -> int:
    """How many pairs of intervals meet: those that begin together, and those that begin within another one."""
    if not first.size:
        return 0
    begins = np.bincount(first)
    up_to = np.cumsum(begins)
    within = int((up_to[np.minimum(last, begins.size - 1)] - up_to[first]).sum())
    return within + int((begins * (begins - 1) // 2).sum())


def splittance(edges: Edges) -> int:
    """Fewest edges to add and remove to make the graph split (statement at the top). O(m + n log n)."""
    degrees = np.sort(edges.degrees())[::-1]
    p = int((degrees >= np.arange(edges.n)).sum())
    return (p * (p - 1) + int(degrees[p:].sum()) - int(degrees[:p].sum())) // 2


def check_split(graph: Graph, edges: Edges, clique: Ints) -> None:
    """Raises CheckFailed unless `clique` is a clique and the other vertices have no edge among them. O(n + m)."""
    check_known(graph, clique, "the clique of the partition")
    inside = np.zeros(graph.n, np.bool_)
    inside[clique] = True
    size = int(inside.sum())
    held = int((inside[edges.u] & inside[edges.v]).sum())
    if size != clique.size or held != size * (size - 1) // 2:
        raise CheckFailed(f"the {clique.size} vertices of the partition's clique are not pairwise adjacent")
    outside = np.flatnonzero(~inside[edges.u] & ~inside[edges.v])
    if outside.size:
        edge = pair_label(graph, int(edges.u[outside[0]]), int(edges.v[outside[0]]))
        raise CheckFailed(f"the edge {edge} lies outside the partition's clique")
