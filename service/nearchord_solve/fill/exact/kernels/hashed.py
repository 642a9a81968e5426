"""Sets of vertex sets: rows of uint64[cap, W] in order of entry, found again by a hash table.

``table`` int64[2^k] holds row numbers, -1 where free; collisions go on to the next place (linear probing).
"""

import numpy as np

from nearchord_solve.kernels.compiled import I64, U64, kernel


@kernel
def enter(row: U64, sets: U64, count: int, table: I64) -> int:
    """The number of a row among the first ``count`` ones, or ``count`` after writing it there.

    There must be room for it in ``sets``, and ``table`` must not be full.
    """
    mixed = np.uint64(0x9E3779B97F4A7C15)
    for w in range(row.shape[0]):
        mixed = (mixed ^ row[w]) * np.uint64(0xBF58476D1CE4E5B9)
        mixed ^= mixed >> np.uint64(29)
    last = table.shape[0] - 1
    at = np.int64(mixed & np.uint64(last))
    while table[at] >= 0:
        same = True
        for w in range(row.shape[0]):
            if sets[table[at], w] != row[w]:
                same = False
                break
        if same:
            return int(table[at])
        at = (at + 1) & last
    table[at] = count
    sets[count] = row
    return count


@kernel
def roomier(sets: U64, count: int, table: I64) -> tuple[U64, I64]:
    """The same sets with room for one more, the table at most half full."""
    if count < sets.shape[0] and 2 * count < table.shape[0]:
        return sets, table
    larger = np.empty((2 * count + 16, sets.shape[1]), np.uint64)
    size = 64
    while size < 4 * larger.shape[0]:
        size *= 2
    wider = np.full(size, -1, np.int64)
    for i in range(count):
        enter(sets[i], larger, i, wider)
    return larger, wider
