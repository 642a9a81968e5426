"""Bags without fill where all states are in tables: q colours, with q > 2 or weights that leave no room for worths.

Such a bag is a clique of G, so its classes are single vertices: a state is a set of at most q of its vertices, and what
bags below send over an adhesion without fill depends on the set of its chosen vertices alone.  These values stand in
``Table.sets``, for each adhesion in the order of size, then of the combinatorial number

    C(p_1, 1) + ... + C(p_k, k)    for places p_1 < ... < p_k in the adhesion,

which counts the sets of k places that are smaller when compared from their highest place down.  So no set is searched
for: when a vertex at place p of an adhesion of a vertices, above all k chosen ones, joins them, the entry moves on by
C(a, k) to the next size, and by C(p, k + 1) there.

States are walked in depth-first order, so that each differs from the one before by what one vertex adds.  In all
O(1) for each state and each bag below whose adhesion holds the vertex that joined last.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U8, inlined, kernel
from nearchord_solve.kernels.layout import Forest
from nearchord_solve.sweep.kernels.label_choice import free_colour
from nearchord_solve.sweep.kernels.label_goals import BELIEVE, CHOOSE, COLLECT, Belief
from nearchord_solve.sweep.kernels.label_table import Sets


class Below(NamedTuple):
    """The bags below a bag, and the part of the state at hand in the adhesion of each."""

    ptr: I64  # [b+1] which of them hold each vertex of the bag
    child: I64
    place: I64  # the place that it has in the adhesion
    lead: I64  # [C] sizes of the adhesions
    held: I64  # [C] how many vertices that are
    entry: I64  # [C] its value


class Walk(NamedTuple):
    """A set and those that it grew from: row d is about its first d vertices."""

    chosen: I64  # [q+1] places in the bag, ascending; behind them the one tried last
    worth: I64  # [q+1] homes, and what is below
    lacking: I64  # [q+1] homes that must be chosen and are not, and bags below for which the part is impossible
    part: I64  # [q+1] entry of the part in the bag's own adhesion


@inlined
def _open_below(number: int, forest: Forest, child: I64, first: I64, where: I32) -> Below:
    """What is below a bag, no vertex chosen.  ``where`` int32[n] must be -1 everywhere and is so again on return."""
    begin, end = forest.bag_ptr[number], forest.bag_ptr[number + 1]
    ptr = np.zeros(end - begin + 1, np.int64)
    lead = np.empty(child.shape[0], np.int64)
    entry = np.empty(child.shape[0], np.int64)
    for e in range(begin, end):
        where[forest.bag_slot[e]] = e - begin
    for c in range(child.shape[0]):
        lead[c] = forest.bag_adhesion[child[c]]
        entry[c] = first[child[c]]
        at = forest.bag_ptr[child[c]]
        for p in range(lead[c]):
            ptr[where[forest.bag_slot[at + p]] + 1] += 1
    for j in range(end - begin):
        ptr[j + 1] += ptr[j]
    which = np.empty(ptr[end - begin], np.int64)
    place = np.empty(ptr[end - begin], np.int64)
    write = ptr.copy()
    for c in range(child.shape[0]):
        at = forest.bag_ptr[child[c]]
        for p in range(lead[c]):
            j = where[forest.bag_slot[at + p]]
            which[write[j]] = c
            place[write[j]] = p
            write[j] += 1
    for e in range(begin, end):
        where[forest.bag_slot[e]] = -1
    return Below(ptr, which, place, lead, np.zeros(child.shape[0], np.int64), entry)


@inlined
def _join(walk: Walk, below: Below, depth: int, j: int, lead: int, value: I64, choose: I64, keep: bool) -> None:
    """Write row ``depth + 1``: the set of row ``depth`` with the vertex at place ``j``, above all others.

    ``value`` int64[D]: of parts; those below move on only if ``keep``.  What the vertex itself is worth, and whether it
    must be chosen, is left out.
    """
    worth, lacking = walk.worth[depth], walk.lacking[depth]
    for e in range(below.ptr[j], below.ptr[j + 1]):
        c = below.child[e]
        k = below.held[c]
        old = value[below.entry[c]]
        entry = below.entry[c] + choose[below.lead[c], k] + choose[below.place[e], k + 1]
        new = value[entry]
        if keep:
            below.entry[c] = entry
            below.held[c] = k + 1
        worth += max(new, 0) - max(old, 0)
        lacking += int(new < 0) - int(old < 0)
    walk.chosen[depth] = j
    walk.worth[depth + 1] = worth
    walk.lacking[depth + 1] = lacking
    walk.part[depth + 1] = walk.part[depth]
    if j < lead:
        walk.part[depth + 1] += choose[lead, depth] + choose[j, depth + 1]


@inlined
def _leave(below: Below, j: int, choose: I64) -> None:
    """Take the vertex at place ``j``, the highest of the set, from the parts below."""
    for e in range(below.ptr[j], below.ptr[j + 1]):
        c = below.child[e]
        k = below.held[c] - 1
        below.entry[c] -= choose[below.lead[c], k] + choose[below.place[e], k + 1]
        below.held[c] = k


@inlined
def _tell(member: I32, lead: int, walk: Walk, below: Below, depth: int, belief: Belief) -> None:
    """Tell the total of a set to its vertices, to homes that it leaves out, and to the bags below."""
    total = belief.sets[walk.part[depth]] + walk.worth[depth]
    for i in range(depth):
        v = member[walk.chosen[i]]
        belief.chosen[v] = max(belief.chosen[v], total)
    for j in range(lead, member.shape[0]):
        if belief.kept[member[j]] and total > belief.left[member[j]]:
            outside = True
            for i in range(depth):
                outside = outside and walk.chosen[i] != j
            if outside:
                belief.left[member[j]] = total
    for c in range(below.entry.shape[0]):
        belief.sets[below.entry[c]] = max(belief.sets[below.entry[c]], total)


@inlined
def _colour_homes(member: I32, homes: I64, colour: U8) -> None:
    """Choose homes, each in a class of its own."""
    taken = 0
    for v in member:
        if colour[v]:
            taken |= 1 << colour[v]
    for j in homes:
        free = free_colour(taken)
        colour[member[j]] = free
        taken |= 1 << free


@kernel
def visit_sets(
    mode: int, number: int, forest: Forest, child: I64, sets: Sets, single: I64, must: U8, value: I64, belief: Belief,
    colour: U8, where: I32, cells: I64,
) -> None:  # fmt: skip
    """Go through the states of a bag without fill: COLLECT, CHOOSE next to what is chosen, or BELIEVE.

    ``child`` int64[C]: all bags below; ``value`` int64[D]: of the sets of all adhesions, -1 where impossible; the bag
    writes its own to COLLECT.  To BELIEVE, ``belief.sets`` must say what lies outside.  ``where`` int32[n] must be -1
    everywhere and is so again on return.  Stops when told to.
    """
    choose = sets.choose
    most = choose.shape[1] - 1
    member = forest.bag_slot[forest.bag_ptr[number] : forest.bag_ptr[number + 1]]
    lead = forest.bag_adhesion[number]
    below = _open_below(number, forest, child, sets.first, where)
    walk = Walk(
        np.full(most + 1, -1, np.int64), np.zeros(most + 1, np.int64), np.zeros(most + 1, np.int64),
        np.full(most + 1, sets.first[number], np.int64),
    )  # fmt: skip
    kept = most + 1 if mode == BELIEVE else most  # otherwise nobody asks for the parts below of sets of q vertices
    for c in range(child.shape[0]):
        walk.worth[0] += max(value[below.entry[c]], 0)
        walk.lacking[0] += int(value[below.entry[c]] < 0)
    for j in range(lead, member.shape[0]):
        walk.lacking[0] += must[member[j]]
    low = lead if mode == CHOOSE else 0
    fixed = np.empty(low, np.int64)
    start = 0
    for j in range(low):
        if colour[member[j]]:
            fixed[start] = j
            start += 1
    best = -1
    homes = fixed[:0]
    depth = 0
    fresh = True
    while (depth >= start or fresh) and depth >= 0 and cells[STOP] == 0:
        if fresh and depth >= start and walk.lacking[depth] == 0:
            if mode == COLLECT:
                value[walk.part[depth]] = max(value[walk.part[depth]], walk.worth[depth])
            elif mode == BELIEVE:
                _tell(member, lead, walk, below, depth, belief)
            elif walk.worth[depth] > best:
                best = walk.worth[depth]
                homes = walk.chosen[start:depth].copy()
        j = fixed[depth] if depth < start else max(walk.chosen[depth] + 1, low)
        fresh = depth < most and j < member.shape[0]
        if not fresh:
            depth -= 1
            if depth >= start and depth + 1 < kept:
                _leave(below, walk.chosen[depth], choose)
            continue
        _join(walk, below, depth, j, lead, value, choose, depth + 1 < kept)
        depth += 1
        if j >= lead:
            walk.worth[depth] += single[member[j]]
            walk.lacking[depth] -= must[member[j]]
        walk.chosen[depth] = j
    if mode == CHOOSE:
        _colour_homes(member, homes, colour)
