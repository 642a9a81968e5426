"""The inward and outward passes for W weight vectors at a time; see :mod:`.passes`.

The order, the bags and their states are gone through once for all vectors.  Values stand in rows of W numbers; what
is chosen is one word a place, with a bit for each vector.
"""

import numpy as np

from nearchord_solve.kernels.cells import POLL, STEP, STOP
from nearchord_solve.kernels.cliques import touched
from nearchord_solve.kernels.compiled import I32, I64, U32, U64, inlined, kernel, lowest
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, Forest, Numbering
from nearchord_solve.sweep.kernels.passes import link_bags, senders
from nearchord_solve.sweep.kernels.tables import collect_messages
from nearchord_solve.sweep.kernels.wide_tables import (
    SPARE,
    Ways,
    WideTries,
    fill_wide,
    settle_wide,
    split_wide,
)

ONE = np.uint64(1)


@kernel
def gather(weights: I64, first: int, count: int, place: I32, residual: I64) -> None:
    """Weights of ``count`` vectors from ``first`` on, by place, 0 beyond.

    ``weights`` int64[R, n], ``place`` int32[n], ``residual`` int64[n, W].  Vectors are read, and rows written, in
    one piece each.
    """
    for v in range(place.shape[0]):
        p = place[v]
        for r in range(count):
            residual[p, r] = weights[first + r, v]
        for r in range(count, residual.shape[1]):
            residual[p, r] = 0


@inlined
def take_home(p: int, residual: I64, chosen: U64, base: I64, gain: I64) -> None:
    """Add what a place is worth to ``base``; note it in ``gain``, and as bits of what is positive in ``chosen``."""
    positive = np.uint64(0)
    wide = gain.shape[0]
    for r in range(wide):
        gain[r] = max(0, residual[p, r])
        base[r] += gain[r]
    for r in range(wide):
        positive |= np.uint64(gain[r] > 0) << np.uint64(r)
    chosen[p] = positive


@inlined
def settle_wide_bag(
    bag: int, forest: Forest, children: I32, tries: WideTries, used: int, where: I32, residual: I64, base: I64,
    ways: Ways,
) -> int:  # fmt: skip
    """Settle a bag with fill; returns the new end of the kept tries."""
    begin = forest.bag_ptr[bag]
    slots, rows, edges = touched(
        forest.bag_slot, begin, forest.bag_ptr[bag + 1], forest.slot_fill_ptr, forest.slot_fill, where
    )
    wide = residual.shape[1]
    lead, gain, empty, _ = split_wide(bag, slots, forest, residual)
    meet_ptr, meet_node, meet_child = collect_messages(
        slots, children, tries.begin, tries.end, tries.label, tries.close
    )
    end = fill_wide(
        slots, rows, edges, lead, gain, meet_ptr, meet_node, meet_child, children.shape[0], tries, used, empty,
        False, ways,
    )  # fmt: skip
    settle_wide(used, end, empty, tries, forest.slot_place, residual)
    for r in range(wide):
        base[r] += empty[r]
    j = 0
    for e in range(begin, begin + forest.bag_adhesion[bag]):
        s = forest.bag_slot[e]
        if j < lead and slots[j] == s:
            j += 1
        else:
            for r in range(wide):
                residual[forest.slot_place[s], r] -= empty[r]
    tries.begin[bag] = used
    if forest.bag_kind[bag] & ADHESION_FILL:
        used = end
    tries.end[bag] = used
    return used


@kernel
def inward_wide(
    numbering: Numbering, forest: Forest, tries: WideTries, ways: Ways, residual: I64, chosen: U64, base: I64,
    cells: I64,
) -> bool:  # fmt: skip
    """Collect values from the high places to the low ones; False if stopped.

    ``residual`` int64[n, W] holds the weights by place and is overwritten, as are ``tries``; ``chosen`` uint64[n]
    receives which residuals are positive, of places that no bag with fill settles; ``base`` int64[W] the optima.
    """
    low_ptr, low = numbering.low_ptr, numbering.low
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    first, following = link_bags(forest.bag_above, forest.bag_kind)
    wide = residual.shape[1]
    gain = np.empty(wide, np.int64)
    base[:] = 0
    used = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
    for i in range(residual.shape[0] - 1, -1, -1):
        if (i & POLL) == 0:
            cells[STEP] = residual.shape[0] - i
            if cells[STOP] != 0:
                return False
        c = numbering.core[i]
        if c < 0:
            take_home(i, residual, chosen, base, gain)
            if chosen[i]:
                for e in range(low_ptr[i], low_ptr[i + 1]):
                    u = low[e]
                    for r in range(wide):
                        residual[u, r] -= gain[r]
            continue
        if forest.core_top[c] != i:
            continue
        for b in range(forest.core_bag[c + 1] - 1, forest.core_bag[c] - 1, -1):
            if cells[STOP] != 0:
                return False
            if forest.bag_kind[b] & BAG_FILL:
                used = settle_wide_bag(
                    b, forest, senders(b, first, following), tries, used, where, residual, base, ways
                )
                continue
            begin = forest.bag_ptr[b]
            for e in range(forest.bag_ptr[b + 1] - 1, begin + forest.bag_adhesion[b] - 1, -1):
                take_home(forest.slot_place[forest.bag_slot[e]], residual, chosen, base, gain)
                for f in range(begin, e):
                    u = forest.slot_place[forest.bag_slot[f]]
                    for r in range(wide):
                        residual[u, r] -= gain[r]
    return True


