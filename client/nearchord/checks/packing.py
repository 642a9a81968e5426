"""Lower bounds on the fill from chordless cycles with shares.

A set of fill edges makes every chordless cycle chordal, and a cycle on c vertices needs c - 3 chords for that: in a
triangulation of a polygon with c corners there are as many, and fewer leave a chordless cycle of four or more. Let
every cycle have a share of at least 0, so that for each pair of vertices the shares of the cycles of which it is a
possible chord add up to at most 1. Then the number of fill edges is at least the sum of share times (c - 3): each
fill edge counts at most once. Cycles that have no possible chord in common, directly or over others, need different
fill edges, so that the sum of each such group may be rounded up before they are added.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.checks.chordal import CycleCheck, check_known, pair_label
from nearchord.checks.classes import check_starts
from nearchord.checks.edges import Edges, Ints, Mask, Neighbours, pair_keys
from nearchord.errors import CheckFailed
from nearchord.graph import Graph

MOST_PAIRS = 50_000_000
"""Possible chords that may be looked at, which takes about 2 GiB; a packing with more is left unconfirmed."""


class TooLarge(Exception):
    """The packing has more possible chords than this check takes in."""


class Packing:
    """Cycles with shares, from the columns `packing_*` of an answer; their form is checked here, not their claims."""

    def __init__(self, graph: Graph, columns: Mapping[str, NDArray[Any]]) -> None:
        start, vertex, numerator, denominator = (
            columns.get(f"packing_{name}", np.zeros(0, np.int64)).astype(np.int64)
            for name in ("start", "vertex", "numerator", "denominator")
        )
        if not start.size:
            start = np.zeros(1, np.int64)
        check_known(graph, vertex, "a cycle of the packing")
        check_starts(start, vertex.size, "cycles of the packing")
        if not start.size - 1 == numerator.size == denominator.size:
            raise CheckFailed(f"the packing has {start.size - 1} cycles, but not as many shares")
        if bool((numerator < 0).any()) or bool((denominator < 1).any()):
            raise CheckFailed("a share of the packing is negative, or has a denominator below 1")
        self._graph = graph
        self.cycles = [vertex[a:b] for a, b in zip(start[:-1].tolist(), start[1:].tolist(), strict=True)]
        self._unit = math.lcm(*denominator.tolist())
        self._shares = [p * (self._unit // q) for p, q in zip(numerator.tolist(), denominator.tolist(), strict=True)]

    def bound(self, edges: Edges) -> int:
        """How many fill edges the packing proves to be needed; CheckFailed where a cycle or a share is wrong.

        Time O(m + sum over the cycles of the degrees of their vertices + p log p), memory O(n + m + p), for p possible
        chords between vertices that lie in several cycles; TooLarge when these are more than MOST_PAIRS.
        """
        if not self.cycles:
            return 0
        self._check_cycles(edges)
        group = self._groups(*self._possible_chords())
        needs: dict[int, int] = {}
        for number, cycle in enumerate(self.cycles):
            root = group[number]
            needs[root] = needs.get(root, 0) + self._shares[number] * (len(cycle) - 3)
        return sum(-(-need // self._unit) for need in needs.values())

    def _check_cycles(self, edges: Edges) -> None:
        inside = np.zeros(edges.n, np.bool_)
        for cycle in self.cycles:
            inside[cycle] = True
        one = CycleCheck(self._graph, Neighbours(edges, inside))
        for number, cycle in enumerate(self.cycles):
            one.check(cycle, f"cycle {number} of the packing")
            if self._shares[number] > self._unit:
                raise CheckFailed(f"the share of cycle {number} of the packing is above 1")

    def _possible_chords(self) -> tuple[Ints, Ints]:
        """Keys of the possible chords that may lie in several cycles, and the cycle of each, ascending by key."""
        several = np.bincount(np.concatenate(self.cycles), minlength=self._graph.n) > 1
        self._check_size(several)
        found = [_chords(cycle, several[cycle]) for cycle in self.cycles]
        keys = np.concatenate(found)
        cycles = np.repeat(np.arange(len(found)), [part.size for part in found])
        order = np.argsort(keys, kind="stable")
        return keys[order], cycles[order]

    def _check_size(self, several: Mask) -> None:
        counts = [int(several[cycle].sum()) for cycle in self.cycles]
        if sum(count * (count - 1) // 2 for count in counts) > MOST_PAIRS:
            raise TooLarge

    def _groups(self, keys: Ints, cycles: Ints) -> list[int]:
        """For each cycle the lowest one of its group; CheckFailed where the shares on a pair exceed 1."""
        leader = list(range(len(self.cycles)))
        begins = np.flatnonzero(np.concatenate(([True], keys[1:] != keys[:-1]))) if keys.size else keys
        ends = np.concatenate((begins[1:], [keys.size]))[: begins.size]
        for a, b in zip(begins[ends - begins > 1].tolist(), ends[ends - begins > 1].tolist(), strict=True):
            sharing = cycles[a:b].tolist()
            if sum(self._shares[number] for number in sharing) > self._unit:
                raise CheckFailed(f"the pair {self._pair(int(keys[a]))} counts more than once in the packing")
            for number in sharing[1:]:
                one, other = _root(leader, sharing[0]), _root(leader, number)
                leader[max(one, other)] = min(one, other)
        return [_root(leader, number) for number in range(len(leader))]

    def _pair(self, key: int) -> str:
        return pair_label(self._graph, key >> 32, key & 0xFFFFFFFF)


def _chords(cycle: Ints, several: Mask) -> Ints:
    """Keys of the pairs of `several` vertices of a cycle that do not follow each other on it."""
    places = np.flatnonzero(several)
    i, j = (places[side] for side in np.triu_indices(places.size, 1))
    apart = (j - i != 1) & (j - i != len(cycle) - 1)
    return pair_keys(cycle[i[apart]], cycle[j[apart]])


def _root(leader: list[int], number: int) -> int:
    while leader[number] != number:
        leader[number] = number = leader[leader[number]]
    return number
