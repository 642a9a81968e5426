"""The inward and outward passes over a whole graph for the heaviest independent set.

Outside fill cores every K(i) is a clique of G and Frank's algorithm does (Frank, Proc. 5th British
Combinatorial Conf. (1975) 211-226): going down the places, a positive residual weight of i joins the base value
and is taken from all of L(i); going up, i is chosen if its residual was positive and nothing of L(i) is chosen.
A core is settled when its lowest place comes up: all that hangs from it has higher places, and what it hangs
from has lower ones.
"""

import numpy as np

from nearchord_solve.kernels.cells import BAGS_DONE, POLL, STEP, STOP
from nearchord_solve.kernels.cliques import touched
from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.cover import choose_greedily, cover_core
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, Cover, Forest, Numbering, Tries
from nearchord_solve.sweep.kernels.tables import best_state, collect_messages, fill_table, settle_message


@kernel
def link_bags(bag_above: I32, bag_kind: U8) -> tuple[I32, I32]:
    """Bags below each bag that send a kept message: (first int32[B], next int32[B]), ascending, -1 ends."""
    bags = bag_above.shape[0]
    first = np.full(bags, -1, np.int32)
    following = np.full(bags, -1, np.int32)
    for b in range(bags - 1, -1, -1):
        if bag_kind[b] & ADHESION_FILL:
            following[b] = first[bag_above[b]]
            first[bag_above[b]] = b
    return first, following


@kernel
def senders(bag: int, first: I32, following: I32) -> I32:
    """The bags below ``bag`` that send a kept message."""
    count = 0
    b = first[bag]
    while b >= 0:
        count += 1
        b = following[b]
    found = np.empty(count, np.int32)
    b = first[bag]
    for q in range(count):
        found[q] = b
        b = following[b]
    return found


@kernel
def split_bag(bag: int, slots: I32, forest: Forest, residual: I64) -> tuple[int, I64, int, int]:
    """Adhesion and home parts of the touched slots of a bag.

    Returns (touched slots in the adhesion, residual weights of touched slots int64[t], the best residual of an
    untouched home or 0, its slot or -1).
    """
    begin = forest.bag_ptr[bag]
    split = begin + forest.bag_adhesion[bag]
    gain = np.zeros(slots.shape[0], np.int64)
    spare = 0
    spare_slot = -1
    lead = 0
    j = 0
    for e in range(begin, forest.bag_ptr[bag + 1]):
        s = forest.bag_slot[e]
        if j < slots.shape[0] and slots[j] == s:
            if e < split:
                lead += 1
            else:
                gain[j] = residual[forest.slot_place[s]]
            j += 1
        elif e >= split and residual[forest.slot_place[s]] > spare:
            spare = residual[forest.slot_place[s]]
            spare_slot = s
    return lead, gain, spare, spare_slot


@kernel
def settle_plain(bag: int, forest: Forest, residual: I64) -> int:
    """Settle a bag without fill; returns what it adds to the base."""
    begin = forest.bag_ptr[bag]
    base = 0
    for e in range(forest.bag_ptr[bag + 1] - 1, begin + forest.bag_adhesion[bag] - 1, -1):
        gain = residual[forest.slot_place[forest.bag_slot[e]]]
        if gain > 0:
            base += gain
            for f in range(begin, e):
                residual[forest.slot_place[forest.bag_slot[f]]] -= gain
    return base


@kernel
def settle_bag(
    bag: int, forest: Forest, children: I32, tries: Tries, used: int, where: I32, residual: I64
) -> tuple[int, int]:
    """Settle a bag with fill; returns (what it adds to the base, new end of the kept tries)."""
    begin = forest.bag_ptr[bag]
    slots, rows, edges = touched(
        forest.bag_slot, begin, forest.bag_ptr[bag + 1], forest.slot_fill_ptr, forest.slot_fill, where
    )
    lead, gain, spare, _ = split_bag(bag, slots, forest, residual)
    meet_ptr, meet_node, meet_child = collect_messages(
        slots, children, tries.begin, tries.end, tries.label, tries.close
    )
    empty, end = fill_table(
        slots, rows, edges, lead, gain, meet_ptr, meet_node, meet_child, children.shape[0],
        tries.label, tries.close, tries.delta, used, spare,
    )  # fmt: skip
    settle_message(used, end, empty, tries.label, tries.close, tries.delta, forest.slot_place, residual)
    j = 0
    for e in range(begin, begin + forest.bag_adhesion[bag]):
        s = forest.bag_slot[e]
        if j < lead and slots[j] == s:
            j += 1
        else:
            residual[forest.slot_place[s]] -= empty
    tries.begin[bag] = used
    if forest.bag_kind[bag] & ADHESION_FILL:
        used = end
    tries.end[bag] = used
    return empty, used


