"""The packings behind a bound as columns, which anybody can check against the inequality in :mod:`.result`.

Rings are written as they are.  A checker may round up per cluster of rings that share a loaded pair; as the pieces of a
search share none, that proves no less than rounding up per piece.
"""

from collections.abc import Iterable, Sequence

import numpy as np

from nearchord_solve.arrays import I32, I64, U32
from nearchord_solve.fill.exact.result import Packing
from nearchord_solve.fill.exact.whole import PartFill

MOST_PAIRS = 20_000_000  # of vertices in a ring, over all rings: what a checker can be expected to take in


def packing_columns(parts: Sequence[PartFill]) -> tuple[dict[str, U32 | I64], bool]:
    """Columns ``packing_*`` in vertices of the graph, and whether they hold the packings of all pieces.

    Packings are left out, from the first on that would exceed ``MOST_PAIRS``.
    """
    packings = [
        (piece.packing, part.vertices)
        for part in parts
        for piece in (part.result.pieces if part.result else ())
        if piece.packing is not None
    ]
    pairs = np.cumsum([_pairs(packing) for packing, _ in packings], dtype=np.int64)
    kept = int(np.count_nonzero(pairs <= MOST_PAIRS))
    return joined_packings(packings[:kept]), kept == len(packings)


def joined_packings(packings: Sequence[tuple[Packing, I32]]) -> dict[str, U32 | I64]:
    """Packings one after the other; each comes with the vertices of the graph that its numbers stand for."""
    numerators = joined(packing.numerators for packing, _ in packings)
    denominators = joined(np.full(packing.numerators.size, packing.denominator) for packing, _ in packings)
    common = np.gcd(numerators, denominators)
    return {
        "packing_ring": starts(joined(np.diff(packing.ring) for packing, _ in packings)),
        "packing_group": starts(joined(np.diff(packing.group) for packing, _ in packings)),
        "packing_vertex": joined(names[packing.vertex] for packing, names in packings).astype(np.uint32),
        "packing_numerator": numerators // common,
        "packing_denominator": denominators // common,
    }


def joined(arrays: Iterable[I64 | I32]) -> I64:
    """One array of all, int64."""
    return np.concatenate([np.empty(0, np.int64), *arrays])


def starts(sizes: I64) -> I64:
    """Where each of the lists of these sizes begins, and where the last one ends."""
    return np.concatenate((np.zeros(1, np.int64), np.cumsum(sizes)))


def _pairs(packing: Packing) -> int:
    """Pairs of vertices in the same ring."""
    sizes = np.diff(packing.group[packing.ring])
    return int((sizes * (sizes - 1) // 2).sum())
