"""The pass of conflict prices: for every edge of G, what the optimum gains if that edge is dropped.

Let OPT be the optimum and W(u, v) the most that a set is worth that holds u and v and has no other edge inside.
Without the edge uv the optimum is max(OPT, W(u, v)), so the price is max(0, W(u, v) - OPT).

The bags that hold u and v form a subtree of the tree of bags; let the top one be that at which v is at home.  Above it
the set is like any set that holds u but not v, below its bags like any set that holds u, or v, or none of the two; so
only these bags have to be gone through for it, from below to the top.

*Outside fill cores* the bags are the cliques K(i), where nothing can stand beside u and v.  Let y(i) = max(0, r(i)), r
as the inward pass left it.  What the subtree of i adds to a set is the sum of y over it, less y(j) for each vertex of
the set in L(j), j in the subtree (the weight that the inward pass moved): for u and v together the y(j) of a j with
both in L(j) is taken twice, but the set loses it once.  Let C(u, v) be the sum of y(j) over all j with u and v in L(j).
Choosing v brings r(v) and, as u is there as well, C(u, v) back.  With the gap g(u) of choosing u, when nothing of K(v)
but u is chosen and v's subtree adds what L(v) leaves it (0 for u, in these terms),

    W(u, v) - OPT = r(v) + C(u, v) - g(u).

*A bag with fill* that has u and v in its adhesion adds to C(u, v) what its message for the two is more than the sum of
what was moved for each alone: M(u, v) - M(empty) - (M({u}) - M(empty)) - (M({v}) - M(empty)).  If fill joins nothing to
both, M(u, v) is 0 in these terms; otherwise the states are gone through (:mod:`.pair_states`).  At the top bag the
price is read from the least of (gap of t + M(t) - value) over the states with u and v, t their adhesion part.

Pairs of a clique L(i) with y(i) > 0 are looked up in the rows of its members: O(sum over these i of the lists of L(i)),
at most the edges times the largest clique, mostly much less.  With fill: the states with u and v, for each edge in
each bag.
"""

import numpy as np

from nearchord_solve.kernels.cells import POLL, STEP, STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, inlined, kernel
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, Forest, Numbering, Tries
from nearchord_solve.sweep.kernels.gaps import Bag, open_bag
from nearchord_solve.sweep.kernels.pair_states import (
    FULL,
    PairTries,
    both_ways,
    no_pairs,
    pair_states,
    settle_pair,
)
from nearchord_solve.sweep.kernels.passes import link_bags, senders
from nearchord_solve.sweep.kernels.prices import Prices

DONE, STOPPED, MEMORY = 0, 1, 2


@inlined
def add_pairs(clique: I32, amount: int, name: int, low_ptr: I64, low: I32, mark: I64, pair: I64) -> None:
    """Add ``amount`` to every edge inside a clique of places; marks them with ``name``."""
    for p in clique:
        mark[p] = name
    for p in clique:
        for e in range(low_ptr[p], low_ptr[p + 1]):
            if mark[low[e]] == name:
                pair[e] += amount


@inlined
def pair_plain(b: int, numbering: Numbering, forest: Forest, residual: I64, gap: I64, mark: I64, pair: I64) -> None:
    """Settle the edges at the homes of a bag of a core without fill, and add to those before each home."""
    low_ptr, low = numbering.low_ptr, numbering.low
    begin = forest.bag_ptr[b]
    for k in range(forest.bag_ptr[b + 1] - 1, begin + forest.bag_adhesion[b] - 1, -1):
        home = forest.slot_place[forest.bag_slot[k]]
        for m in range(begin, k + 1):
            mark[forest.slot_place[forest.bag_slot[m]]] = home
        for m in range(begin, k + 1):
            p = forest.slot_place[forest.bag_slot[m]]
            for e in range(low_ptr[p], low_ptr[p + 1]):
                u = low[e]
                if mark[u] != home:
                    continue
                if p == home or u == home:
                    pair[e] = max(0, residual[home] + pair[e] - gap[u if p == home else p])
                elif residual[home] > 0:
                    pair[e] += residual[home]


@inlined
def singles(bag: Bag, forest: Forest, tries: Tries, prices: Prices) -> tuple[I64, I64]:
    """For the touched adhesion vertices x of an open bag: M({x}), and gap of {x} + M({x}), int64[t] each."""
    single = np.zeros(bag.slots.shape[0], np.int64)
    outer = np.zeros(bag.slots.shape[0], np.int64)
    x = bag.own
    for j in range(bag.lead):
        if forest.bag_kind[bag.number] & ADHESION_FILL:
            apart = prices.apart[tries.begin[bag.number] + x - bag.own]
        else:
            apart = prices.chosen[forest.slot_place[bag.slots[j]]]
        outer[j] = tries.delta[x]
        single[j] = tries.delta[x] - apart
        x = tries.close[x]
    return single, outer


@inlined
def share_fill(full: U64, a: int, c: int) -> bool:
    """Whether fill joins some vertex to both."""
    shared = np.uint64(0)
    for w in range(full.shape[1]):
        shared |= full[a, w] & full[c, w]
    return bool(shared != 0)


@inlined
def keep_pair(a: int, c: int, nodes: int, alone: int, bag: Bag, single: I64, empty: int, kept: PairTries) -> None:
    """Keep the message about two touched adhesion vertices, whose nodes begin at ``nodes``."""
    record = kept.filled[1]
    settle_pair(nodes, kept.filled[0], alone, bag, single - empty, kept)
    kept.low[record] = bag.slots[a]
    kept.high[record] = bag.slots[c]
    kept.begin[record] = nodes
    kept.end[record] = kept.filled[0]
    kept.filled[1] += 1


