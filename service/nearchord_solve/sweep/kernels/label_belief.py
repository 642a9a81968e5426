"""What states of at most two vertices are worth in all, told to vertices and to the bags below.

The total of a state of a bag is the best value of a choice of the whole graph that meets the bag in it.  What lies
outside, given a part of the adhesion, is the best total with that part, told from above, less what the bag itself and
all below collected for it; both are at hand for every part that some state has, so nothing impossible is subtracted.
"""

import numpy as np

from nearchord_solve.kernels.compiled import I64, kernel
from nearchord_solve.kernels.words import holds
from nearchord_solve.sweep.kernels.label_bags import Bag
from nearchord_solve.sweep.kernels.label_goals import Belief, few_place
from nearchord_solve.sweep.kernels.label_table import Table


@kernel
def restore_worths(bag: Bag) -> None:
    """Worths of the homes of a bag without fill before any of them was eliminated, from those when each was.

    Undoes :func:`.label_closed.settle_closed` from the last elimination to the first, in ``bag.gain`` and ``bag.pair``.
    """
    best = np.zeros(bag.member.shape[0], np.int64)
    for j in range(bag.lead, bag.member.shape[0]):
        alone = max(bag.gain[j], 0)
        for k in range(j):
            best[k] = max(bag.gain[j] + bag.pair[j, k], 0)
        for k in range(bag.lead, j):
            bag.gain[k] -= best[k] - alone
            for e in range(k):
                bag.pair[k, e] += best[e] + best[k] - alone


@kernel
def look_outside(bag: Bag, table: Table, begin: int, end: int, few: I64, belief: Belief) -> None:
    """Turn the totals told to a bag into what lies outside.

    ``few``: what the bag collected for plain parts, overwritten with what lies outside them; so are the totals of the
    entries of the bag, ``begin`` to ``end``.
    """
    for e in range(begin, end):
        belief.entry[e] -= table.value[e]
    if not bag.closed:
        return
    place = 0
    for e in range(begin, end):  # entries were related to what plain parts are worth
        length = table.length[e]
        at = table.begin[e]
        part = np.empty(length, np.int64)
        for i in range(length):
            while bag.member[place] < table.pool[at + i]:
                place += 1
            part[i] = place + 1
        place = 0
        more = few[0, 0]
        for i in range(length):
            more += few[part[i], 0] - few[0, 0]
            for j in range(i):
                more += few[part[i], part[j]] - few[part[i], 0] - few[part[j], 0] + few[0, 0]
        belief.entry[e] -= more
    told = belief.few_ptr[bag.number]
    few[0, 0] = belief.few[told] - few[0, 0]
    for k in range(1, bag.lead + 1):
        for f in range(k):
            few[k, f] = belief.few[told + few_place(k, f)] - few[k, f]


@kernel
def _totals(bag: Bag, few: I64) -> I64:
    """Totals of all states of at most two vertices, int64[b + 1, b + 1]: (0, 0), (i + 1, 0) and both (i + 1, j + 1)."""
    b, lead = bag.member.shape[0], bag.lead
    total = np.empty((b + 1, b + 1), np.int64)
    total[0, 0] = few[0, 0]
    for i in range(b):
        one = few[i + 1, 0] if i < lead else few[0, 0]
        total[i + 1, 0] = one + bag.gain[i]
        total[0, i + 1] = total[i + 1, 0]
        total[i + 1, i + 1] = total[i + 1, 0]
        for j in range(i):
            if i < lead:
                outside = few[i + 1, j + 1]
            else:
                outside = few[j + 1, 0] if j < lead else few[0, 0]
            total[i + 1, j + 1] = outside + bag.gain[i] + bag.gain[j] + bag.pair[i, j]
            total[j + 1, i + 1] = total[i + 1, j + 1]
    return total


@kernel
def _tell_below(bag: Bag, c: int, total: I64, most: I64, belief: Belief) -> None:
    """Tell bag ``c`` below the totals of the plain parts of its adhesion; ``most`` int64[b]: the best of each row."""
    b = bag.member.shape[0]
    told = belief.few_ptr[bag.child[c]]
    none = max(belief.few[told], total[0, 0])
    high = 0
    for i in range(b):
        if not holds(bag.inside[c], i):
            if most[i] > none:
                none = max(none, total[i + 1, 0])
                for j in range(b):
                    if not holds(bag.inside[c], j):
                        none = max(none, total[i + 1, j + 1])
            continue
        high += 1
        one = total[i + 1, 0]
        low = 0
        for j in range(b):
            if not holds(bag.inside[c], j):
                one = max(one, total[i + 1, j + 1])
            elif j < i:
                low += 1
                at = told + few_place(high, low)
                belief.few[at] = max(belief.few[at], total[i + 1, j + 1])
        at = told + few_place(high, 0)
        belief.few[at] = max(belief.few[at], one)
    belief.few[told] = none


@kernel
def tell_few(bag: Bag, few: I64, belief: Belief) -> None:
    """Tell what states of at most two vertices are worth in all; ``few``: what lies outside plain parts.

    O(b^2), and for each bag below O(b) times what it shares and those vertices that are worth looking at.
    """
    b = bag.member.shape[0]
    total = _totals(bag, few)
    most = np.empty(b, np.int64)
    for i in range(b):
        most[i] = total[i + 1].max()
        v = bag.member[i]
        belief.chosen[v] = max(belief.chosen[v], most[i])
    for i in range(bag.lead, b):
        v = bag.member[i]
        if belief.kept[v]:
            left = total[0, 0]
            for j in range(b):
                for k in range(j + 1):
                    if j != i and k != i:
                        left = max(left, total[j + 1, k + 1])
            belief.left[v] = max(belief.left[v], left)
    for c in range(bag.child.shape[0]):
        _tell_below(bag, c, total, most, belief)
