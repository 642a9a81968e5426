"""Bags without fill, settled by a formula with two colours and for forests.

At most two vertices of a clique of G are chosen, so whatever hangs from a clique is worth a function of at most two
chosen vertices, base + sum of u_a over chosen a + p_ab for a chosen pair.  Eliminating vertex i with single worth r and
pair worths p is closed: with g = max(0, r) and h_a = max(0, r + p_a), the rest is worth g, and with a more or less by
h_a - g; a pair (a, b) leaves no room for i, so it loses h_a + h_b - g.  All homes of a bag lose that together from each
pair of the adhesion, O(1) a pair.
"""

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.layout import Forest


@kernel
def settle_closed(bag: int, forest: Forest, later_ptr: I64, later: I32, single: I64, pair: I64) -> int:
    """Eliminate the homes of a bag without fill; returns what they add to the base.

    ``single`` int64[n], ``pair`` along ``later`` are changed.  O(size of the bag * homes + rows of the adhesion).
    """
    begin = forest.bag_ptr[bag]
    lead = forest.bag_adhesion[bag]
    size = forest.bag_ptr[bag + 1] - begin
    sums = np.zeros(lead, np.int64)
    spare = int(np.int64(0))
    touched = False
    best = np.zeros(size, np.int64)
    for j in range(size - 1, lead - 1, -1):
        i = forest.bag_slot[begin + j]
        row = later_ptr[i]
        alone = max(single[i], 0)
        useful = alone > 0
        for k in range(j):
            best[k] = max(single[i] + pair[row + k], 0)
            useful = useful or best[k] > 0
        if not useful:
            continue
        spare += alone
        for k in range(lead):
            single[forest.bag_slot[begin + k]] += best[k] - alone
            sums[k] += best[k]
        for k in range(lead, j):
            home = forest.bag_slot[begin + k]
            single[home] += best[k] - alone
            at = later_ptr[home]
            lost = best[k] - alone
            for e in range(k):
                pair[at + e] -= best[e] + lost
        touched = True
    if touched:
        for k in range(1, lead):
            a = forest.bag_slot[begin + k]
            lost = sums[k] - spare
            e = later_ptr[a]
            for f in range(k):
                b = forest.bag_slot[begin + f]
                while later[e] != b:
                    e += 1
                pair[e] -= sums[f] + lost
    return spare


@kernel
def choose_closed(bag: int, forest: Forest, later_ptr: I64, single: I64, pair: I64, colour: U8) -> None:
    """Choose homes of a bag without fill: while fewer than two are chosen, what is worth something joins."""
    begin = forest.bag_ptr[bag]
    count = 0
    other = -1
    for j in range(forest.bag_ptr[bag + 1] - begin):
        v = forest.bag_slot[begin + j]
        if j >= forest.bag_adhesion[bag] and count < 2:
            worth = single[v]
            if count == 1:
                worth += pair[later_ptr[v] + other]
            if worth > 0:
                colour[v] = 3 - colour[forest.bag_slot[begin + other]] if count == 1 else 1
        if colour[v]:
            count += 1
            other = j
