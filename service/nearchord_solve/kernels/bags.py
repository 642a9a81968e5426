"""From an elimination order of one core to its bags, and what they cost.

A core has k vertices at ranks 0..k-1.  Ranks below ``anchors`` are the vertices it shares with what lies
above it (a clique of G); the others are its *homes*.  L(r) is the set of lower ranks joined to r when r is
eliminated.  Each bag is {r} + L(r) of the *deep* end r of a chain of homes r > r' > ... in which each is the
parent of the one before and L loses just one rank; the adhesion of the bag is L of the chain's other end, and
its bag above is the one that holds the parent of that end.  Sorted by rank, a bag lists its adhesion first.
"""

import numpy as np

from nearchord_solve.kernels.cliques import count_cliques, touched
from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL


@kernel
def chain_bags(anchors: int, later_ptr: I64, later: I32) -> tuple[I32, I32, I32, I32]:
    """Chains of homes.

    ``later[later_ptr[r]:later_ptr[r+1]]`` is L(r), ascending.  Returns, for the bags in ascending order of
    their chain's lowest rank (so each bag follows the bag above it): the deep end, the adhesion's size and the
    bag above (-1 if none), each int32[bags]; and the bag of each rank, int32[k], -1 for anchors.  O(k).
    """
    k = later_ptr.shape[0] - 1
    bag = np.full(k, -1, np.int32)
    deep = np.empty(k, np.int32)
    top = np.empty(k, np.int32)
    count = 0
    for r in range(k - 1, anchors - 1, -1):
        size = later_ptr[r + 1] - later_ptr[r]
        if bag[r] < 0:
            bag[r] = count
            deep[count] = r
            count += 1
        top[bag[r]] = r
        if size > 0:
            p = later[later_ptr[r + 1] - 1]
            if p >= anchors and bag[p] < 0 and size == later_ptr[p + 1] - later_ptr[p] + 1:
                bag[p] = bag[r]
    name = np.empty(count, np.int32)
    bags = 0
    for r in range(anchors, k):
        if top[bag[r]] == r:
            name[bag[r]] = bags
            bags += 1
    deep_end = np.empty(count, np.int32)
    adhesion = np.empty(count, np.int32)
    above = np.empty(count, np.int32)
    for r in range(anchors, k):
        bag[r] = name[bag[r]]
    for b in range(count):
        r = top[b]
        deep_end[name[b]] = deep[b]
        size = later_ptr[r + 1] - later_ptr[r]
        adhesion[name[b]] = size
        above[name[b]] = bag[later[later_ptr[r + 1] - 1]] if size > 0 else -1
    return deep_end, adhesion, above, bag


@kernel
def _kind(bag_rank: I32, begin: int, split: int, end: int, fill_ptr: I64, fill_rank: I32, mark: I32, b: int) -> int:
    """Kind of bag b, whose ranks are marked with b; its adhesion stands in begin..split-1."""
    for e in range(begin, end):
        q = bag_rank[e]
        for g in range(fill_ptr[q], fill_ptr[q + 1]):
            if mark[fill_rank[g]] == b:
                return BAG_FILL | ADHESION_FILL if e < split else BAG_FILL
    return 0


@kernel
def write_bags(
    anchors: int, later_ptr: I64, later: I32, fill_ptr: I64, fill_rank: I32
) -> tuple[I64, I32, I32, I32, U8]:
    """Bags of one core by rank: (bag_ptr, bag_rank, adhesion, above, kind)."""
    deep, adhesion, above, _ = chain_bags(anchors, later_ptr, later)
    bags = deep.shape[0]
    bag_ptr = np.zeros(bags + 1, np.int64)
    for b in range(bags):
        bag_ptr[b + 1] = bag_ptr[b] + later_ptr[deep[b] + 1] - later_ptr[deep[b]] + 1
    bag_rank = np.empty(bag_ptr[bags], np.int32)
    kind = np.zeros(bags, np.uint8)
    mark = np.full(later_ptr.shape[0] - 1, -1, np.int32)
    for b in range(bags):
        r = deep[b]
        begin = bag_ptr[b]
        end = bag_ptr[b + 1]
        bag_rank[begin : end - 1] = later[later_ptr[r] : later_ptr[r + 1]]
        bag_rank[end - 1] = r
        for e in range(begin, end):
            mark[bag_rank[e]] = b
        kind[b] = _kind(bag_rank, begin, begin + adhesion[b], end, fill_ptr, fill_rank, mark, b)
    return bag_ptr, bag_rank, adhesion, above, kind


@kernel
def count_states(
    bag_ptr: I64, bag_rank: I32, adhesion: I32, kind: U8, fill_ptr: I64, fill_rank: I32, most: int, cells: I64
) -> tuple[int, int]:
    """States of all bags of a core that hold fill, and entries of the tables on their adhesions.

    Counting stops above ``most`` states.  A bag without fill needs no table: its states, the empty set and
    single vertices, are implicit.
    """
    states = 0
    table = 0
    where = np.full(fill_ptr.shape[0] - 1, -1, np.int32)
    for b in range(kind.shape[0]):
        if not kind[b] & BAG_FILL:
            continue
        slots, rows, edges = touched(bag_rank, bag_ptr[b], bag_ptr[b + 1], fill_ptr, fill_rank, where)
        states += 1 + bag_ptr[b + 1] - bag_ptr[b]
        states += count_cliques(rows, slots.shape[0], edges, most - states, cells)
        if states > most:
            return most + 1, table
        if kind[b] & ADHESION_FILL:
            lead = 0
            while lead < slots.shape[0] and slots[lead] <= bag_rank[bag_ptr[b] + adhesion[b] - 1]:
                lead += 1
            table += lead + count_cliques(rows, lead, edges, most, cells)
    return states, table


@kernel
def count_parts(kind: U8) -> tuple[int, int]:
    """Parts of a core's forest: (parts with fill, bags without fill)."""
    cores = 0
    plain = 0
    for b in range(kind.shape[0]):
        if not kind[b] & BAG_FILL:
            plain += 1
        elif not kind[b] & ADHESION_FILL:
            cores += 1
    return cores, plain


@kernel
def fill_parts(bag_above: I32, bag_kind: U8) -> tuple[int, I32]:
    """The number of parts that hold fill, and the part of each bag, int32[B]: -1 for bags without fill.

    Bags follow the bag above them.  A bag with fill in its adhesion belongs to the part of the bag above.
    """
    part = np.full(bag_kind.shape[0], -1, np.int32)
    count = 0
    for b in range(bag_kind.shape[0]):
        if bag_kind[b] & ADHESION_FILL:
            part[b] = part[bag_above[b]]
        elif bag_kind[b] & BAG_FILL:
            part[b] = count
            count += 1
    return count, part
