"""Lower bounds on the fill from trees that decide one pair at a time, with rings in every leaf.

Let F be a set of fill edges. At each node of a tree that is no leaf, a pair of vertices without an edge is *decided*:
below it come first the case that F has the pair, then the case that F never has it. So F goes with the decisions on
the way to exactly one leaf. Let that leaf have rings with shares (:mod:`.packing` states the inequality of a ring,
N and the loads L), and let A be the pairs that were decided to be in F on the way, B those that were decided not to be.
The sum of L(e) over e in F is at least N, and F has A and nothing of B. Each e of A counts 1 = L(e) + (1 - L(e)), each
other e of F counts at least L(e) - max(0, L(e) - 1); adding these up, where pairs outside F only lower the right side,

    |F|  >=  N + sum over e in A of (1 - L(e)) - sum over e neither in A nor in B of max(0, L(e) - 1),

and |F| is a whole number, so the right side is rounded up. Whichever leaf F goes with, |F| is at least the least of
these numbers. Only pairs that a tree decides, or that have a coefficient in one of its rings, were counted: the tree
bounds the part of F on these, its *pairs*. Trees with no pair in common, and a packing that has none with them, speak
of different parts of F, so their bounds add up. A tree with a pair of another one is refused.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.checks.chordal import check_known, pair_label
from nearchord.checks.classes import check_starts
from nearchord.checks.edges import Edges, Ints, Mask, pair_keys
from nearchord.checks.packing import MOST_BITS, TooLarge
from nearchord.checks.rings import Ring, Rings
from nearchord.errors import CheckFailed
from nearchord.graph import Graph

MOST_TERMS = 2_000_000
"""Pairs in all rings, and decisions on the ways to all leaves, that may be looked at: a few seconds."""

Decided = dict[int, bool]
"""Pairs by their key, and whether they are in the fill."""


class Branches:
    """Trees of cases, from the columns `branch_*` of an answer; their form is checked here, not their claims."""

    def __init__(self, graph: Graph, columns: Mapping[str, NDArray[Any]]) -> None:
        tree, pair, leaf = (
            columns.get(f"branch_{name}", np.zeros(0, np.int64)).astype(np.int64) for name in ("tree", "pair", "leaf")
        )
        tree, leaf = (start if start.size else np.zeros(1, np.int64) for start in (tree, leaf))
        if pair.size % 2:
            raise CheckFailed("the branch trees have a node with half a pair")
        check_known(graph, pair, "a branch tree")
        check_starts(tree, pair.size // 2, "nodes of the branch trees")
        self._rings = Rings(graph, columns, "branch", "the branch trees")
        count = len(self._rings.shares)
        if int(leaf[0]) != 0 or int(leaf[-1]) != count or bool((np.diff(leaf) < 0).any()):
            raise CheckFailed(f"the {count} rings of the branch trees are not dealt to leaves one after the other")
        u, v = pair.reshape(-1, 2).T
        inner = u != v
        if leaf.size - 1 != int((~inner).sum()):
            raise CheckFailed(f"the branch trees have {int((~inner).sum())} leaves, but rings for {leaf.size - 1}")
        self._graph = graph
        self._tree, self._leaf = tree, leaf
        self._u, self._v = u[inner], v[inner]
        self._inner, self._keys = inner.tolist(), pair_keys(u, v).tolist()

    def __len__(self) -> int:
        return self._tree.size - 1

    def vertices(self) -> Mask:
        """Vertices that the trees speak of."""
        found = np.zeros(self._graph.n, np.bool_)
        for some in (self._u, self._v, self._rings.vertex):
            found[some] = True
        return found

    def bound(self, edges: Edges, taken: Ints) -> int:
        """How many fill edges the trees prove to be needed; `taken`: keys of pairs that other proofs speak of.

        CheckFailed where a ring is none of this graph, a tree is no tree of cases, or a pair is spoken of twice;
        TooLarge above MOST_TERMS. Time O(m + sum over the rings of the degrees of their vertices + t log t), memory
        O(n + m + t), for t pairs in rings and decisions on the ways to leaves.
        """
        sizes = self._rings.sizes()
        if int((sizes * (sizes - 1) // 2).sum()) > MOST_TERMS:
            raise TooLarge
        self._check_pairs(edges)
        rings = self._rings.read(edges)
        total, terms, leaves = 0, 0, 0
        spoken = [taken]
        for number in range(len(self)):
            least: int | None = None
            pairs: set[int] = set()
            for decided in self._cases(number):
                terms += len(decided)
                if terms > MOST_TERMS:
                    raise TooLarge
                here = slice(int(self._leaf[leaves]), int(self._leaf[leaves + 1]))
                load, unit, needs = _summed(rings[here], self._rings.shares[here])
                reached = _leaf_bound(load, unit, needs, decided)
                least = reached if least is None else min(least, reached)
                pairs.update(load, decided)
                leaves += 1
            assert least is not None, "every tree has a leaf"
            total += max(0, least)
            spoken.append(np.fromiter(pairs, np.int64, len(pairs)))
        self._check_apart(np.concatenate(spoken))
        return total

    def _check_pairs(self, edges: Edges) -> None:
        """What is decided has to be a pair without an edge."""
        wrong = np.flatnonzero(edges.joined(self._u, self._v) | (self._u > self._v))
        if wrong.size:
            pair = pair_label(self._graph, int(self._u[wrong[0]]), int(self._v[wrong[0]]))
            raise CheckFailed(f"a branch tree decides {pair}, which is an edge or does not ascend")

    def _cases(self, number: int) -> Iterator[Decided]:
        """The decisions on the way to each leaf of a tree, in turn; always the same object."""
        decided: Decided = {}
        way: list[int] = []
        ended = False
        for node in range(int(self._tree[number]), int(self._tree[number + 1])):
            if ended:
                raise CheckFailed(f"branch tree {number} goes on after its last case")
            if self._inner[node]:
                key = self._keys[node]
                if key in decided:
                    raise CheckFailed(f"branch tree {number} decides {self._pair(key)} twice on the way to a leaf")
                decided[key] = True
                way.append(key)
                continue
            yield decided
            while way and not decided[way[-1]]:
                del decided[way.pop()]
            if way:
                decided[way[-1]] = False
            ended = not way
        if not ended:
            raise CheckFailed(f"branch tree {number} ends before its last case")

    def _check_apart(self, keys: Ints) -> None:
        keys = np.sort(keys)
        twice = np.flatnonzero(keys[1:] == keys[:-1])
        if twice.size:
            pair = self._pair(int(keys[twice[0]]))
            raise CheckFailed(f"two branch trees, or one and the packing, speak of the pair {pair}")

    def _pair(self, key: int) -> str:
        return pair_label(self._graph, key >> 32, key & 0xFFFFFFFF)


def _summed(rings: list[Ring], shares: list[tuple[int, int]]) -> tuple[dict[int, int], int, int]:
    """Loads of the pairs by key, the unit in which they are whole, and the constant term N in this unit."""
    terms = []
    for ring, (p, q) in zip(rings, shares, strict=True):
        u, v, pairs, opened = ring.terms(np.ones(ring.vertices.size, np.bool_))
        belows = [q * count for count in pairs.tolist()]
        terms.append((pair_keys(u, v).tolist(), belows, np.where(opened, 3 - len(ring.sizes), 1).tolist(), p))
    unit = math.lcm(*(q for _, q in shares), *{below for _, belows, _, _ in terms for below in belows})
    if unit.bit_length() > MOST_BITS:
        raise TooLarge
    load: dict[int, int] = {}
    for keys, belows, factors, p in terms:
        for key, below, factor in zip(keys, belows, factors, strict=True):
            load[key] = load.get(key, 0) + factor * p * (unit // below)
    needs = sum(ring.needs * p * (unit // q) for ring, (p, q) in zip(rings, shares, strict=True))
    return load, unit, needs


def _leaf_bound(load: dict[int, int], unit: int, needs: int, decided: Decided) -> int:
    """The right side of the inequality of a leaf, rounded up."""
    excess = sum(amount - unit for key, amount in load.items() if amount > unit and key not in decided)
    gained = sum(unit - load.get(key, 0) for key, filled in decided.items() if filled)
    return -((excess - needs - gained) // unit)
