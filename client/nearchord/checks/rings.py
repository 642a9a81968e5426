"""Rings of groups of vertices: their form, and whether a graph has the edges that they say."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from nearchord.checks.chordal import pair_label
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
