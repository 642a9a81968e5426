"""Certificates of upper bounds on the heaviest independent set: weight split over cliques and trees of bags.

A certificate holds cliques Q of G with weights y(Q) >= 0, and trees of bags (any vertex sets).  Each bag B but the
root of its tree has an adhesion A(B), a set of vertices that are both in B and in the bag above; its other vertices
are at home in B and have home weights.  A root has no adhesion.  For every vertex v the weights of the cliques with
v and the home weights of v add up to at least w(v).

Theorem.  From the leaves to the roots, let M(B, t), for each independent subset t of A(B), be the most that
(home weights of s) + (sum of M(C, s & A(C)) over the bags C below B) comes to over all independent sets s of G[B]
with s & A(B) = t.  No independent set weighs more than (sum of y) + (sum of M(R, empty) over the roots R).
Proof.  Let I be independent.  It meets each clique at most once, and y >= 0, so the cliques with vertices in I add up
to at most the sum of y.  For each bag put s = I & B: it is independent, so the definition gives
(home weights of I in B) + (sum of M(C, I & A(C)) below) <= M(B, I & A(B)), where I & A(C) = s & A(C) because A(C) lies
in B.  Added up over a tree, every M but the root's cancels.  Both parts together are at least w(I), since every v in I
has at least w(v) in them.

Nothing was assumed about how the bags cover the graph; whether the bound is good depends on it, whether it is
valid does not.  The tables M are not part of the certificate: whoever checks it computes them from G itself.

Tightness.  Outside fill cores the elimination lists are cliques of G and Frank's algorithm takes the weight off
by them (see :mod:`.sweep.kernels.passes`).  A core takes what its homes are still worth, and from each anchor a, one
of the vertices that it shares with what lies above it, M(empty) - M({a}): anchors are pairwise adjacent, so with these
weights the optimum of the core is M(empty), what it adds to the value.  A core without tables is covered by cliques.
So the certificate proves the bound of the sweep.
"""

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from nearchord_solve.arrays import I32, I64, U8, U32
from nearchord_solve.kernels import splitting
from nearchord_solve.kernels.layout import Cover
from nearchord_solve.structure import Structure


class Proof(Protocol):
    """Whatever proves a bound to a checker that knows the graph."""

    @property
    def bound(self) -> int:
        """What is proven."""

    def columns(self, vertices: I64) -> dict[str, U32 | I64]:
        """Columns of the answer; ``vertices`` int64: number of each vertex in the graph of the question."""


@dataclass(frozen=True, eq=False)
class Certificate:
    """Proves ``bound``.  Vertices are those of the graph that was solved.

    Clique k is ``clique_vertex[clique_start[k]:clique_start[k+1]]``; bag b likewise, its adhesion first, with
    ``bag_adhesion`` vertices, then the homes.  ``bag_above`` -1 for roots, else an earlier bag.  ``home_weight``: one
    for each home, in the order in which they stand in the bags.
    """

    bound: int
    clique_start: I64
    clique_vertex: U32
    clique_weight: I64
    bag_start: I64
    bag_vertex: U32
    bag_adhesion: I64
    bag_above: I64
    home_weight: I64

    def columns(self, vertices: I64) -> dict[str, U32 | I64]:
        """Columns of the answer; ``vertices`` int64: number of each vertex in the graph of the question."""
        return {
            "proof_clique_start": self.clique_start,
            "proof_clique_vertex": vertices[self.clique_vertex].astype(np.uint32),
            "proof_clique_weight": self.clique_weight,
            "proof_bag_start": self.bag_start,
            "proof_bag_vertex": vertices[self.bag_vertex].astype(np.uint32),
            "proof_bag_adhesion": self.bag_adhesion,
            "proof_bag_above": self.bag_above,
            "proof_home_weight": self.home_weight,
        }


def room_for_cover(homes: int, entries: int) -> Cover:
    """An empty cover with room for one clique a home and so many entries besides the homes."""
    return Cover(
        np.zeros(1, np.int64),
        np.zeros(homes + 1, np.int64),
        np.empty(homes + entries, np.int32),
        np.empty(homes, np.int64),
    )


def certify_cover(bound: int, order: I32, cover: Cover) -> Certificate:
    """The certificate of a bound by cliques alone."""
    count = int(cover.cliques[0])
    none = np.empty(0, np.int64)
    return Certificate(
        bound,
        cover.ptr[: count + 1],
        order[cover.place[: cover.ptr[count]]].astype(np.uint32),
        cover.weight[:count],
        np.zeros(1, np.int64), np.empty(0, np.uint32), none, none, none,
    )  # fmt: skip


def certify_sweep(
    bound: int, structure: Structure, weights: I64, fits: U8, residual: I64, share: I64, cover: Cover
) -> Certificate:
    """The certificate of the bound of a sweep; ``residual``, ``share``, ``cover`` as its inward pass left them.

    ``share`` is overwritten.  O(n + m) and what the bags of the cores hold.
    """
    numbering, forest = structure.numbering, structure.forest
    cliques, entries = splitting.count_split(numbering, residual, cover)
    start = np.zeros(cliques + 1, np.int64)
    place = np.empty(entries, np.int32)
    weight = np.empty(cliques, np.int64)
    need = weights[numbering.order]
    cliques, entries = splitting.split_weights(
        numbering, forest, fits, residual, share, cover, need, start, place, weight
    )
    vertex = numbering.order[place[:entries]].astype(np.uint32)
    return Certificate(bound, start, vertex, weight, *_bags(structure, fits, share))


def _bags(structure: Structure, fits: U8, share: I64) -> tuple[I64, U32, I64, I64, I64]:
    """Bags of the cores that have tables: (start, vertices, adhesions, bags above, home weights)."""
    forest = structure.forest
    kept = np.repeat(fits != 0, np.diff(forest.core_bag))
    sizes = np.diff(forest.bag_ptr)
    slot = forest.bag_slot[np.repeat(kept, sizes)]
    sizes = sizes[kept]
    number = np.cumsum(kept) - 1
    above = forest.bag_above[kept].astype(np.int64)
    above = np.where(above < 0, -1, number[above] if number.size else above)
    adhesion = np.where(above < 0, 0, forest.bag_adhesion[kept]).astype(np.int64)
    start = np.concatenate((np.zeros(1, np.int64), np.cumsum(sizes)))
    inside = np.arange(slot.size) - np.repeat(start[:-1], sizes)
    homes = inside >= np.repeat(adhesion, sizes)
    vertex = structure.numbering.order[forest.slot_place[slot]].astype(np.uint32)
    return start, vertex, adhesion, above, share[slot[homes]]
