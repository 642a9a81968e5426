"""From an elimination order of one core to its forest of bags.

A core has k vertices at ranks 0..k-1.  Ranks below ``anchors`` are the vertices it shares with what lies
above it (a clique of G); the others are its *homes*.  L(r) is the set of lower ranks joined to r when r is
eliminated.  Each bag is {r} + L(r) of the *deep* end r of a chain of homes r > r' > ... in which each is the
parent of the one before and L loses just one rank; the adhesion of the bag is L of the chain's other end, and
its bag above is the one that holds the parent of that end.  Sorted by rank, a bag lists its adhesion first.
"""

import numpy as np

from .compiled import I32, I64, kernel


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
