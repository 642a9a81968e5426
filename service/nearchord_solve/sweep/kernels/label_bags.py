"""One bag whose states are sets with labels: what its states are made of, and what it sends where no label matters.

With two colours, and for forests, a state of at most two vertices is *plain* unless its two vertices are in one class,
or connected by what lies below.  The best values over plain adhesion parts t are few, and any function of them is

    base + sum of u_a over a in t + p_ab for t = {a, b},

so they are kept as worths of vertices and pairs, and only what other states are worth beyond that needs a table.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cliques import depth_limit
from nearchord_solve.kernels.compiled import I32, I64, U8, U64, kernel
from nearchord_solve.kernels.layout import Forest
from nearchord_solve.sweep.kernels.label_table import Sets, Table, find

ONE = np.uint64(1)


class Bag(NamedTuple):
    """One bag: what its states are made of."""

    number: int
    member: I32  # [b] vertices, ascending: adhesion first, then homes
    lead: int  # size of the adhesion
    closed: bool  # whether plain states are kept as worths; otherwise all are in the table
    edges: int  # fill edges inside
    near: U64  # [b, W] rows of the fill graph
    gain: I64  # [b] what a vertex is worth here: 0 in the adhesion
    pair: I64  # [b, b] what two vertices are worth together, by (higher, lower)
    need: U64  # [W] homes that must be chosen
    child: I64  # [C] bags below that send entries
    inside: U64  # [C, W] the adhesion of each
    plain: I64  # [C] its entry for the empty set, -1 without
    first: int  # where the values of its own adhesion's sets begin, -1 if they are in the table (see label_sets.py)
    below: I64  # [C] the same for the bags below
    choose: I64  # [.., q+1] C(n, k)
    base: int  # sum of the values of these entries
    missing: int  # how many there are not


@kernel
def _link(bag_member: I32, forest: Forest, where: I32, near: U64) -> int:
    """Fill edges inside a bag, written into ``near``; returns how many.  ``where``: places in the bag, -1 outside."""
    edges = 0
    for j in range(bag_member.shape[0]):
        v = bag_member[j]
        for g in range(forest.slot_fill_ptr[v], forest.slot_fill_ptr[v + 1]):
            i = where[forest.slot_fill[g]]
            if i >= 0:
                near[j, i >> 6] |= ONE << np.uint64(i & 63)
                near[i, j >> 6] |= ONE << np.uint64(j & 63)
                edges += 1
    return edges


@kernel
def open_bag(
    number: int, forest: Forest, later_ptr: I64, single: I64, pair: I64, must: U8, closed: bool,
    child: I64, table: Table, sets: Sets, where: I32,
) -> Bag:  # fmt: skip
    """A bag as its states need it.  ``must`` uint8[n]: vertices that have to be chosen (not looked at if closed).

    ``where`` int32[n] must be -1 everywhere and is so again on return.
    """
    begin, end = forest.bag_ptr[number], forest.bag_ptr[number + 1]
    member = forest.bag_slot[begin:end].copy()
    b = member.shape[0]
    words = (b + 63) >> 6
    lead = forest.bag_adhesion[number]
    near = np.zeros((b, words), np.uint64)
    gain = np.zeros(b, np.int64)
    worth = np.zeros((b, b), np.int64)
    need = np.zeros(words, np.uint64)
    inside = np.zeros((child.shape[0], words), np.uint64)
    plain = np.full(child.shape[0], -1, np.int64)
    below = np.empty(child.shape[0], np.int64)
    for j in range(b):
        where[member[j]] = j
    edges = _link(member, forest, where, near)
    for j in range(lead, b):
        v = member[j]
        gain[j] = single[v]
        if closed:
            for i in range(j):
                worth[j, i] = pair[later_ptr[v] + i]
        elif must[v]:
            need[j >> 6] |= ONE << np.uint64(j & 63)
    base = int(np.int64(0))
    missing = int(np.int64(0))
    for c in range(child.shape[0]):
        at = forest.bag_ptr[child[c]]
        for e in range(at, at + forest.bag_adhesion[child[c]]):
            i = where[forest.bag_slot[e]]
            inside[c, i >> 6] |= ONE << np.uint64(i & 63)
        below[c] = sets.first[child[c]]
        if below[c] >= 0:
            plain[c] = below[c] if table.sets[below[c]] >= 0 else -1
        elif not closed:
            plain[c] = find(table, child[c], member, int(np.int64(0)))
        if plain[c] >= 0:
            base += table.sets[plain[c]] if below[c] >= 0 else table.value[plain[c]]
        elif not closed:
            missing += 1
    for j in range(b):
        where[member[j]] = -1
    return Bag(
        number, member, lead, closed, edges, near, gain, worth, need, child, inside, plain, sets.first[number], below,
        sets.choose, base, missing,
    )  # fmt: skip


@kernel
def own_entry(bag: Bag, chosen: I64, count: int) -> int:
    """Where the value of a set of ``count`` vertices in an adhesion without fill stands: ``chosen`` their places."""
    entry = bag.first
    for k in range(count):
        entry += bag.choose[bag.lead, k] + bag.choose[chosen[k], k + 1]
    return int(entry)


@kernel
def most_chosen(bag: Bag, colours: int) -> int:
    """Most vertices of a state: two cliques of the fill graph make a forest."""
    size = bag.member.shape[0]
    return int(min(size, max(colours, 2) * depth_limit(size, bag.edges)))


@kernel
def collect_few(bag: Bag) -> I64:
    """The best that states of at most two vertices give for each plain part of the adhesion.

    Returns int64[lead + 1, lead + 1]: (0, 0) for the empty part, (a + 1, 0) for one vertex and (a + 1, c + 1) for two
    vertices a > c.  O(b^2).
    """
    b, lead = bag.member.shape[0], bag.lead
    few = np.zeros((lead + 1, lead + 1), np.int64)
    none = few[0, 0]
    for j in range(lead, b):
        none = max(none, bag.gain[j])
        for i in range(lead):
            few[i + 1, 0] = max(few[i + 1, 0], bag.gain[j] + bag.pair[j, i])
        for i in range(lead, j):
            none = max(none, bag.gain[i] + bag.gain[j] + bag.pair[j, i])
    few[0, 0] = none
    return few


@kernel
def send_few(bag: Bag, few: I64, later_ptr: I64, later: I32, single: I64, pair: I64) -> int:
    """Turn the best values for plain parts into worths of the adhesion; returns what they add to the base."""
    none = few[0, 0]
    for k in range(bag.lead):
        a = bag.member[k]
        one = few[k + 1, 0]
        single[a] += one - none
        e = later_ptr[a]
        for f in range(k):
            while later[e] != bag.member[f]:
                e += 1
            pair[e] += few[k + 1, f + 1] - one - few[f + 1, 0] + none
    return int(none)


@kernel
def relate_entries(bag: Bag, table: Table, begin: int, few: I64, where: I32) -> None:
    """What entries from ``begin`` on are worth beyond the worths that :func:`send_few` leaves.

    ``where`` int32[n] must be -1 everywhere and is so again on return.
    """
    for k in range(bag.lead):
        where[bag.member[k]] = k + 1
    none = few[0, 0]
    for e in range(begin, table.used[0]):
        beyond = table.value[e] - none
        at = table.begin[e]
        for i in range(table.length[e]):
            a = where[table.pool[at + i]]
            beyond -= few[a, 0] - none
            for j in range(i):
                c = where[table.pool[at + j]]
                beyond -= few[a, c] - few[a, 0] - few[c, 0] + none
        table.value[e] = beyond
    for k in range(bag.lead):
        where[bag.member[k]] = -1
