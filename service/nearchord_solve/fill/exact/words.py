"""Bit rows for kernels: uint64[n, W] with W = ceil(n / 64); bit j of row i says that i and j are adjacent."""

from collections.abc import Sequence

import numpy as np

from nearchord_solve.kernels.compiled import I64, U64, kernel, lowest

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


@kernel
def has(rows: U64, i: int, j: int) -> bool:
    """Whether i and j are adjacent."""
    return (rows[i, j >> 6] >> np.uint64(j & 63)) & np.uint64(1) != 0


@kernel
def put(rows: U64, i: int, j: int) -> None:
    """Make i and j adjacent."""
    rows[i, j >> 6] |= np.uint64(1) << np.uint64(j & 63)
    rows[j, i >> 6] |= np.uint64(1) << np.uint64(i & 63)


@kernel
def take(rows: U64, i: int, j: int) -> None:
    """Make i and j non-adjacent."""
    rows[i, j >> 6] &= ~(np.uint64(1) << np.uint64(j & 63))
    rows[j, i >> 6] &= ~(np.uint64(1) << np.uint64(i & 63))


@kernel
def unpack(words: U64, found: I64) -> int:
    """Write the members of one set, ascending, into ``found``; returns their number."""
    count = 0
    for w in range(words.shape[0]):
        left = words[w]
        while left != 0:
            found[count] = 64 * w + lowest(left)
            count += 1
            left &= left - np.uint64(1)
    return count