@inlined
def choose_wide(
    bag: int, forest: Forest, children: I32, tries: WideTries, used: int, where: I32, residual: I64, chosen: U64,
    ways: Ways,
) -> None:  # fmt: skip
    """Choose in a bag with fill, for each vector, the best homes next to what is chosen in its adhesion."""
    begin = forest.bag_ptr[bag]
    split = begin + forest.bag_adhesion[bag]
    slots, rows, edges = touched(
        forest.bag_slot, begin, forest.bag_ptr[bag + 1], forest.slot_fill_ptr, forest.slot_fill, where
    )
    lead, gain, empty, spare_slot = split_wide(bag, slots, forest, residual)
    meet_ptr, meet_node, meet_child = collect_messages(
        slots, children, tries.begin, tries.end, tries.label, tries.close
    )
    fill_wide(
        slots, rows, edges, lead, gain, meet_ptr, meet_node, meet_child, children.shape[0], tries, used, empty,
        True, ways,
    )  # fmt: skip
    for e in range(split, forest.bag_ptr[bag + 1]):
        chosen[forest.slot_place[forest.bag_slot[e]]] = 0
    taken = np.uint64(0)
    for e in range(begin, split):
        taken |= chosen[forest.slot_place[forest.bag_slot[e]]]
    wide = residual.shape[1]
    picked = np.zeros(wide, np.int64)
    node = np.full(wide, -1, np.int64)
    for j in range(lead):
        bits = chosen[forest.slot_place[slots[j]]]
        while bits != 0:
            r = lowest(bits)
            bits &= bits - ONE
            x = used if node[r] < 0 else node[r] + 1
            while tries.label[x] != slots[j]:
                x = tries.close[x]
            node[r] = x
            picked[r] = 1
    for r in range(wide):
        bit = ONE << np.uint64(r)
        if taken & bit and not picked[r]:
            continue  # an adhesion vertex without fill, adjacent to all homes
        k = ways.best[node[r] - used, r] if picked[r] else ways.empty[r]
        if k == SPARE:
            chosen[forest.slot_place[spare_slot[r]]] |= bit
        while k >= 0 and ways.last[k] >= lead:
            chosen[forest.slot_place[slots[ways.last[k]]]] |= bit
            k = ways.before[k]


@kernel
def outward_wide(
    numbering: Numbering, forest: Forest, tries: WideTries, ways: Ways, residual: I64, chosen: U64, cells: I64
) -> bool:
    """Choose from the low places to the high ones after :func:`inward_wide`; False if stopped.

    ``chosen`` uint64[n], by place: bit r for vector r.
    """
    low_ptr, low = numbering.low_ptr, numbering.low
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    first, following = link_bags(forest.bag_above, forest.bag_kind)
    used = 0
    for b in range(tries.end.shape[0]):
        used = max(used, tries.end[b])
    for i in range(residual.shape[0]):
        if (i & POLL) == 0:
            cells[STEP] = i
            if cells[STOP] != 0:
                return False
        c = numbering.core[i]
        if c < 0:
            taken = np.uint64(0)
            for e in range(low_ptr[i], low_ptr[i + 1]):
                taken |= chosen[low[e]]
            chosen[i] &= ~taken
            continue
        if forest.core_top[c] != i:
            continue
        for b in range(forest.core_bag[c], forest.core_bag[c + 1]):
            if cells[STOP] != 0:
                return False
            if forest.bag_kind[b] & BAG_FILL:
                choose_wide(b, forest, senders(b, first, following), tries, used, where, residual, chosen, ways)
                continue
            taken = np.uint64(0)
            for e in range(forest.bag_ptr[b], forest.bag_ptr[b + 1]):
                p = forest.slot_place[forest.bag_slot[e]]
                if e >= forest.bag_ptr[b] + forest.bag_adhesion[b]:
                    chosen[p] &= ~taken
                taken |= chosen[p]
    return True


@kernel
def list_chosen(place: I32, chosen: U64, count: int) -> tuple[I64, U32]:
    """What each of the first ``count`` vectors chooses, ascending: (ptr int64[count + 1], vertices uint32[.])."""
    n = place.shape[0]
    mask = (ONE << np.uint64(count)) - ONE
    ptr = np.zeros(count + 1, np.int64)
    for i in range(n):
        bits = chosen[i] & mask
        while bits != 0:
            ptr[lowest(bits) + 1] += 1
            bits &= bits - ONE
    for r in range(count):
        ptr[r + 1] += ptr[r]
    write = ptr.copy()
    vertices = np.empty(ptr[count], np.uint32)
    for v in range(n):
        bits = chosen[place[v]] & mask
        while bits != 0:
            r = lowest(bits)
            vertices[write[r]] = v
            write[r] += 1
            bits &= bits - ONE
    return ptr, vertices
