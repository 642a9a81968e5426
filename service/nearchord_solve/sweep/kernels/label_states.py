"""The states of one bag whose states are sets with labels, each completed by what the bags below add to it.

Colours: a state goes with the entries of the bags below that have the same classes on the adhesion.

Forests: an entry of a bag below says which vertices of its adhesion are connected by what lies below, *without* the
edges inside the adhesion: two bags below that share such an edge would close a false cycle with it otherwise.  A state
is taken with one entry of each bag below; every group that such an entry connects must hit distinct trees of what is
connected so far, edges of the bag included, and joins them.  What the bag sends up is again without the edges inside
its own adhesion.  On an adhesion without fill at most two vertices are chosen, an edge of G, so nothing connects them.

Where plain states are kept as worths (see :mod:`.label_bags`) they have no entries and add nothing here.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, ones
from nearchord_solve.kernels.words import holds
from nearchord_solve.sweep.kernels.label_bags import Bag, most_chosen
from nearchord_solve.sweep.kernels.label_goals import Goal, lead_of, name_labels, reach
from nearchord_solve.sweep.kernels.label_search import Search, add_vertex, is_plain, join, new_search, next_vertex
from nearchord_solve.sweep.kernels.label_table import Table, find, labelled

ONE = np.uint64(1)
END, UNTRIED, PLAIN = -1, -2, -3  # in place of an entry: there is none; none was tried; the plain one


class Ways(NamedTuple):
    """Room for completing one state: a row for each bag below that it meets, and one more."""

    meets: I64  # which bags below
    where: I32  # [C+1, D] places of the key in the state
    wanted: I32  # [C+1, D] its labels
    length: I64  # of the key
    head: I32  # first entry of the chain
    current: I32
    value: I64
    whole: I32  # [C+1, D] trees with the edges of the adhesion
    tied: I32  # [C+1, D] trees without
    picks: I64  # [C] the entry taken of each bag below
    key: I32  # [D]
    label: I32
    name: I32
    names: I32


@kernel
def _new_ways(children: int, room: int) -> Ways:
    rows = children + 1
    return Ways(
        np.empty(rows, np.int64), np.empty((rows, room), np.int32), np.empty((rows, room), np.int32),
        np.zeros(rows, np.int64),
        np.empty(rows, np.int32), np.empty(rows, np.int32), np.empty(rows, np.int64), np.empty((rows, room), np.int32),
        np.empty((rows, room), np.int32), np.empty(children, np.int64), np.empty(room, np.int32),
        np.empty(room, np.int32), np.empty(room, np.int32), np.empty(room, np.int32),
    )  # fmt: skip


@kernel
def _meets(bag: Bag, search: Search, size: int, c: int) -> bool:
    """Whether a state has vertices in the adhesion of bag ``c`` below."""
    common = np.uint64(0)
    for w in range(bag.inside.shape[1]):
        common |= bag.inside[c, w] & search.set_[size, w]
    return bool(common != 0)


@kernel
def _key(bag: Bag, search: Search, size: int, c: int, where: I32, key: I32, label: I32) -> int:
    """The part of a state in the adhesion of bag ``c`` below: its places, vertices and labels; returns its length."""
    length = int(np.int64(0))
    for i in range(size):
        if holds(bag.inside[c], search.chosen[i]):
            where[length] = i
            key[length] = bag.member[search.chosen[i]]
            label[length] = search.label[i]
            length += 1
    return length


@kernel
def _entry_below(bag: Bag, search: Search, size: int, c: int) -> int:
    """Where bag ``c`` below, whose adhesion has no fill, keeps the value of the part of a state in it."""
    lead = int(np.int64(0))
    for w in range(bag.inside.shape[1]):
        lead += ones(bag.inside[c, w])
    entry = bag.below[c]
    count = int(np.int64(0))
    for i in range(size):
        j = search.chosen[i]
        if holds(bag.inside[c], j):
            place = ones(bag.inside[c, j >> 6] & ((ONE << np.uint64(j & 63)) - ONE))
            for w in range(j >> 6):
                place += ones(bag.inside[c, w])
            entry += bag.choose[lead, count] + bag.choose[place, count + 1]
            count += 1
    return int(entry)


@kernel
def _meet(bag: Bag, table: Table, search: Search, ways: Ways, size: int, forest: bool) -> tuple[int, int, bool]:
    """The bags below that have entries for a state, into ``ways``.

    Returns (how many, what the state is worth with none of them, whether all others go with it).
    """
    rest = search.own[size] + bag.base
    missing = bag.missing
    depth = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
    for c in range(bag.child.shape[0]):
        ways.picks[c] = bag.plain[c]
        if not _meets(bag, search, size, c):
            continue
        if bag.below[c] >= 0:
            entry = _entry_below(bag, search, size, c)
            rest += table.sets[entry] - (table.sets[bag.plain[c]] if bag.plain[c] >= 0 else 0)
            missing += int(table.sets[entry] < 0) - int(bag.plain[c] < 0)
            ways.picks[c] = entry
            continue
        length = _key(bag, search, size, c, ways.where[depth], ways.key, ways.label)
        if bag.closed and length < 2:
            continue
        name_labels(ways.label, length, ways.wanted[depth], ways.names)
        if bag.closed and not forest and length == 2 and ways.wanted[depth, 1] == 1:
            continue
        head = find(table, bag.child[c], ways.key, length)
        if bag.closed and forest and length == 2 and head < 0:
            continue
        if not bag.closed and bag.plain[c] < 0:
            missing -= 1
        elif not bag.closed:
            rest -= table.value[bag.plain[c]]
        ways.meets[depth] = c
        ways.length[depth] = length
        ways.head[depth] = head
        depth += 1
    return depth, rest, missing == 0


@kernel
def _graft(table: Table, entry: int, where: I32, length: int, size: int, whole: I32, tied: I32) -> bool:
    """Join what an entry connects; False if that closes a cycle.  ``where``: places of its key in the state."""
    at = table.begin[entry] + length
    for i in range(1, length):
        j = i - 1  # the last before of the same group
        while j >= 0 and table.pool[at + j] != table.pool[at + i]:
            j -= 1
        if j >= 0:
            if whole[where[i]] == whole[where[j]]:
                return False
            join(whole, size, where[i], where[j])
            join(tied, size, where[i], where[j])
    return True


@kernel
def _fits(table: Table, ways: Ways, entry: int, level: int, size: int, forest: bool) -> bool:
    """Whether an entry goes with what is connected in row ``level``; what it connects is joined in the next row."""
    length = ways.length[level]
    if forest:
        for i in range(size):
            ways.whole[level + 1, i] = ways.whole[level, i]
            ways.tied[level + 1, i] = ways.tied[level, i]
        if entry == PLAIN:
            return True
        return _graft(table, entry, ways.where[level], length, size, ways.whole[level + 1], ways.tied[level + 1])
    return labelled(table, entry, ways.wanted[level], length) == entry


@kernel
def _try_entry(bag: Bag, table: Table, ways: Ways, level: int, size: int, forest: bool) -> bool:
    """Move on to the next entry of the bag below at ``level`` that goes with the state; False if there is none."""
    while True:
        entry = ways.current[level]
        if entry == UNTRIED and bag.closed and forest and ways.length[level] == 2:
            entry = PLAIN
        elif entry < 0:
            entry = ways.head[level]
        else:
            entry = table.following[entry]
        if entry == END:
            return False
        ways.current[level] = entry
        if _fits(table, ways, entry, level, size, forest):
            ways.picks[ways.meets[level]] = max(entry, -1)
            ways.value[level + 1] = ways.value[level] + (table.value[entry] if entry >= 0 else 0)
            return True


@kernel
def _complete(
    bag: Bag, table: Table, search: Search, ways: Ways, goal: Goal, size: int, forest: bool, most: int
) -> tuple[Table, int]:
    """Complete a state by entries of the bags below in all ways that go together; returns (table, how many)."""
    depth, rest, possible = _meet(bag, table, search, ways, size, forest)
    found = int(np.int64(0))
    level = int(np.int64(0))
    if not possible:
        return table, found
    lead = lead_of(bag, search, size)
    for i in range(size):
        if forest:
            ways.whole[0, i] = search.whole[size, i]
            ways.tied[0, i] = search.tied[size, i]
    ways.value[0] = rest
    ways.current[0] = UNTRIED
    while level >= 0 and found <= most:
        if level == depth:
            found += 1
            name_labels(ways.tied[level] if forest else search.label, lead, ways.name, ways.names)
            table = reach(bag, table, search, goal, size, ways.value[level], ways.name, ways.picks, ways.key)
            level -= 1
        elif _try_entry(bag, table, ways, level, size, forest):
            level += 1
            ways.current[level] = UNTRIED
        else:
            level -= 1
    return table, found


@kernel
def _lacks(bag: Bag, search: Search, size: int) -> bool:
    """Whether a state leaves out a home that must be chosen."""
    lacking = np.uint64(0)
    for w in range(bag.need.shape[0]):
        lacking |= bag.need[w] & ~search.set_[size, w]
    return bool(lacking != 0)


@kernel
def visit_states(
    bag: Bag, table: Table, colours: int, candidates: U64, most: int, goal: Goal, cells: I64
) -> tuple[Table, int]:  # fmt: skip
    """Go through the states of a bag, plain ones only where they must be in the table, and do with each what
    ``goal`` says; ``colours`` 0 means forests.

    ``candidates`` uint64[W]: vertices that may be chosen.  Returns (table, states met with their entries, those of at
    most two vertices not counted where they are plain); gives up above ``most`` or when told to stop.
    """
    forest = colours == 0
    deepest = most_chosen(bag, colours)
    search = new_search(bag, colours, deepest, candidates)
    ways = _new_ways(bag.child.shape[0], deepest + 1)
    total = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
    depth = int(np.int64(0))
    fresh = not bag.closed
    while depth >= 0 and total <= most and cells[STOP] == 0:
        if fresh and not _lacks(bag, search, depth):
            table, more = _complete(bag, table, search, ways, goal, depth, forest, most - total)
            total += more - 1 if bag.closed and forest and depth == 2 else more
        v, kind = next_vertex(search, depth)
        if v < 0:
            depth -= 1
            fresh = False
            continue
        add_vertex(bag, search, depth, v, kind, forest)
        depth += 1
        fresh = not (bag.closed and is_plain(bag, search, depth, forest))
    return table, total
