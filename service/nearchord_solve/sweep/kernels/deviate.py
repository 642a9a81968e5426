"""What else could have been chosen in a bag, and what follows when another choice is made somewhere.

The outward pass of :mod:`.passes` goes through *points*, in this order: places outside fill cores, and the bags of a
core when its lowest place comes up.  ``point`` int64[P] says what each is: a place i as i, a bag b as -1 - b.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.layout import Forest, Numbering, Tries
from nearchord_solve.sweep.kernels.walk import begin_walk, join, next_state, open_bag


class Points(NamedTuple):
    """The points of a graph and what each place has a say in."""

    point: I64  # [P]
    place_point: I32  # [n] point of a place, -1 for those in cores
    bag_point: I32  # [B] point of a bag
    near_ptr: I64  # [n+1] neighbours of each vertex of the graph
    near: I32
    place: I32  # [n] place of each vertex
    held_ptr: I64  # [n+1] bags that hold each place
    held: I32


@kernel
def _sink(heap: I32, size: int, value: I64) -> None:
    """Let the top of a heap of rows, least value first, sink to where it belongs."""
    at = 0
    while 2 * at + 1 < size:
        below = 2 * at + 1
        if below + 1 < size and value[heap[below + 1]] - value[heap[below]] < 0:
            below += 1
        if value[heap[at]] - value[heap[below]] <= 0:
            return
        heap[at], heap[below] = heap[below], heap[at]
        at = below


@kernel
def _offer(value: int, heap: I32, size: int, values: I64) -> tuple[int, int]:
    """A row for a value among the best so far, -1 if it is not; with the new size of the heap.

    Rows are given out in turn until all are in use; then the one of the least value is given anew to a better one.
    """
    if size < values.shape[0]:
        values[size] = value
        heap[size] = size
        at = size
        while at > 0 and values[heap[(at - 1) >> 1]] - value > 0:
            heap[at] = heap[(at - 1) >> 1]
            at = (at - 1) >> 1
            heap[at] = size
        return size, size + 1
    if value - values[heap[0]] <= 0:
        return -1, size
    row = heap[0]
    values[row] = value
    _sink(heap, size, values)
    return row, size


@kernel
def best_states(
    bag: int, forest: Forest, children: I32, tries: Tries, where: I32, residual: I64, chosen: U8,
    heap: I32, values: I64, sizes: I64,
) -> tuple[int, I32]:  # fmt: skip
    """The best choices of homes of a bag with fill, next to what is chosen in its adhesion.

    ``chosen`` uint8[n], by place.  Fills ``values`` and ``sizes`` int64[most], in no order, with the help of ``heap``
    int32[most]; values count from a common base and may have wrapped, but their differences are right.  Returns (how
    many choices, their places int32[most, ..]).  O(states * log most).
    """
    begin = forest.bag_ptr[bag]
    split = begin + forest.bag_adhesion[bag]
    opened = open_bag(bag, forest, children, tries, where, residual)
    slots = opened.slots
    walk = begin_walk(opened, children.shape[0], opened.lead)
    deepest = walk.picked.shape[0]
    homes = np.empty((values.shape[0], deepest), np.int32)
    _, size = _offer(int(np.int64(0)), heap, int(np.int64(0)), values)
    sizes[0] = 0
    taken = 0
    j = 0
    for e in range(begin, split):
        here = j < opened.lead and slots[j] == forest.bag_slot[e]
        if chosen[forest.slot_place[forest.bag_slot[e]]]:
            if not here:  # adjacent to the whole bag
                return 1, homes
            taken += 1
            join(int(np.int64(j)), opened, tries, walk)
            for w in range(opened.rows.shape[1]):
                walk.open_[0, w] &= opened.rows[j, w]
        if here:
            j += 1
    for e in range(split, forest.bag_ptr[bag + 1]):
        p = forest.slot_place[forest.bag_slot[e]]
        if j < slots.shape[0] and slots[j] == forest.bag_slot[e]:
            j += 1
        elif taken == 0:
            row, size = _offer(residual[p], heap, size, values)
            if row >= 0:
                sizes[row] = 1
                homes[row, 0] = p
    value = np.empty(deepest, np.int64)
    value[0] = 0
    while True:
        j, more = next_state(opened, tries, walk)
        if j < 0:
            return size, homes
        depth = walk.at[0]
        value[depth] = value[depth - 1] + more + opened.gain[j]
        row, size = _offer(value[depth], heap, size, values)
        if row >= 0:
            sizes[row] = depth
            for d in range(depth):
                homes[row, d] = forest.slot_place[slots[walk.picked[d + 1]]]


@kernel
def _mark(p: int, after: int, points: Points, numbering: Numbering, dirty: U8) -> int:
    """Mark the points after ``after`` that place p has a say in; returns how many were not marked before."""
    fresh = 0
    v = numbering.order[p]
    for e in range(points.near_ptr[v], points.near_ptr[v + 1]):
        at = points.place_point[points.place[points.near[e]]]
        if at > after and dirty[at] == 0:
            dirty[at] = 1
            fresh += 1
    for e in range(points.held_ptr[p], points.held_ptr[p + 1]):
        at = points.bag_point[points.held[e]]
        if at > after and dirty[at] == 0:
            dirty[at] = 1
            fresh += 1
    return fresh


@kernel
def mark_all(changed: I32, after: int, points: Points, numbering: Numbering, dirty: U8, state: I64) -> None:
    """Mark the points after ``after`` that places have a say in; ``state`` int64[2] holds how many are marked."""
    for e in range(changed.shape[0]):
        state[0] += _mark(int(np.int64(changed[e])), after, points, numbering, dirty)


@kernel
def follow(
    start: int, points: Points, numbering: Numbering, residual: I64, dirty: U8, chosen: U8, met: I32, free: U8,
    state: I64,
) -> int:  # fmt: skip
    """Choose anew at the marked points after ``start``, as the outward pass would, up to the first that is a bag.

    ``chosen`` uint8[n], by place, is changed, and what that has a say in is marked.  The points looked at are written
    behind the first ``state[1]`` of ``met`` int32[P]; ``free`` uint8[P] tells of a place whether nothing around it
    forbade it, and is 1 for a bag.  ``state[0]``: points marked.  Returns the point of the bag, -1 if none is left.
    """
    at = start
    while state[0] > 0:
        at += 1
        if dirty[at] == 0:
            continue
        dirty[at] = 0
        state[0] -= 1
        i = points.point[at]
        open_ = 1
        if i >= 0:
            for e in range(numbering.low_ptr[i], numbering.low_ptr[i + 1]):
                if chosen[numbering.low[e]]:
                    open_ = 0
                    break
        met[state[1]] = at
        free[state[1]] = open_
        state[1] += 1
        if i < 0:
            return at
        wanted = open_ if residual[i] > 0 else 0
        if chosen[i] != wanted:
            chosen[i] = wanted
            state[0] += _mark(int(np.int64(i)), at, points, numbering, dirty)
    return -1
