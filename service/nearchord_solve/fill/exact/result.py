"""Answers of the exact search and what a checker needs to confirm them.

The inequality behind every bound.  Let G be the graph, F a fill, and take rings: cyclic sequences of c >= 4 disjoint
groups of vertices, with multipliers y >= 0.  All pairs between groups that do not follow each other in a ring are
non-edges of G (*chord pairs*); between groups that follow each other, either all pairs are edges of G, or all are
non-edges (an *open side*).  Choosing one vertex from each group gives a cycle of which F contains c - 3 chords if it
contains its open sides, so it satisfies

    sum of x over its chords - (c - 3) * sum of x over its open sides  >=  (c - 3) (1 - number of open sides)

for x = 1 on F and 0 elsewhere.  Averaged over all choices, a ring puts load y / (|A| |B|) on each chord pair between
groups A and B, and -(c - 3) y / (|A| |B|) on each pair of an open side.  With L(e) the sum of loads on e,

    |F|  >=  sum over rings of y (c - 3) (1 - open sides)  -  sum over e of max(0, L(e) - 1).

When pairs are known to be in F, such a pair contributes 1 - L(e) instead, and a pair known not to be in F
contributes nothing.  |F| is an integer, so the bound is rounded up.
"""

from dataclasses import dataclass
from enum import StrEnum

from nearchord_solve.arrays import I32, I64

Pair = tuple[int, int]


class ProofKind(StrEnum):
    """How a lower bound is known, the most checkable first."""

    PACKING = "packing"
    BRANCH = "branch"
    SEARCH = "search"
    NONE = "none"


@dataclass(frozen=True, eq=False)
class Packing:
    """Rings with multipliers ``numerators[i] / denominator``.

    The groups of ring i are those from ``ring[i]`` to ``ring[i+1] - 1``, the vertices of group g are
    ``vertex[group[g]:group[g+1]]``, ascending.  ``ring`` int64[r+1], ``group`` int64[g+1], ``vertex`` int32,
    ``numerators`` int64[r].
    """

    ring: I64
    group: I64
    vertex: I32
    numerators: I64
    denominator: int


@dataclass(frozen=True, eq=False)
class Branch:
    """A case distinction: in each node the pair is in the fill (node ``added``) or not (node ``forbidden``).

    ``pair`` is None in a leaf, which has ``packing``: the bound under the decisions on the way reaches the claim.
    """

    pair: Pair | None
    added: int
    forbidden: int
    packing: Packing | None


@dataclass(frozen=True, eq=False)
class PieceProof:
    """The bound of one atom of a part.

    ``bound`` fill edges are needed among pairs of ``vertices`` int32, ascending; no non-edge lies in two pieces, so
    bounds add up.
    ``packing`` for kind PACKING; ``tree`` for kind BRANCH, its root first.
    """

    kind: ProofKind
    vertices: I32
    bound: int
    packing: Packing | None = None
    tree: tuple[Branch, ...] = ()


@dataclass(frozen=True, eq=False)
class FillResult:
    """The fill of one part.

    ``edges`` int32[k, 2], smaller end first, sorted: a minimal fill, k = ``upper_bound``.  The fill number lies between
    ``lower_bound`` and ``upper_bound``; ``proof`` says how the lower bound is known if they meet (the weakest kind
    among the pieces), NONE otherwise.  ``over``: the fill number is certainly larger than the limit asked for.
    """

    edges: I32
    lower_bound: int
    upper_bound: int
    proof: ProofKind
    pieces: tuple[PieceProof, ...]
    over: bool
