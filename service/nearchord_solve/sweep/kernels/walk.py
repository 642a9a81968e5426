"""One bag with fill as the passes left it, and a walk through its states.

For whoever goes through a bag once more after :mod:`.passes`: states come in the order of :mod:`.tables`, depth first
by ascending slots.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cliques import depth_limit, touched
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest
from nearchord_solve.kernels.layout import Forest, Tries
from nearchord_solve.sweep.kernels.passes import split_bag
from nearchord_solve.sweep.kernels.tables import collect_messages, extend, retract

ONE = np.uint64(1)


class Opened(NamedTuple):
    """A bag with fill: its touched vertices, and the messages that meet them."""

    slots: I32  # [t] touched slots, ascending: adhesion first, then homes
    rows: U64  # [t, W] upper rows of the fill graph
    edges: int
    lead: int  # touched slots in the adhesion
    gain: I64  # [t] what a home is worth: 0 in the adhesion
    spare: int  # the best that a home without fill is worth, or 0
    meet_ptr: I64  # [t+1] see collect_messages
    meet_node: I64
    meet_child: I32


class Walk(NamedTuple):
    """Where a walk stands."""

    open_: U64  # [depth, W] what may still join at each depth
    picked: I64  # [depth] touched vertex that joined at each depth, from 1 on
    current: I64  # [children] node of each message, -1: not met
    undo: I64
    at: I64  # [2] depth, length of undo


@kernel
def open_bag(bag: int, forest: Forest, children: I32, tries: Tries, where: I32, residual: I64) -> Opened:
    """The bag and what meets it.  ``where`` int32[slots] must be -1 everywhere and is so again on return."""
    slots, rows, edges = touched(
        forest.bag_slot, forest.bag_ptr[bag], forest.bag_ptr[bag + 1], forest.slot_fill_ptr, forest.slot_fill, where
    )
    lead, gain, spare, _ = split_bag(bag, slots, forest, residual)
    meet_ptr, meet_node, meet_child = collect_messages(
        slots, children, tries.begin, tries.end, tries.label, tries.close
    )
    return Opened(slots, rows, edges, lead, gain, spare, meet_ptr, meet_node, meet_child)


@kernel
def begin_walk(opened: Opened, children: int, first: int) -> Walk:
    """A walk through the states of vertices from ``first`` on; it stands at the empty one."""
    count, words = opened.rows.shape
    deepest = depth_limit(count, opened.edges) + 1
    open_ = np.empty((deepest, words), np.uint64)
    for w in range(words):
        open_[0, w] = 0
    for j in range(first, count):
        open_[0, j >> 6] |= ONE << np.uint64(j & 63)
    current = np.empty(children, np.int64)
    for q in range(children):
        current[q] = -1
    at = np.empty(2, np.int64)
    at[0] = 0
    at[1] = 0
    undo = np.empty(opened.meet_node.shape[0] + 1, np.int64)
    return Walk(open_, np.empty(deepest, np.int64), current, undo, at)


@kernel
def join(j: int, opened: Opened, tries: Tries, walk: Walk) -> int:
    """Have the messages that meet vertex j know of it; returns what they add."""
    more, undone = extend(
        j, opened.slots[j], opened.meet_ptr, opened.meet_node, opened.meet_child,
        tries.label, tries.close, tries.delta, walk.current, walk.undo, walk.at[1],
    )  # fmt: skip
    walk.at[1] = undone
    return int(more)


@kernel
def next_state(opened: Opened, tries: Tries, walk: Walk) -> tuple[int, int]:
    """Go on to the next state: the vertex that joined last, and what messages add by it; (-1, 0) at the end."""
    words = opened.rows.shape[1]
    depth = walk.at[0]
    while depth >= 0:
        w = 0
        while w < words and walk.open_[depth, w] == 0:
            w += 1
        if w < words:
            j = (w << 6) + lowest(walk.open_[depth, w])
            walk.open_[depth, w] &= walk.open_[depth, w] - ONE
            more = join(j, opened, tries, walk)
            depth += 1
            for y in range(words):
                walk.open_[depth, y] = walk.open_[depth - 1, y] & opened.rows[j, y]
            walk.picked[depth] = j
            walk.at[0] = depth
            return j, more
        if depth > 0:
            walk.at[1] = retract(
                walk.picked[depth], opened.meet_ptr, opened.meet_child, walk.current, walk.undo, walk.at[1]
            )
        depth -= 1
    return -1, 0
