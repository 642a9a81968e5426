"""Masks to bit rows and back: uint64[n, W] with W = ceil(n / 64); bit j of row i says that i and j are adjacent."""

from collections.abc import Sequence

import numpy as np

from nearchord_solve.arrays import U64
from nearchord_solve.fill.exact.core import Mask, Pair


def rows_of(adj: Sequence[Mask]) -> U64:
    """Bit rows of neighbour masks."""
    width = max(1, (len(adj) + 63) // 64)
    packed = b"".join(mask.to_bytes(8 * width, "little") for mask in adj)
    return np.frombuffer(packed, np.dtype("<u8")).astype(np.uint64).reshape(len(adj), width)


def masks_of(rows: U64) -> list[Mask]:
    """Neighbour masks of bit rows."""
    return [int.from_bytes(row.astype("<u8").tobytes(), "little") for row in rows]


def new_pairs(adj: Sequence[Mask], filled: U64) -> list[Pair]:
    """Pairs adjacent in ``filled`` and not in ``adj``, lexicographic."""
    pairs = []
    for a, row in enumerate(masks_of(filled)):
        extra = (row & ~adj[a]) >> (a + 1)
        while extra:
            low = extra & -extra
            pairs.append((a, a + low.bit_length()))
            extra ^= low
    return pairs
