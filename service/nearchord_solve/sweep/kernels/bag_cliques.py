"""The heaviest clique over all bags: every clique of G lies in a bag of its triangulation."""

import numpy as np

from nearchord_solve.kernels.cells import BAGS_DONE, POLL, STEP, STOP
from nearchord_solve.kernels.cliques import touched
from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.layout import BAG_FILL, Forest
from nearchord_solve.sweep.kernels.forests import symmetric
from nearchord_solve.sweep.kernels.stable import heaviest_stable


@kernel
def heaviest_row(low_ptr: I64, low: I32, core: I32, weight: I64, cells: I64) -> tuple[bool, int, int]:
    """The heaviest clique K(i) outside fill cores: (False if stopped, weight, place or -1), ties to the lowest place.

    ``weight`` int64[n] by place.  With ``core`` all -1 in an arbitrary numbering the weight is an upper bound of all
    cliques: each lies in K(i) of its highest place.  O(n + m).
    """
    best = 0
    place = -1
    for i in range(core.shape[0]):
        if (i & POLL) == 0:
            cells[STEP] = i
            if cells[STOP] != 0:
                return False, best, place
        if core[i] >= 0:
            continue
        total = weight[i]
        for e in range(low_ptr[i], low_ptr[i + 1]):
            total += weight[low[e]]
        if total > best:
            best = total
            place = i
    return True, best, place


@kernel
def heaviest_in_bags(
    forest: Forest, weight: I64, least: int, most_nodes: int, chosen: U8, cells: I64
) -> tuple[int, int, int]:  # fmt: skip
    """The heaviest clique of G in the bags of all fill cores, if heavier than ``least``.

    ``chosen`` uint8[n], by place, receives it.  Returns (its weight or ``least``, bound, nodes of the search); the
    bound is the weight if at most ``most_nodes`` nodes were enough and nobody said stop.
    """
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    record = least
    bound = least
    nodes = 0
    for b in range(forest.bag_kind.shape[0]):
        begin, end = forest.bag_ptr[b], forest.bag_ptr[b + 1]
        slots = np.empty(0, np.int32)
        total = 0
        for e in range(begin, end):
            total += weight[forest.slot_place[forest.bag_slot[e]]]
        gain = 0
        best = np.zeros(0, np.uint8)
        reach = total
        if total > record and forest.bag_kind[b] & BAG_FILL:
            slots, rows, _ = touched(forest.bag_slot, begin, end, forest.slot_fill_ptr, forest.slot_fill, where)
            loads = np.empty(slots.shape[0], np.int64)
            for j in range(slots.shape[0]):
                loads[j] = weight[forest.slot_place[slots[j]]]
            rest = total - loads.sum()
            best = np.zeros(slots.shape[0], np.uint8)
            gain, more, used = heaviest_stable(
                symmetric(rows), loads, max(record - rest, np.int64(0)), most_nodes - nodes, best, cells
            )
            nodes += used
            reach = rest + more
            total = rest + gain
        bound = max(bound, reach)
        if total > record:
            record = total
            chosen[:] = 0
            j = 0
            for e in range(begin, end):
                s = forest.bag_slot[e]
                if j < slots.shape[0] and slots[j] == s:
                    chosen[forest.slot_place[s]] = best[j]
                    j += 1
                else:
                    chosen[forest.slot_place[s]] = 1
        cells[BAGS_DONE] = b + 1
    return record, max(record, bound), nodes


@kernel
def grow_clique(ptr: I64, adj: I32, sequence: I64, chosen: U8) -> int:
    """A clique by greed: each vertex of ``sequence`` joins if it is adjacent to all before it; returns its size.

    ``chosen`` uint8[n] is overwritten.  O(n + m).
    """
    chosen[:] = 0
    size = 0
    for v in sequence:
        count = 0
        if size > 0 and ptr[v + 1] - ptr[v] >= size:
            for e in range(ptr[v], ptr[v + 1]):
                count += chosen[adj[e]]
        if count == size:
            chosen[v] = 1
            size += 1
    return size