@inlined
def edges_inside(bag: Bag, numbering: Numbering, forest: Forest, local: I32) -> tuple[I32, I32, I64]:
    """The edges of G inside a bag, by their positions in it: (lower, higher, index in ``numbering.low``), ascending.

    ``local`` int32[n] must be -1 everywhere and is so again on return.
    """
    begin = forest.bag_ptr[bag.number]
    size = forest.bag_ptr[bag.number + 1] - begin
    for k in range(size):
        local[forest.slot_place[forest.bag_slot[begin + k]]] = k
    where = np.full((size, size), -1, np.int64)
    count = 0
    for k in range(size):
        p = forest.slot_place[forest.bag_slot[begin + k]]
        for e in range(numbering.low_ptr[p], numbering.low_ptr[p + 1]):
            m = local[numbering.low[e]]
            if m >= 0:
                where[min(k, m), max(k, m)] = e
                count += 1
    for k in range(size):
        local[forest.slot_place[forest.bag_slot[begin + k]]] = -1
    one = np.empty(count, np.int32)
    other = np.empty(count, np.int32)
    edge = np.empty(count, np.int64)
    count = 0
    for k in range(size):
        for m in range(k + 1, size):
            if where[k, m] >= 0:
                one[count] = k
                other[count] = m
                edge[count] = where[k, m]
                count += 1
    return one, other, edge


@inlined
def pair_filled(
    bag: Bag, numbering: Numbering, forest: Forest, tries: Tries, residual: I64, prices: Prices, local: I32,
    pair: I64, kept: PairTries, cells: I64,
) -> int:  # fmt: skip
    """Settle the edges at the homes of a bag with fill, and pass on those of its adhesion."""
    begin = forest.bag_ptr[bag.number]
    size = forest.bag_ptr[bag.number + 1] - begin
    lead = forest.bag_adhesion[bag.number]
    empty = bag.none - prices.avoided[residual.shape[0] + bag.number]
    single, outer = singles(bag, forest, tries, prices)
    full = both_ways(bag.rows)
    touch = np.full(size, -1, np.int32)
    j = 0
    for k in range(size):
        if j < bag.slots.shape[0] and bag.slots[j] == forest.bag_slot[begin + k]:
            touch[k] = j
            j += 1
    kept.first[bag.number] = kept.filled[1]
    keep = forest.bag_kind[bag.number] & ADHESION_FILL != 0
    ones, others, edges = edges_inside(bag, numbering, forest, local)
    code = DONE
    for q in range(edges.shape[0]):
        if cells[STOP] != 0:
            code = STOPPED
            break
        k, m, e = ones[q], others[q], edges[q]
        a, c = touch[k], touch[m]
        down = m < lead
        nodes = kept.filled[0]
        found = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
        together = a >= 0 and c >= 0 and share_fill(full, a, c)
        if together:
            found = pair_states(bag, tries, full, a, c, 0 if down else pair[e], down, kept)
            if found == FULL:
                code = MEMORY
                break
        if down:
            if keep and kept.filled[0] > nodes:
                keep_pair(a, c, nodes, found, bag, single, empty, kept)
            else:
                kept.filled[0] = nodes
            pair[e] += found + empty - (single[a] if a >= 0 else 0) - (single[c] if c >= 0 else 0)
            continue
        if not together:
            u = forest.slot_place[forest.bag_slot[begin + k]]
            if k >= lead:
                found = bag.none - residual[u]
            elif a >= 0:
                found = outer[a]
            else:
                found = prices.chosen[u]
            found -= pair[e] + residual[forest.slot_place[forest.bag_slot[begin + m]]]
        pair[e] = max(0, -found)
    kept.behind[bag.number] = kept.filled[1]
    return code


@kernel
def inward_conflicts(
    numbering: Numbering, forest: Forest, tries: Tries, used: int, residual: I64, prices: Prices, pair: I64, room: int,
    cells: I64,
) -> int:  # fmt: skip
    """Write the prices of all edges into ``pair`` int64[m], in the order of ``numbering.low``, from the high places to
    the low ones.

    All as the inward pass and the pass of prices left them; ``pair`` must be 0.  Returns DONE, STOPPED, or MEMORY if
    more than ``room`` nodes had to be kept.
    """
    low_ptr, low, core = numbering.low_ptr, numbering.low, numbering.core
    gap = prices.chosen
    n = residual.shape[0]
    bags = forest.bag_kind.shape[0]
    mark = np.full(n, -1)
    local = np.full(n, -1, np.int32)
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    first, following = link_bags(forest.bag_above, forest.bag_kind)
    kept = no_pairs(bags, room)
    for i in range(n - 1, -1, -1):
        if (i & POLL) == 0:
            cells[STEP] = n - i
            if cells[STOP] != 0:
                return STOPPED
        c = core[i]
        if c < 0:
            for e in range(low_ptr[i], low_ptr[i + 1]):
                pair[e] = max(0, residual[i] + pair[e] - gap[low[e]])
            if residual[i] > 0 and low_ptr[i + 1] - low_ptr[i] > 1:
                add_pairs(low[low_ptr[i] : low_ptr[i + 1]], residual[i], i, low_ptr, low, mark, pair)
            continue
        if forest.core_top[c] != i:
            continue
        for b in range(forest.core_bag[c + 1] - 1, forest.core_bag[c] - 1, -1):
            if not forest.bag_kind[b] & BAG_FILL:
                pair_plain(b, numbering, forest, residual, gap, mark, pair)
                continue
            bag = open_bag(
                b, forest, senders(b, first, following), tries, used, where, residual, gap, prices.apart,
                prices.avoided[n + b],
            )  # fmt: skip
            code = pair_filled(bag, numbering, forest, tries, residual, prices, local, pair, kept, cells)
            if code != DONE:
                return code
    return DONE
