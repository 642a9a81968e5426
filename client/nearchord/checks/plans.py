"""Plans that serve every vertex, from their definition: colours, and shares of independent sets.

Both are lists of what a vertex has: its colours, or the sets that it is in. A plan is right if no edge has the same
item at both ends, and if every vertex has enough.
"""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

import numpy as np

from nearchord.answer import Answer
from nearchord.canonical import weight_sum
from nearchord.checks.chordal import pair_label
from nearchord.checks.classes import check_starts
from nearchord.checks.columns import column_of
from nearchord.checks.edges import Ints
from nearchord.errors import CheckFailed
from nearchord.graph import Graph

ITEMS_AT_ONCE = 1 << 21


def check_colours_of_all(graph: Graph, answer: Answer, demand: Ints) -> str:
    """Words for colours that meet the definition: every vertex has as many as it demands, neighbours share none, and
    there are as many as the value says. O(n + m) with demands of 1; otherwise log of all demands for each colour of the
    end of an edge that has fewer."""
    colour = column_of(answer, "colour", np.uint32)
    if "colour_start" in answer.columns:
        start = column_of(answer, "colour_start", np.int64)
    else:
        start = np.arange(graph.n + 1)
    if start.size != graph.n + 1 or int(start[0]) != 0 or int(start[-1]) != colour.size:
        raise CheckFailed(f"the {colour.size} colours are not cut into one list for each of {graph.n} vertices")
    wrong = np.flatnonzero(np.diff(start) != demand)
    if wrong.size:
        v = int(wrong[0])
        raise CheckFailed(
            f"vertex {graph.label(v)} has {int(start[v + 1] - start[v])} colours, but demands {int(demand[v])}"
        )
    _check_numbers(graph, answer, start, colour)
    clash = clashing_edge(graph, start, colour)
    if clash is not None:
        raise CheckFailed(f"both ends of the edge {pair_label(graph, *clash[:2])} have the colour {clash[2]}")
    return f"{answer.value:,} colours serve all {graph.n:,} vertices, and no edge has one at both ends"


def _check_numbers(graph: Graph, answer: Answer, start: Ints, colour: Ints) -> None:
    """Colours ascend within a vertex, and 1 to the value are all used."""
    vertex = np.repeat(np.arange(graph.n), np.diff(start))
    falls = np.flatnonzero((vertex[1:] == vertex[:-1]) & (colour[1:] <= colour[:-1]))
    if falls.size:
        raise CheckFailed(f"the colours of vertex {graph.label(int(vertex[falls[0]]))} do not ascend")
    used = np.unique(colour)
    if used.size and int(used[0]) == 0:
        raise CheckFailed(f"vertex {graph.label(int(vertex[colour.argmin()]))} has the colour 0; they count from 1")
    if used.size != answer.value or (used.size and int(used[-1]) != answer.value):
        highest = int(used[-1]) if used.size else 0
        raise CheckFailed(f"the value is given as {answer.value}, but {used.size} colours up to {highest} are used")


def check_shares(graph: Graph, answer: Answer, demand: Ints) -> str:
    """Words for shares that meet the definition: independent sets whose shares add up to the value and to the demand of
    every vertex at least. O(m log) for each set of the end of an edge that is in fewer."""
    start, numerator, denominator = (
        column_of(answer, f"share_{name}", np.int64) for name in ("start", "numerator", "denominator")
    )
    vertex = column_of(answer, "share_vertex", np.uint32)
    check_starts(start, vertex.size, "shares")
    if numerator.size != start.size - 1 or bool((numerator <= 0).any()):
        raise CheckFailed("the shares do not have one number above 0 a set")
    if denominator.size != 1 or int(denominator[0]) < 1:
        raise CheckFailed("the shares do not have one denominator above 0")
    length = weight_sum(numerator)
    if Fraction(length, int(denominator[0])) != answer.value:
        raise CheckFailed(
            f"the value is given as {answer.value}, but the shares add up to {Fraction(length, int(denominator[0]))}"
        )
    if length >= 2**63:
        raise CheckFailed("the shares exceed what numbers of shares can be")
    _check_served(graph, demand, start, vertex, numerator, int(denominator[0]))
    return f"{numerator.size:,} independent sets have shares of {answer.value} that serve all {graph.n:,} vertices"


def _check_served(graph: Graph, demand: Ints, start: Ints, vertex: Ints, numerator: Ints, denominator: int) -> None:
    if vertex.size and int(vertex.max()) >= graph.n:
        raise CheckFailed(f"a share has vertex {int(vertex.max())}, but the graph has {graph.n} vertices")
    number = np.repeat(np.arange(start.size - 1), np.diff(start))
    falls = np.flatnonzero((number[1:] == number[:-1]) & (vertex[1:] <= vertex[:-1]))
    if falls.size:
        raise CheckFailed(f"the vertices of share {int(number[falls[0]])} do not ascend")
    served = np.zeros(graph.n, np.int64)
    np.add.at(served, vertex, numerator[number])
    short = np.flatnonzero(served // denominator < demand)
    if short.size:
        v = int(short[0])
        got = Fraction(int(served[v]), denominator)
        raise CheckFailed(f"vertex {graph.label(v)} is served for {got}, but demands {int(demand[v])}")
    order = np.argsort(vertex, kind="stable")
    lists = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.bincount(vertex, minlength=graph.n))))
    clash = clashing_edge(graph, lists, number[order])
    if clash is not None:
        raise CheckFailed(f"share {clash[2]} has both ends of the edge {pair_label(graph, *clash[:2])}")


def clashing_edge(graph: Graph, start: Ints, item: Ints) -> tuple[int, int, int] | None:
    """An edge with the same item at both ends, and the item; None if there is none. Vertex v has the items
    item[start[v] : start[v + 1]], ascending, from 0 to below 2^32."""
    u, v = graph.edges()
    sizes = np.diff(start)
    if bool((sizes <= 1).all()):
        alone = np.full(graph.n, -1, np.int64)
        alone[sizes == 1] = item
        same = np.flatnonzero((alone[u] == alone[v]) & (alone[u] >= 0))
        return (int(u[same[0]]), int(v[same[0]]), int(alone[u[same[0]]])) if same.size else None
    keys = np.repeat(np.arange(graph.n), sizes) << np.int64(32) | item
    fewer = np.where(sizes[u] <= sizes[v], u, v).astype(np.int64)
    other = u.astype(np.int64) + v - fewer
    for first, last in _pieces(sizes[fewer]):
        counts = sizes[fewer[first:last]]
        begin = np.cumsum(counts) - counts
        edge = np.repeat(np.arange(first, last), counts)
        mine = item[np.arange(int(counts.sum())) + np.repeat(start[fewer[first:last]] - begin, counts)]
        wanted = other[edge] << np.int64(32) | mine
        place = np.minimum(np.searchsorted(keys, wanted), keys.size - 1)
        same = np.flatnonzero(keys[place] == wanted) if keys.size else place
        if same.size:
            at = int(edge[same[0]])
            return int(u[at]), int(v[at]), int(mine[same[0]])
    return None


def _pieces(counts: Ints) -> Iterator[tuple[int, int]]:
    """Ranges of edges with about so many items as are looked at together."""
    ends = np.cumsum(counts)
    first = 0
    while first < counts.size:
        before = int(ends[first - 1]) if first else 0
        last = max(first + 1, int(np.searchsorted(ends, before + ITEMS_AT_ONCE, side="right")))
        yield first, last
        first = last
