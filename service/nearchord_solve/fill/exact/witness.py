"""The packings behind a bound as columns, which anybody can check against the inequality in :mod:`.result`.

Rings are written as they are.  A checker may round up per cluster of rings that share a loaded pair; as the pieces of a
search share none, that proves no less than rounding up per piece.
"""

from collections.abc import Iterator, Sequence
from math import gcd

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.fill.exact.result import Packing, Ring
from nearchord_solve.fill.exact.whole import PartFill

MOST_PAIRS = 20_000_000  # of vertices in a ring, over all rings: what a checker can be expected to take in


def packing_columns(parts: Sequence[PartFill]) -> tuple[dict[str, U32 | I64], bool]:
    """Columns ``packing_*`` in vertices of the graph, and whether they hold the packings of all pieces.

    Packings are left out, from the first on that would exceed ``MOST_PAIRS``.
    """
    rings: list[Ring] = []
    shares: list[tuple[int, int]] = []
    pairs = 0
    complete = True
    for packing, names in _packings(parts):
        pairs += sum(size * (size - 1) // 2 for size in (sum(map(len, ring)) for ring in packing.rings))
        if pairs > MOST_PAIRS:
            complete = False
            break
        for ring, numerator in zip(packing.rings, packing.numerators, strict=True):
            common = gcd(numerator, packing.denominator)
            rings.append(tuple(tuple(names[v] for v in group) for group in ring))
            shares.append((numerator // common, packing.denominator // common))
    return _written(rings, shares), complete


def _packings(parts: Sequence[PartFill]) -> Iterator[tuple[Packing, list[int]]]:
    for part in parts:
        for piece in part.result.pieces if part.result else ():
            if piece.packing:
                yield piece.packing, part.vertices.tolist()


def _written(rings: Sequence[Ring], shares: Sequence[tuple[int, int]]) -> dict[str, U32 | I64]:
    groups = [group for ring in rings for group in ring]
    return {
        "packing_ring": np.cumsum([0, *map(len, rings)], dtype=np.int64),
        "packing_group": np.cumsum([0, *map(len, groups)], dtype=np.int64),
        "packing_vertex": np.array([v for group in groups for v in group], np.uint32),
        "packing_numerator": np.array([p for p, _ in shares], np.int64),
        "packing_denominator": np.array([q for _, q in shares], np.int64),
    }
