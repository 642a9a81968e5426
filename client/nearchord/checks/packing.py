"""Lower bounds on the fill from rings of vertex groups with shares.

A *ring* is a cyclic sequence of c >= 4 groups of vertices, no vertex in two of them. Groups that do not follow each
other have no edge between them. Of groups A, B that do, either every vertex of A is adjacent to every one of B, or none
is: then the side between them is *open*. Let F be a set of fill edges, and x(e) = 1 for pairs e in F and 0 for others.

One vertex of each group, in turn, gives c corners of a polygon. Its sides are edges, or pairs on open sides. If F has
all of the latter, the polygon is a cycle of the filled graph, which has no chordless cycle, so that chords of F cut it
into triangles; that takes c - 3, and none is an edge of the graph. Let p be the number of open sides, and D those of
its chords and P those of its open pairs that F has. Then

    D - (c - 3) P  >=  (c - 3) (1 - p)

holds: for P = p it says D >= c - 3, and for P <= p - 1 its left side is at least - (c - 3) (p - 1). Take the mean over
all polygons of the ring. A pair between groups A and B is in one of |A| |B| of them, which gives it the coefficient
1 / (|A| |B|) as a chord, -(c - 3) / (|A| |B|) on an open side. Multiply by the share y >= 0 of the ring and add up all
rings; the *load* L(e) is the sum of the coefficients of e. So the sum of L(e) over e in F is at least

    N = sum over the rings of y (c - 3) (1 - p),

and as each e in F counts 1 = L(e) + (1 - L(e)), where 1 - L(e) >= - max(0, L(e) - 1) and pairs outside F only lower
the right side further,

    |F|  >=  N - sum over all pairs e of max(0, L(e) - 1).

Rings that have no pair with a coefficient in common, directly or over others, speak of different pairs. Each such
cluster bounds the part of F on its own pairs, a whole number that is not negative, so each bound is rounded up before
they are added.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.checks.edges import Edges, Ints, Mask, pair_keys
from nearchord.checks.rings import Ring, Rings
from nearchord.graph import Graph

MOST_PAIRS = 20_000_000
"""Pairs that may be looked at, which takes about 2 GiB; a packing with more is left unconfirmed."""
MOST_BITS = 1 << 14
"""Of the least common denominator of all shares."""


class TooLarge(Exception):
    """The rings have more pairs than this check takes in."""


@dataclass(frozen=True)
class _Loads:
    """Coefficients of pairs, ascending by `keys`: of the ring `rings[i]`, worth `values[what[i]]`, in units."""

    keys: Ints
    rings: Ints
    what: Ints
    values: list[int]


class Packing:
    """Rings with shares, from the columns `packing_*` of an answer; their form is checked here, not their claims."""

    def __init__(self, graph: Graph, columns: Mapping[str, NDArray[Any]]) -> None:
        self._found = Rings(graph, columns, "packing", "the packing")
        self._shares = self._found.shares

    def bound(self, edges: Edges) -> int:
        """How many fill edges the packing proves to be needed; CheckFailed where a ring is none of this graph."""
        return self.bound_beside(edges, np.zeros(edges.n, np.bool_))[0]

    def bound_beside(self, edges: Edges, others: Mask) -> tuple[int, Ints]:
        """The same, and the keys of those pairs of the rings that have both ends in `others`, and perhaps of more.

        Time O(m + sum over the rings of the degrees of their vertices + p log p), memory O(n + m + p), for p pairs of
        vertices that lie in several rings or in others; TooLarge when these are more than MOST_PAIRS.
        """
        if not self._shares:
            return 0, np.zeros(0, np.int64)
        rings = self._found.read(edges)
        kept = self._kept(rings, others)
        loads, unit = self._loads(rings, kept)
        cluster, excess = self._clusters(loads, unit)
        needs: dict[int, int] = {}
        for number, (ring, (p, q)) in enumerate(zip(rings, self._shares, strict=True)):
            home = cluster[number]
            needs[home] = needs.get(home, 0) + ring.needs * p * (unit // q) - excess[number]
        return sum(max(0, -(-need // unit)) for need in needs.values()), np.unique(loads.keys)

    def _kept(self, rings: list[Ring], others: Mask) -> list[Mask]:
        """Of each ring the vertices whose pairs matter: a pair in one ring of a share up to 1 has a load up to 1, and
        is common to no others."""
        several = (np.bincount(self._found.vertex, minlength=others.size) > 1) | others
        kept = [
            several[ring.vertices] if p <= q else np.ones(ring.vertices.size, np.bool_)
            for ring, (p, q) in zip(rings, self._shares, strict=True)
        ]
        if sum(count * (count - 1) // 2 for count in (int(mask.sum()) for mask in kept)) > MOST_PAIRS:
            raise TooLarge
        return kept

    def _loads(self, rings: list[Ring], kept: list[Mask]) -> tuple[_Loads, int]:
        """The coefficients of the pairs kept, and the unit in which they and the shares are whole."""
        keys, whose, what = [], [], []
        fractions: list[tuple[int, int]] = []
        for number, (ring, mask, (p, q)) in enumerate(zip(rings, kept, self._shares, strict=True)):
            u, v, pairs, opened = ring.terms(mask)
            kinds, which = np.unique(2 * pairs + opened, return_inverse=True)
            keys.append(pair_keys(u, v))
            whose.append(np.full(u.size, number))
            what.append(which.reshape(-1) + len(fractions))
            factors = (1, 3 - len(ring.sizes))
            fractions += [(p * factors[kind & 1], q * (kind >> 1)) for kind in kinds.tolist()]
        unit = math.lcm(*(q for _, q in self._shares), *{q for _, q in fractions})
        if unit.bit_length() > MOST_BITS:
            raise TooLarge
        order = np.argsort(np.concatenate(keys), kind="stable")
        sorted_keys, sorted_rings, sorted_what = (np.concatenate(parts)[order] for parts in (keys, whose, what))
        return _Loads(sorted_keys, sorted_rings, sorted_what, [p * (unit // q) for p, q in fractions]), unit

    def _clusters(self, loads: _Loads, unit: int) -> tuple[list[int], list[int]]:
        """For each ring the lowest one of its cluster; and what loads above 1 cost, at one of the rings they are of."""
        leader = list(range(len(self._shares)))
        excess = [0] * len(self._shares)
        heavy = np.array([p > q for p, q in self._shares])
        begins = np.flatnonzero(np.concatenate(([True], loads.keys[1:] != loads.keys[:-1])))[: loads.keys.size]
        ends = np.concatenate((begins[1:], [loads.keys.size]))[: begins.size]
        matters = (ends - begins > 1) | heavy[loads.rings[begins]]
        for a, b in zip(begins[matters].tolist(), ends[matters].tolist(), strict=True):
            sharing = loads.rings[a:b].tolist()
            excess[sharing[0]] += max(0, sum(loads.values[kind] for kind in loads.what[a:b].tolist()) - unit)
            for number in sharing[1:]:
                one, other = _root(leader, sharing[0]), _root(leader, number)
                leader[max(one, other)] = min(one, other)
        return [_root(leader, number) for number in range(len(leader))], excess


def _root(leader: list[int], number: int) -> int:
    while leader[number] != number:
        leader[number] = number = leader[leader[number]]
    return number
