"""Bounds on the heaviest independent set, from a proof that splits the weights over cliques and trees of bags.

What the columns `proof_*` hold is in the contract (nearchord/v1/answer.proto, ColumnInfo). Why they prove a bound: an
independent set meets a clique at most once, so with weights y >= 0 the cliques give it at most the sum of y. In a bag
it is one of the independent subsets of the bag, which are all tried, together with the best of what hangs below for
the same choice in the adhesion; so a tree of bags gives it at most what its root comes to. A vertex weighs no more
than its cliques and bags count for it, hence no set more than all of them together.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.canonical import weight_sum
from nearchord.checks.classes import check_starts
from nearchord.checks.edges import Edges, Ints
from nearchord.checks.states import Bag, TooManyStates, best_by_adhesion
from nearchord.errors import CheckFailed

MOST_STATES = 20_000_000
MOST_PAIRS = 10**9
PAIRS_AT_ONCE = 1 << 21
TYPES = {
    "clique_start": np.int64,
    "clique_vertex": np.uint32,
    "clique_weight": np.int64,
    "bag_start": np.int64,
    "bag_vertex": np.uint32,
    "bag_adhesion": np.int64,
    "bag_above": np.int64,
    "home_weight": np.int64,
}


def has_splitting(columns: Mapping[str, NDArray[Any]]) -> bool:
    """Whether any column of such a proof is there."""
    return any(f"proof_{name}" in columns for name in TYPES)


class Splitting:
    """The proof in an answer's columns; its form is checked here, its claims by `bound`. CheckFailed for bad form."""

    def __init__(self, n: int, columns: Mapping[str, NDArray[Any]]) -> None:
        self._n = n
        for name, kind in TYPES.items():
            column = columns.get(f"proof_{name}")
            if column is None or column.ndim != 1 or column.dtype != kind:
                raise CheckFailed(f"the proof has no column proof_{name} of one dimension and type {np.dtype(kind)}")
        found = {name: columns[f"proof_{name}"].astype(np.int64) for name in TYPES}
        self._clique_start, self._clique, self._gain = (found[f"clique_{of}"] for of in ("start", "vertex", "weight"))
        self._bag_start, self._bag, self._adhesion, self._above = (
            found[f"bag_{of}"] for of in ("start", "vertex", "adhesion", "above")
        )
        self._home_weight = found["home_weight"]
        self._check_form()

    def _check_form(self) -> None:
        for vertices in (self._clique, self._bag):
            if vertices.size and int(vertices.max()) >= self._n:
                raise CheckFailed(f"the proof has vertex {int(vertices.max())}, but the graph has {self._n} vertices")
        check_starts(self._clique_start, self._clique.size, "cliques of the proof")
        check_starts(self._bag_start, self._bag.size, "bags of the proof")
        bags = self._bag_start.size - 1
        if self._gain.size != self._clique_start.size - 1:
            raise CheckFailed("the proof does not have one weight a clique")
        if self._adhesion.size != bags or self._above.size != bags:
            raise CheckFailed("the proof does not have one adhesion and one bag above for each bag")
        if bool((self._gain < 0).any()) or bool((self._home_weight < 0).any()):
            raise CheckFailed("the proof has a negative weight")
        sizes = np.diff(self._bag_start)
        if bool((self._adhesion < 0).any()) or bool((self._adhesion > sizes).any()):
            raise CheckFailed("an adhesion of the proof is not a part of its bag")
        if bool((self._above < -1).any()) or bool((self._above >= np.arange(bags)).any()):
            raise CheckFailed("a bag of the proof hangs from none that stands before it")
        if bool((self._adhesion[self._above < 0] > 0).any()):
            raise CheckFailed("a root of the proof has an adhesion")
        if self._home_weight.size != int((sizes - self._adhesion).sum()):
            raise CheckFailed("the proof does not have one weight a home")

    @property
    def summary(self) -> str:
        """What the proof consists of."""
        return f"{self._gain.size} cliques and {self._above.size} bags share the weights"

    def bound(self, edges: Edges, weights: Ints) -> int:
        """What no independent set of the graph outweighs; CheckFailed where the proof is wrong.

        `weights`: what each vertex must have of the proof, 0 where it cannot be chosen. Time O(n + p log m + states x
        size), where p pairs of vertices share a clique or a bag; TooManyStates above MOST_PAIRS or MOST_STATES.
        """
        self._check_shares(weights)
        for clique, _, _ in _gaps(edges, self._clique_start, self._clique):
            raise CheckFailed(f"clique {int(clique[0])} of the proof is not a clique of the graph")
        return weight_sum(self._gain) + self._bound_of_trees(edges)

    def _check_shares(self, weights: Ints) -> None:
        if weight_sum(self._gain) + weight_sum(self._home_weight) >= 2**63:
            raise CheckFailed("the weights of the proof exceed what weights of graphs can be")
        _check_distinct(self._clique_start, self._clique, "clique")
        _check_distinct(self._bag_start, self._bag, "bag")
        shares = np.zeros(self._n, np.int64)
        np.add.at(shares, self._clique, np.repeat(self._gain, np.diff(self._clique_start)))
        np.add.at(shares, self._bag[self._homes()], self._home_weight)
        short = np.flatnonzero(shares < weights)
        if short.size:
            v = int(short[0])
            raise CheckFailed(f"the proof covers {int(shares[v])} of the weight {int(weights[v])} of vertex {v}")

    def _homes(self) -> NDArray[np.bool_]:
        sizes = np.diff(self._bag_start)
        inside = np.arange(self._bag.size) - np.repeat(self._bag_start[:-1], sizes)
        homes: NDArray[np.bool_] = inside >= np.repeat(self._adhesion, sizes)
        return homes

    def _bound_of_trees(self, edges: Edges) -> int:
        """The sum over the roots; bags in falling order, so that what hangs from a bag is known before it."""
        free = self._free_pairs(edges)
        ends = np.concatenate(([0], np.cumsum(np.diff(self._bag_start) - self._adhesion)))
        below: dict[int, list[tuple[list[int], dict[tuple[int, ...], int]]]] = {}
        total, left = 0, MOST_STATES
        for b in range(self._above.size - 1, -1, -1):
            vertices = self._bag[self._bag_start[b] : self._bag_start[b + 1]].tolist()
            adhesion = vertices[: int(self._adhesion[b])]
            gains = [0] * len(adhesion) + self._home_weight[ends[b] : ends[b + 1]].tolist()
            bag = Bag(vertices, len(adhesion), gains, free.get(b, []), below.pop(b, []))
            table, used = best_by_adhesion(bag, left)
            left -= used
            above = int(self._above[b])
            if above < 0:
                total += table[()]
                continue
            outside = set(adhesion).difference(self._bag[self._bag_start[above] : self._bag_start[above + 1]].tolist())
            if outside:
                raise CheckFailed(f"bag {b} of the proof shares vertex {min(outside)} with bag {above}, which lacks it")
            below.setdefault(above, []).append((adhesion, table))
        return total

    def _free_pairs(self, edges: Edges) -> dict[int, list[tuple[int, int]]]:
        """For each bag the positions of two vertices that are not adjacent in the graph."""
        free: dict[int, list[tuple[int, int]]] = {}
        count = 0
        for bag, i, j in _gaps(edges, self._bag_start, self._bag):
            count += bag.size
            if count > MOST_STATES:  # each such pair is a state
                raise TooManyStates
            for b, one, other in zip(bag.tolist(), i.tolist(), j.tolist(), strict=True):
                free.setdefault(b, []).append((one, other))
        return free


