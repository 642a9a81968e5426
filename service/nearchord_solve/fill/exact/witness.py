"""The packings and trees behind a bound as columns, which anybody can check against the inequality in :mod:`.result`.

Rings are written as they are.  A checker may round up per cluster of rings that share a loaded pair; as the pieces of a
search share none, that proves no less than rounding up per piece.  A tree of cases is written depth first, each node
before what is below it, the case that has the pair before the case that has not; so it needs no pointers.  No pair
without an edge lies in two pieces, so what the trees and packings prove adds up.
"""

from collections.abc import Iterable, Iterator, Sequence

import numpy as np

from nearchord_solve.arrays import I32, I64, U32
from nearchord_solve.fill.exact.ragged import starts
from nearchord_solve.fill.exact.result import Branch, Packing
from nearchord_solve.fill.exact.whole import PartFill

MOST_PAIRS = 20_000_000  # of vertices in a ring, over all rings: what a checker can be expected to take in


MOST_TREE_PAIRS = 2_000_000  # the same over all leaves of all trees, and of decisions on the ways to them

Columns = dict[str, U32 | I64]


def proof_columns(parts: Sequence[PartFill]) -> tuple[Columns, bool]:
    """Columns ``packing_*`` and ``branch_*`` in vertices of the graph, and whether they hold the proofs of all pieces.

    Proofs are left out, from the first on that would exceed ``MOST_PAIRS`` or ``MOST_TREE_PAIRS``.
    """
    pieces = [(piece, part.vertices) for part in parts for piece in (part.result.pieces if part.result else ())]
    packings = [(piece.packing, names) for piece, names in pieces if piece.packing is not None]
    trees = [(list(_depth_first(piece.tree)), names) for piece, names in pieces if piece.tree]
    kept = _fitting([_pairs(packing) for packing, _ in packings], MOST_PAIRS)
    kept_trees = _fitting([_terms(tree) for tree, _ in trees], MOST_TREE_PAIRS)
    columns = {**joined_packings(packings[:kept], "packing"), **_joined_trees(trees[:kept_trees])}
    return columns, kept == len(packings) and kept_trees == len(trees)


def _fitting(sizes: Sequence[int], most: int) -> int:
    """How many of the first ones are at most so large together."""
    return int(np.count_nonzero(np.cumsum(sizes, dtype=np.int64) <= most))


def _depth_first(tree: Sequence[Branch]) -> Iterator[Branch]:
    """The nodes in the order in which they are written."""
    waiting = [0]
    while waiting:
        node = tree[waiting.pop()]
        yield node
        if node.pair is not None:
            waiting += [node.forbidden, node.added]


def _joined_trees(trees: Sequence[tuple[Sequence[Branch], I32]]) -> Columns:
    """Trees one after the other, no columns without any; each comes with the vertices that its numbers stand for."""
    if not trees:
        return {}
    pairs = [
        np.zeros(2, np.int64) if node.pair is None else np.sort(names[list(node.pair)])
        for tree, names in trees
        for node in tree
    ]
    leaves = [(node.packing, names) for tree, names in trees for node in tree if node.packing is not None]
    return {
        "branch_tree": starts(np.array([len(tree) for tree, _ in trees], np.int64)),
        "branch_pair": joined(pairs).astype(np.uint32),
        "branch_leaf": starts(np.array([packing.numerators.size for packing, _ in leaves], np.int64)),
        **joined_packings(leaves, "branch"),
    }


def joined_packings(packings: Sequence[tuple[Packing, I32]], prefix: str) -> Columns:
    """Packings one after the other; each comes with the vertices of the graph that its numbers stand for."""
    numerators = joined(packing.numerators for packing, _ in packings)
    denominators = joined(np.full(packing.numerators.size, packing.denominator) for packing, _ in packings)
    common = np.gcd(numerators, denominators)
    return {
        f"{prefix}_ring": starts(joined(np.diff(packing.ring) for packing, _ in packings)),
        f"{prefix}_group": starts(joined(np.diff(packing.group) for packing, _ in packings)),
        f"{prefix}_vertex": joined(names[packing.vertex] for packing, names in packings).astype(np.uint32),
        f"{prefix}_numerator": numerators // common,
        f"{prefix}_denominator": denominators // common,
    }


def joined(arrays: Iterable[I64 | I32]) -> I64:
    """One array of all, int64."""
    return np.concatenate([np.empty(0, np.int64), *arrays])


def _pairs(packing: Packing) -> int:
    """Pairs of vertices in the same ring."""
    sizes = np.diff(packing.group[packing.ring])
    return int((sizes * (sizes - 1) // 2).sum())


def _terms(tree: Sequence[Branch]) -> int:
    """What a checker looks at: pairs in rings, and decisions on the ways to the leaves, of which no more than nodes."""
    leaves = [node.packing for node in tree if node.packing is not None]
    return sum(_pairs(packing) for packing in leaves) + len(leaves) * len(tree)
