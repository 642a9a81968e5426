"""One fill core as lists and rows.

Places of a core, ascending, are its local names: anchors first, then homes.  ``later`` lists give L(r), ascending,
by rank in an elimination order (highest rank first to go); ``fill`` lists give the part of L(r) that is fill.
"""

import numpy as np

from nearchord_solve.fill.kernels.dense import set_pair
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest
from nearchord_solve.kernels.grow import grown32

SHORT = 40  # entries of a row that are sorted one by one


@kernel
def core_vertices(homes: I32, low_ptr: I64, low: I32, fill_end: I64, fill: I32, local: I32) -> tuple[I32, int]:
    """Places of one core, ascending: its anchors L(top), then its homes.

    Sets ``local`` at these places to their index.  Returns (places int32[k], anchors).
    """
    top = homes[0]
    plain = low_ptr[top + 1] - low_ptr[top]
    anchors = plain + fill_end[top] - fill_end[top + 1]
    places = np.empty(anchors + homes.shape[0], np.int32)
    places[:plain] = low[low_ptr[top] : low_ptr[top + 1]]
    places[plain:anchors] = fill[fill_end[top + 1] : fill_end[top]]
    places[:anchors].sort()
    places[anchors:] = homes
    for i in range(places.shape[0]):
        local[places[i]] = i
    return places, anchors


@kernel
def dense_rows(
    places: I32, anchors: int, low_ptr: I64, low: I32, fill_end: I64, fill: I32, local: I32
) -> tuple[U64, U64]:
    """Bitset rows of G and of H on one core, by index in ``places``."""
    k = places.shape[0]
    real = np.zeros((k, (k + 63) >> 6), np.uint64)
    for i in range(anchors):
        for j in range(i):
            set_pair(real, i, j)
    for i in range(anchors, k):
        for e in range(low_ptr[places[i]], low_ptr[places[i] + 1]):
            set_pair(real, i, local[low[e]])
    full = real.copy()
    for i in range(anchors, k):
        for e in range(fill_end[places[i] + 1], fill_end[places[i]]):
            set_pair(full, i, local[fill[e]])
    return real, full


@kernel
def sort_row(array: I32, begin: int, end: int) -> None:
    """Sort ``array[begin:end]``.  Rows are short: putting each where it belongs costs less than a call that divides."""
    if end - begin > SHORT:
        array[begin:end].sort()
        return
    for e in range(begin + 1, end):
        value = array[e]
        at = e
        while at > begin and array[at - 1] > value:
            array[at] = array[at - 1]
            at -= 1
        array[at] = value


@kernel
def sparse_lists(
    places: I32, anchors: int, low_ptr: I64, low: I32, fill_end: I64, fill: I32, local: I32
) -> tuple[I64, I32, I64, I32]:
    """L(r) and its fill part for the order in which the core stands: rank = index in ``places``."""
    k = places.shape[0]
    size = 0
    fills = 0
    for i in range(anchors, k):
        p = places[i]
        fills += fill_end[p] - fill_end[p + 1]
        size += low_ptr[p + 1] - low_ptr[p]
    later_ptr = np.zeros(k + 1, np.int64)
    later = np.empty(size + fills, np.int32)
    fill_ptr = np.zeros(k + 1, np.int64)
    fill_rank = np.empty(fills, np.int32)
    write = 0
    put = 0
    for i in range(k):
        begin = write
        if i >= anchors:
            p = places[i]
            for e in range(low_ptr[p], low_ptr[p + 1]):
                later[write] = local[low[e]]
                write += 1
            for e in range(fill_end[p + 1], fill_end[p]):
                later[write] = local[fill[e]]
                fill_rank[put] = later[write]
                write += 1
                put += 1
            sort_row(later, begin, write)
        later_ptr[i + 1] = write
        fill_ptr[i + 1] = put
    return later_ptr, later, fill_ptr, fill_rank


@kernel
def dense_lists(real: U64, full: U64, anchors: int, order: I32) -> tuple[I64, I32, I64, I32]:
    """L(r) and its fill part, by rank, for the perfect elimination ``order`` of ``full``."""
    k, words = real.shape
    rank = np.empty(k, np.int32)
    for r in range(k):
        rank[order[r]] = r
    later_ptr = np.zeros(k + 1, np.int64)
    later = np.empty(64, np.int32)
    fill_ptr = np.zeros(k + 1, np.int64)
    fill_rank = np.empty(64, np.int32)
    write = 0
    put = 0
    for r in range(k):
        later = grown32(later, write + k)
        fill_rank = grown32(fill_rank, put + k)
        begin = write
        v = order[r]
        if r >= anchors:
            for w in range(words):
                word = full[v, w]
                while word != 0:
                    bit = lowest(word)
                    word &= word - np.uint64(1)
                    q = rank[(w << 6) + bit]
                    if q < r:
                        later[write] = q
                        write += 1
                        if (real[v, w] >> np.uint64(bit)) & np.uint64(1) == 0:
                            fill_rank[put] = q
                            put += 1
            later[begin:write].sort()
        later_ptr[r + 1] = write
        fill_ptr[r + 1] = put
    return later_ptr, later[:write], fill_ptr, fill_rank[:put]