def _check_distinct(start: Ints, vertex: Ints, what: str) -> None:
    number = np.repeat(np.arange(start.size - 1), np.diff(start))
    keys = np.sort(number << np.int64(32) | vertex)
    twice = np.flatnonzero(keys[1:] == keys[:-1])
    if twice.size:
        raise CheckFailed(f"{what} {int(keys[twice[0]]) >> 32} of the proof has a vertex twice")


def _gaps(edges: Edges, start: Ints, vertex: Ints) -> Iterator[tuple[Ints, Ints, Ints]]:
    """Pairs in one list that are not adjacent: (lists, positions, later positions), in pieces; none is empty."""
    sizes = np.diff(start)
    if int((sizes * (sizes - 1) // 2).sum()) > MOST_PAIRS:
        raise TooManyStates
    for size in np.unique(sizes[sizes > 1]).tolist():
        lists = np.flatnonzero(sizes == size)
        for i, j in _positions(size):
            step = max(1, PAIRS_AT_ONCE // max(1, i.size))
            for some in (lists[at : at + step] for at in range(0, lists.size, step)):
                begin = start[some][:, None]
                apart = ~edges.joined(vertex[begin + i].reshape(-1), vertex[begin + j].reshape(-1))
                if apart.any():
                    of, pair = np.divmod(np.flatnonzero(apart), i.size)
                    yield some[of], i[pair], j[pair]


def _positions(size: int) -> Iterator[tuple[Ints, Ints]]:
    """All pairs of positions i < j in a list, in pieces."""
    rows = max(1, PAIRS_AT_ONCE // size)
    for at in range(0, size, rows):
        i, j = np.divmod(np.arange(at * size, min(size, at + rows) * size), size)
        yield i[i < j], j[i < j]
