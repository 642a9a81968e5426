"""Rings of groups of vertices: their form, and whether a graph has the edges that they say."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.checks.chordal import check_known, pair_label
from nearchord.checks.classes import check_starts
from nearchord.checks.edges import Edges, Ints, Mask, Neighbours
from nearchord.errors import CheckFailed
from nearchord.graph import Graph


@dataclass(frozen=True)
class Ring:
    """`vertices` int64, group after group around the ring; `group` int64, the group of each, ascending from 0; `sizes`
    int64, the vertices of each group; `open_side` bool, whether group i and the next one are apart."""

    vertices: Ints
    group: Ints
    sizes: Ints
    open_side: Mask

    @property
    def needs(self) -> int:
        """The right side of its inequality: (c - 3) (1 - open sides)."""
        return (len(self.sizes) - 3) * (1 - int(self.open_side.sum()))

    def terms(self, kept: Mask) -> tuple[Ints, Ints, Ints, Mask]:
        """Ends of the pairs of kept vertices in its inequality, the pairs between their groups, and which lie on open
        sides."""
        places = np.flatnonzero(kept)
        i, j = (places[side] for side in np.triu_indices(places.size, 1))
        one, other = self.group[i], self.group[j]
        c = len(self.sizes)
        wraps = (one == 0) & (other == c - 1)
        side = (other - one == 1) | wraps
        opened = side & self.open_side[np.where(wraps, c - 1, one)]
        counts = (one != other) & (~side | opened)
        pairs = self.sizes[one] * self.sizes[other]
        return self.vertices[i[counts]], self.vertices[j[counts]], pairs[counts], opened[counts]


class RingCheck:
    """Checks many rings against one graph, O(neighbours of its vertices) each."""

    def __init__(self, graph: Graph, edges: Edges, inside: Mask) -> None:
        self._graph, self._neighbours = graph, Neighbours(edges, inside)
        self._group_of = np.full(graph.n, -1, np.int64)

    def ring(self, vertices: Ints, sizes: Ints, what: str) -> Ring:
        """The ring; CheckFailed unless it has four or more groups without a common vertex, groups that do not follow
        each other have no edge between them, and groups that do have all or none."""
        c = len(sizes)
        if c < 4:
            raise CheckFailed(f"{what} has {c} groups, where it takes four")
        if np.unique(vertices).size != vertices.size:
            raise CheckFailed(f"{what} passes a vertex twice")
        group = np.repeat(np.arange(c), sizes)
        self._group_of[vertices] = group
        here, neighbour = self._neighbours.around(vertices)
        there = self._group_of[neighbour]
        self._group_of[vertices] = -1
        step = (there - group[here]) % c
        chord = np.flatnonzero((there >= 0) & (step > 1) & (step < c - 1))
        if chord.size:
            pair = pair_label(self._graph, int(vertices[here[chord[0]]]), int(neighbour[chord[0]]))
            raise CheckFailed(f"{what} has the chord {pair}")
        joined = np.bincount(group[here[(there >= 0) & (step == 1)]], minlength=c)
        partly = np.flatnonzero((joined > 0) & (joined < sizes * np.roll(sizes, -1)))
        if partly.size:
            raise CheckFailed(f"group {int(partly[0])} of {what} is neither joined to the next one nor apart from it")
        return Ring(vertices, group, sizes, joined == 0)


class Rings:
    """Rings with shares, from columns of an answer; their form is checked here, not what they say about the graph.

    `shares`: numerator and denominator of each ring; `vertex` int64, the vertices of all rings, one after the other.
    """

    def __init__(self, graph: Graph, columns: Mapping[str, NDArray[Any]], prefix: str, what: str) -> None:
        ring, group, vertex, numerator, denominator = (
            columns.get(f"{prefix}_{name}", np.zeros(0, np.int64)).astype(np.int64)
            for name in ("ring", "group", "vertex", "numerator", "denominator")
        )
        ring, group = (start if start.size else np.zeros(1, np.int64) for start in (ring, group))
        check_known(graph, vertex, f"a ring of {what}")
        check_starts(group, vertex.size, f"groups of {what}")
        check_starts(ring, group.size - 1, f"rings of {what}")
        if not ring.size - 1 == numerator.size == denominator.size:
            raise CheckFailed(f"{what} has {ring.size - 1} rings, but not as many shares")
        if bool((numerator < 0).any()) or bool((denominator < 1).any()):
            raise CheckFailed(f"a share of {what} is negative, or has a denominator below 1")
        self._graph, self._what = graph, what
        self._ring, self._group = ring, group
        self.vertex = vertex
        self.shares: list[tuple[int, int]] = list(zip(numerator.tolist(), denominator.tolist(), strict=True))

    def sizes(self) -> Ints:
        """How many vertices each ring has."""
        found: Ints = np.diff(self._group[self._ring])
        return found

    def read(self, edges: Edges) -> list[Ring]:
        """All rings; CheckFailed where one is none of this graph. O(m + sum of the degrees of their vertices)."""
        inside = np.zeros(edges.n, np.bool_)
        inside[self.vertex] = True
        one = RingCheck(self._graph, edges, inside)
        found = []
        for number in range(len(self.shares)):
            cuts = self._group[self._ring[number] : self._ring[number + 1] + 1]
            what = f"ring {number} of {self._what}"
            found.append(one.ring(self.vertex[cuts[0] : cuts[-1]], np.diff(cuts), what))
        return found
