"""All maximal cliques of a sparse graph: what the general solvers are given as their best formulation.

Bron and Kerbosch (1973, Algorithm 457) with a pivot, started from each vertex in degeneracy order.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from bench.problem import Problem

Neighbours = list[set[int]]


class TooManyCliquesError(Exception):
    """The graph has more maximal cliques than the caller is ready to hold."""


@dataclass(frozen=True)
class Groups:
    """Sets of vertices of which at most one may be chosen: members ``index[ptr[i]:ptr[i+1]]``, int32 arrays."""

    ptr: NDArray[np.int32]
    index: NDArray[np.int32]

    @property
    def count(self) -> int:
        """Number of sets."""
        return self.ptr.size - 1


def edges(problem: Problem) -> Groups:
    """One group for each edge."""
    pairs = np.column_stack((problem.low, problem.high)).astype(np.int32)
    return Groups(np.arange(0, 2 * problem.m + 1, 2, dtype=np.int32), pairs.ravel())


def maximal_cliques(problem: Problem, most: int = 10**6) -> Groups:
    """One group for each maximal clique with two vertices or more; raises TooManyCliquesError beyond ``most``."""
    found: list[list[int]] = []
    for clique in _listed(_neighbours(problem)):
        if len(clique) > 1:
            found.append(clique)
        if len(found) > most:
            raise TooManyCliquesError(f"more than {most} maximal cliques")
    sizes = np.fromiter(map(len, found), np.int32, len(found))
    members = np.fromiter((v for clique in found for v in clique), np.int32, int(sizes.sum()))
    return Groups(np.concatenate(([0], np.cumsum(sizes))).astype(np.int32), members)


def _neighbours(problem: Problem) -> Neighbours:
    ptr, adjacent = problem.symmetric()
    listed = adjacent.tolist()
    bounds = ptr.tolist()
    return [set(listed[bounds[v] : bounds[v + 1]]) for v in range(problem.n)]


def _listed(neighbours: Neighbours) -> Iterator[list[int]]:
    done: set[int] = set()
    for v in _degeneracy_order(neighbours):
        yield from _extend([v], neighbours[v] - done, neighbours[v] & done, neighbours)
        done.add(v)


def _extend(clique: list[int], open_: set[int], closed: set[int], neighbours: Neighbours) -> Iterator[list[int]]:
    """Maximal cliques that hold ``clique``, add vertices of ``open_`` only, and cannot take one of ``closed``."""
    if not open_:
        if not closed:
            yield clique
        return
    pivot = max(open_ | closed, key=lambda u: len(neighbours[u] & open_))
    for v in open_ - neighbours[pivot]:
        near = neighbours[v]
        yield from _extend([*clique, v], open_ & near, closed & near, neighbours)
        open_.remove(v)
        closed.add(v)


def _degeneracy_order(neighbours: Neighbours) -> list[int]:
    """Repeatedly a vertex of least degree among those left; O(n + m)."""
    degree = [len(near) for near in neighbours]
    buckets: list[list[int]] = [[] for _ in range(max(degree, default=0) + 1)]
    for v, d in enumerate(degree):
        buckets[d].append(v)
    order: list[int] = []
    least = 0
    while len(order) < len(neighbours):
        if not buckets[least]:
            least += 1
            continue
        v = buckets[least].pop()
        if degree[v] != least:
            continue
        order.append(v)
        degree[v] = -1
        for u in neighbours[v]:
            if degree[u] > 0:
                degree[u] -= 1
                buckets[degree[u]].append(u)
        least = max(least - 1, 0)
    return order