@kernel
def inward(
    numbering: Numbering, forest: Forest, core_ptr: I64, core_place: I32, fits: U8,
    tries: Tries, residual: I64, share: I64, cover: Cover, cells: I64,
) -> tuple[bool, int]:  # fmt: skip
    """Collect the value from the high places to the low ones.

    ``residual`` int64[n] holds the weights by place and is overwritten with what each place is worth when its
    turn comes; ``tries`` are overwritten.  Cores with ``fits`` 0 are bounded by cliques, which go to ``cover``.
    ``share`` int64[slots], of the other cores, receives what a home is worth before its core is settled, and what
    the core takes from an anchor.  Returns (False if stopped, base): base is the optimum, or an upper bound of it
    if some core does not fit.
    """
    n = residual.shape[0]
    low_ptr = numbering.low_ptr
    low = numbering.low
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    seen = np.zeros(n, np.int32)
    first, following = link_bags(forest.bag_above, forest.bag_kind)
    base = 0
    used = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
    bags = 0
    for i in range(n - 1, -1, -1):
        if (i & POLL) == 0:
            cells[STEP] = n - i
            if cells[STOP] != 0:
                return False, base
        c = numbering.core[i]
        if c < 0:
            gain = residual[i]
            if gain > 0:
                base += gain
                for e in range(low_ptr[i], low_ptr[i + 1]):
                    residual[low[e]] -= gain
            continue
        if forest.core_top[c] != i:
            continue
        if not fits[c]:
            base += cover_core(core_place[core_ptr[c] : core_ptr[c + 1]], low_ptr, low, residual, seen, cover)
            bags += forest.core_bag[c + 1] - forest.core_bag[c]
            continue
        for s in range(forest.core_slot[c], forest.core_slot[c + 1]):
            share[s] = residual[forest.slot_place[s]]
        for b in range(forest.core_bag[c + 1] - 1, forest.core_bag[c] - 1, -1):
            if cells[STOP] != 0:
                return False, base
            if forest.bag_kind[b] & BAG_FILL:
                more, used = settle_bag(b, forest, senders(b, first, following), tries, used, where, residual)
                base += more
            else:
                base += settle_plain(b, forest, residual)
            bags += 1
            cells[BAGS_DONE] = bags
        for s in range(forest.core_slot[c], forest.core_slot[c] + forest.core_anchors[c]):
            share[s] -= residual[forest.slot_place[s]]
    return True, base


@kernel
def choose_plain(bag: int, forest: Forest, residual: I64, chosen: U8) -> None:
    """Choose in a bag without fill: the first home of positive residual, if nothing before it is chosen."""
    taken = False
    begin = forest.bag_ptr[bag]
    for e in range(begin, forest.bag_ptr[bag + 1]):
        p = forest.slot_place[forest.bag_slot[e]]
        if e >= begin + forest.bag_adhesion[bag] and not taken and residual[p] > 0:
            chosen[p] = 1
        taken = taken or chosen[p] != 0


@kernel
def choose_bag(bag: int, forest: Forest, children: I32, tries: Tries, where: I32, residual: I64, chosen: U8) -> None:
    """Choose in a bag with fill the best homes next to what is chosen in its adhesion."""
    begin = forest.bag_ptr[bag]
    slots, rows, edges = touched(
        forest.bag_slot, begin, forest.bag_ptr[bag + 1], forest.slot_fill_ptr, forest.slot_fill, where
    )
    lead, gain, spare, spare_slot = split_bag(bag, slots, forest, residual)
    picked = 0
    fixed = np.empty(lead, np.int32)
    for j in range(lead):
        if chosen[forest.slot_place[slots[j]]]:
            fixed[picked] = j
            picked += 1
    taken = 0
    for e in range(begin, begin + forest.bag_adhesion[bag]):
        taken += chosen[forest.slot_place[forest.bag_slot[e]]]
    if taken > picked:
        return
    if taken > 0:
        spare = 0
    meet_ptr, meet_node, meet_child = collect_messages(
        slots, children, tries.begin, tries.end, tries.label, tries.close
    )
    best = np.empty(slots.shape[0], np.int32)
    count = best_state(
        slots, rows, edges, lead, gain, meet_ptr, meet_node, meet_child, children.shape[0],
        tries.label, tries.close, tries.delta, fixed[:picked], spare, best,
    )  # fmt: skip
    if count < 0:
        chosen[forest.slot_place[spare_slot]] = 1
    for d in range(count):
        chosen[forest.slot_place[slots[best[d]]]] = 1


@kernel
def outward(
    numbering: Numbering, forest: Forest, core_ptr: I64, core_place: I32, fits: U8,
    tries: Tries, residual: I64, chosen: U8, cells: I64,
) -> bool:  # fmt: skip
    """Choose from the low places to the high ones after :func:`inward`; False if stopped.

    ``chosen`` uint8[n], by place, is overwritten.  The choice is independent at any time, and reaches the base
    value of the inward pass if every core fits.
    """
    n = residual.shape[0]
    low_ptr = numbering.low_ptr
    low = numbering.low
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    blocked = np.zeros(n, np.uint8)
    first, following = link_bags(forest.bag_above, forest.bag_kind)
    chosen[:] = 0
    for i in range(n):
        if (i & POLL) == 0:
            cells[STEP] = i
            if cells[STOP] != 0:
                return False
        c = numbering.core[i]
        if c < 0:
            if residual[i] > 0:
                free = 1
                for e in range(low_ptr[i], low_ptr[i + 1]):
                    if chosen[low[e]]:
                        free = 0
                        break
                chosen[i] = free
            continue
        if forest.core_top[c] != i:
            continue
        if not fits[c]:
            homes = core_place[core_ptr[c] : core_ptr[c + 1]]
            choose_greedily(homes, low_ptr, low, residual, chosen, blocked)
            continue
        for b in range(forest.core_bag[c], forest.core_bag[c + 1]):
            if cells[STOP] != 0:
                return False
            if forest.bag_kind[b] & BAG_FILL:
                choose_bag(b, forest, senders(b, first, following), tries, where, residual, chosen)
            else:
                choose_plain(b, forest, residual, chosen)
    return True
