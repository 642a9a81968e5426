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

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction

from nearchord_solve.arrays import I32
from nearchord_solve.fill.exact.core import Pair

Group = tuple[int, ...]
Ring = tuple[Group, ...]


class ProofKind(StrEnum):
    """How a lower bound is known, the most checkable first."""

    PACKING = "packing"
    BRANCH = "branch"
    SEARCH = "search"
    NONE = "none"


@dataclass(frozen=True)
class Packing:
    """Rings with multipliers ``numerators[i] / denominator``."""

    rings: tuple[Ring, ...]
    numerators: tuple[int, ...]
    denominator: int


@dataclass(frozen=True)
class Branch:
    """A case distinction: in each node the pair is in the fill (node ``added``) or not (node ``forbidden``).

    ``pair`` is None in a leaf, which has ``packing``: the bound under the decisions on the way reaches the claim.
    """

    pair: Pair | None
    added: int
    forbidden: int
    packing: Packing | None


@dataclass(frozen=True)
class PieceProof:
    """The bound of one atom of a part.

    ``bound`` fill edges are needed among pairs of ``vertices``; no non-edge lies in two pieces, so bounds add up.
    ``packing`` for kind PACKING; ``tree`` for kind BRANCH, its root first.
    """

    kind: ProofKind
    vertices: tuple[int, ...]
    bound: int
    packing: Packing | None = None
    tree: tuple[Branch, ...] = ()


@dataclass(frozen=True)
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


def loads(packing: Packing, neighbours: Sequence[frozenset[int]]) -> tuple[Fraction, dict[Pair, Fraction]]:
    """Constant term and load of each pair of a packing, straight from the definition above.

    Raises ValueError where a ring is not what it should be.
    """
    constant = Fraction(0)
    load: dict[Pair, Fraction] = {}
    for ring, numerator in zip(packing.rings, packing.numerators, strict=True):
        c = len(ring)
        y = Fraction(numerator, packing.denominator)
        if c < 4 or numerator < 0 or len({v for group in ring for v in group}) != sum(map(len, ring)):
            raise ValueError(f"not a ring of disjoint groups with a multiplier: {ring}")
        open_sides = 0
        for i in range(c):
            for j in range(i + 1, c):
                side = j == i + 1 or (i == 0 and j == c - 1)
                pairs = [(min(u, v), max(u, v)) for u in ring[i] for v in ring[j]]
                edges = sum(v in neighbours[u] for u, v in pairs)
                if side and edges == len(pairs):
                    continue
                if edges:
                    raise ValueError(f"groups {i} and {j} of {ring} are neither joined nor apart")
                open_sides += side
                share = y / len(pairs) * (-(c - 3) if side else 1)
                for pair in pairs:
                    load[pair] = load.get(pair, Fraction(0)) + share
        constant += y * (c - 3) * (1 - open_sides)
    return constant, load


def packing_bound(
    packing: Packing,
    neighbours: Sequence[frozenset[int]],
    added: frozenset[Pair] = frozenset(),
    forbidden: frozenset[Pair] = frozenset(),
) -> int:
    """The bound of a packing, given decisions about some pairs.  ``neighbours[v]`` are those in the graph."""
    value, load = loads(packing, neighbours)
    for pair, total in load.items():
        if pair not in added and pair not in forbidden:
            value -= max(Fraction(0), total - 1)
    for pair in added:
        value += 1 - load.get(pair, Fraction(0))
    return -((-value.numerator) // value.denominator)
