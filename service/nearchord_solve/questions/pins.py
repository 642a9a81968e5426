"""Pins: vertices that must, or must never, be in an independent set."""

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.arrays import I64, U32
from nearchord_solve.errors import SolverError
from nearchord_solve.graph import Graph
from nearchord_solve.kernels import csr


@dataclass(frozen=True)
class Contradiction:
    """Pins that no independent set meets: a vertex pinned both ways (``one == other``) or two adjacent ones."""

    one: int
    other: int


@dataclass(frozen=True, eq=False)
class Rest:
    """What is left to decide: a graph on ``vertices`` (int64, ascending) and the vertices taken already."""

    graph: Graph
    weights: I64
    vertices: I64
    taken: I64
    taken_weight: int


def pin_array(field: str, pins: Iterable[int] | I64, n: int) -> I64:
    """Pins as an ascending int64 array without repetition; SolverError if one is no vertex."""
    try:
        pinned = np.unique(np.asarray(pins if isinstance(pins, np.ndarray) else list(pins)))
    except (TypeError, ValueError):
        raise SolverError(field, "must be a list of vertices") from None
    if pinned.size == 0:
        return np.empty(0, np.int64)
    if pinned.ndim != 1 or pinned.dtype.kind not in "iu":
        raise SolverError(field, "must be a list of vertices")
    outside = pinned[(pinned < 0) | (pinned >= n)]
    if outside.size:
        raise SolverError(field, f"vertex {outside[0]} is out of range for {n} vertices")
    return pinned.astype(np.int64)


def apply_pins(graph: Graph, weights: I64, must: I64, never: I64) -> Rest | Contradiction:
    """Remove ``never``, and ``must`` with its neighbours.  O(n + m) if there are pins, O(1) if not."""
    nothing = np.empty(0, np.int64)
    if not must.size and not never.size:
        return Rest(graph, weights, np.arange(graph.n), nothing, 0)
    both = np.intersect1d(must, never)
    if both.size:
        return Contradiction(int(both[0]), int(both[0]))
    gone = np.zeros(graph.n, bool)
    pinned = np.zeros(graph.n, bool)
    pinned[must] = True
    for v in must:
        row = graph.adj[graph.ptr[v] : graph.ptr[v + 1]]
        clash = row[pinned[row]]
        if clash.size:
            return Contradiction(int(v), int(clash[0]))
        gone[row] = True
    gone[must] = True
    gone[never] = True
    return keep_vertices(graph, weights, ~gone, must)


def keep_vertices(graph: Graph, weights: I64, stays: NDArray[np.bool_], taken: I64) -> Rest:
    """The graph on the vertices that stay (bool[n]), next to those taken; the same graph if all stay.  O(n + m)."""
    vertices = np.flatnonzero(stays)
    if vertices.size == graph.n:
        return Rest(graph, weights, vertices, taken, 0)
    index = np.full(graph.n, -1, np.int32)
    index[vertices] = np.arange(vertices.size, dtype=np.int32)
    ptr, adj = csr.induce(graph.ptr, graph.adj, index, vertices.size)
    left = weights[vertices]
    left.flags.writeable = False  # as all weights are: kernels are compiled for one kind of array
    return Rest(Graph.from_symmetric(ptr, adj), left, vertices, taken, int(weights[taken].sum()))


def lift(rest: Rest, chosen: U32) -> U32:
    """Vertices of the whole graph: the choice in the rest and the vertices taken before."""
    return np.sort(np.concatenate((rest.vertices[chosen], rest.taken))).astype(np.uint32)
