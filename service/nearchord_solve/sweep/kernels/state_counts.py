"""States of the dynamic programs over all bags of the fill cores."""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.cliques import count_cliques, touched
from nearchord_solve.kernels.compiled import I32, I64, U8, U64, kernel
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, Forest
from nearchord_solve.sweep.kernels.classes import count_classes
from nearchord_solve.sweep.kernels.forests import Touched, count_forests, symmetric
from nearchord_solve.sweep.kernels.joints import joint_bytes, mixed, no_joints
from nearchord_solve.sweep.kernels.passes import link_bags

ONE = np.uint64(1)


@kernel
def choices(n: int, k: int) -> int:
    """C(n, k) for k <= 4; n below 2**20, or the product may overflow."""
    if k == 0:
        return 1
    if k == 1:
        return n
    if k == 2:
        return n * (n - 1) // 2
    if k == 3:
        return n * (n - 1) * (n - 2) // 6
    return n * (n - 1) // 2 * (n - 2) // 3 * (n - 3) // 4


@kernel
def class_states(found: I64, others: int, colours: int) -> int:
    """Sum over j <= q of C(others, j) (N_0 + ... + N_{q-j}), see :mod:`.classes`."""
    total = 0
    for j in range(colours + 1):
        inside = 0
        for i in range(colours - j + 1):
            inside += found[i]
        total += choices(others, j) * inside
    return total


@kernel
def colour_states(forest: Forest, colours: int, most: int, cells: I64) -> int:
    """States of ``colours`` (1 to 4) disjoint independent sets; about ``most`` or more if above it.

    With one or two colours bags without fill are settled by a formula and have none, with more all bags count.
    """
    total = 0
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    for b in range(forest.bag_kind.shape[0]):
        if colours <= 2 and not forest.bag_kind[b] & BAG_FILL:
            continue
        begin, end = forest.bag_ptr[b], forest.bag_ptr[b + 1]
        found = np.zeros(colours + 1, np.int64)
        found[0] = 1
        inside = 0
        if forest.bag_kind[b] & BAG_FILL:
            slots, rows, edges = touched(forest.bag_slot, begin, end, forest.slot_fill_ptr, forest.slot_fill, where)
            found = count_classes(rows, edges, colours, most - total, cells)
            inside = slots.shape[0]
        total += class_states(found, end - begin - inside, colours)
        if total > most or cells[STOP] != 0:
            break
    return total


@kernel
def _below(bag: int, slots: I32, first: I32, following: I32, busy: U8, forest: Forest, where: I32) -> tuple[I32, U64]:
    """The bags below a bag that have joints, int32[C], and which touched slots their adhesions hold, uint64[C, W].

    ``where`` int32[slots] must be -1 everywhere and is so again on return.
    """
    found = 0
    child = first[bag]
    while child >= 0:
        found += busy[child]
        child = following[child]
    children = np.empty(found, np.int32)
    inside = np.zeros((found, (slots.shape[0] + 63) >> 6), np.uint64)
    for i in range(slots.shape[0]):
        where[slots[i]] = i
    found = 0
    child = first[bag]
    while child >= 0:
        if busy[child]:
            children[found] = child
            begin = forest.bag_ptr[child]
            for e in range(begin, begin + forest.bag_adhesion[child]):
                i = where[forest.bag_slot[e]]
                if i >= 0:
                    inside[found, i >> 6] |= ONE << np.uint64(i & 63)
            found += 1
        child = following[child]
    for i in range(slots.shape[0]):
        where[slots[i]] = -1
    return children, inside


@kernel
def forest_states(forest: Forest, most: int, most_bytes: int, cells: I64) -> tuple[int, bool]:
    """States of the forest program in bags with fill, and whether these are all.

    Counting ends above ``most``, when told to, or when the joints take more than ``most_bytes``.
    """
    total = 0
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    first, following = link_bags(forest.bag_above, forest.bag_kind)
    busy = np.zeros(forest.bag_kind.shape[0], np.uint8)
    joints = no_joints(64)
    for b in range(forest.bag_kind.shape[0] - 1, -1, -1):
        begin, end = forest.bag_ptr[b], forest.bag_ptr[b + 1]
        if not forest.bag_kind[b] & BAG_FILL:
            continue
        slots, rows, edges = touched(forest.bag_slot, begin, end, forest.slot_fill_ptr, forest.slot_fill, where)
        t = slots.shape[0]
        sends = forest.bag_kind[b] & ADHESION_FILL != 0
        lead = 0
        if sends:
            while lead < t and slots[lead] <= forest.bag_slot[begin + forest.bag_adhesion[b] - 1]:
                lead += 1
        hub = end - begin - forest.bag_adhesion[b] > t - lead
        children, inside = _below(b, slots, first, following, busy, forest, where)
        others = end - begin - t
        total += choices(others, 2)
        total += others * (1 + t + count_cliques(rows, t, edges, most - total, cells))
        known = joints.used[0]
        code = np.empty(t, np.uint64)
        for i in range(t):
            code[i] = mixed(np.uint64(1), slots[i])
        bag = Touched(b, code, symmetric(rows), lead, sends, hub, children, inside)
        joints, more = count_forests(bag, edges, most - total, most_bytes, joints, cells)
        total += more
        busy[b] = joints.used[0] > known
        if total > most or cells[STOP] != 0 or joint_bytes(joints) > most_bytes:
            return total, False
    return total, True
