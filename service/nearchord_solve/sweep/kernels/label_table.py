"""Messages between bags whose states are sets with labels.

A key is a bag and the vertices of a state in that bag's adhesion, ascending; entries with the same key stand in one
chain and differ in the labels of these vertices, which are named in the order of their first use.  An entry keeps the
best value for its key and labels; the state that reaches it is found again when it is wanted.  Where no label
matters, values stand in the order of the sets of vertices instead.
"""

from typing import Any, NamedTuple

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U64, kernel

PRIME = np.uint64(0x9E3779B97F4A7C15)
HALF = np.uint64(32)


class Table(NamedTuple):
    """Entries of all bags; arrays grow, so every writer returns the table anew."""

    value: I64  # [E]
    bag: I32  # [E]
    length: I32  # [E] vertices of the key
    begin: I64  # [E] where the entry stands in ``pool``: its vertices, then their labels
    following: I32  # [E] next entry of the chain, -1 ends
    hashed: U64  # [E]
    pool: I32
    slots: I32  # open addressing: first entry of each chain, -1 where free; a power of two long
    used: I64  # [3] entries, pool, chains
    sets: I64  # [D] values over adhesions without fill, see :mod:`.label_sets`; -1 where impossible


class Sets(NamedTuple):
    """Where the values of sets stand, see :mod:`.label_sets`."""

    first: I64  # [B] entry of the empty set of each adhesion without fill; -1 for the others, or where there are none
    choose: I64  # [s+1, q+1] C(n, k), s the size of the largest bag


@kernel
def count_sets(size: int, choose: I64) -> int:
    """Sets of at most q out of ``size`` vertices."""
    total = int(np.int64(0))
    for k in range(choose.shape[1]):
        total += choose[size, k]
    return total


@kernel
def empty_table(sets: int) -> Table:
    """A table without entries; so many ``sets``, all impossible."""
    return Table(
        np.empty(64, np.int64), np.empty(64, np.int32), np.empty(64, np.int32), np.empty(64, np.int64),
        np.empty(64, np.int32), np.empty(64, np.uint64), np.empty(1024, np.int32), np.full(128, -1, np.int32),
        np.zeros(3, np.int64), np.full(sets, -1, np.int64),
    )  # fmt: skip


@kernel
def table_bytes(table: Table) -> int:
    """Memory of a table."""
    return int(4 * table.pool.shape[0] + 36 * table.value.shape[0] + 4 * table.slots.shape[0] + 8 * table.sets.shape[0])


@kernel
def _grown(table: Table, room: int) -> Table:
    """The table with space for one more entry of ``room`` numbers and one more chain."""
    entries, pool_end, chains = table.used[0], table.used[1], table.used[2]
    value, bag, length, begin = table.value, table.bag, table.length, table.begin
    following, hashed, pool, slots = table.following, table.hashed, table.pool, table.slots
    if entries == value.shape[0]:
        size = 2 * entries
        value = np.empty(size, np.int64)
        value[:entries] = table.value[:entries]
        bag = np.empty(size, np.int32)
        bag[:entries] = table.bag[:entries]
        length = np.empty(size, np.int32)
        length[:entries] = table.length[:entries]
        begin = np.empty(size, np.int64)
        begin[:entries] = table.begin[:entries]
        following = np.empty(size, np.int32)
        following[:entries] = table.following[:entries]
        hashed = np.empty(size, np.uint64)
        hashed[:entries] = table.hashed[:entries]
    if pool_end + room > pool.shape[0]:
        pool = np.empty(2 * (pool_end + room), np.int32)
        pool[:pool_end] = table.pool[:pool_end]
    if 2 * (chains + 1) > slots.shape[0]:
        slots = np.full(2 * table.slots.shape[0], -1, np.int32)
        for old in table.slots:
            if old >= 0:
                place = np.int64(hashed[old] & np.uint64(slots.shape[0] - 1))
                while slots[place] >= 0:
                    place = (place + 1) & (slots.shape[0] - 1)
                slots[place] = old
    return Table(value, bag, length, begin, following, hashed, pool, slots, table.used, table.sets)


@kernel
def _hash(bag: int, key: I32, length: int) -> Any:
    mixed = np.uint64(bag + 1) * PRIME
    for i in range(length):
        mixed = (mixed ^ np.uint64(key[i])) * PRIME
        mixed ^= mixed >> HALF
    return mixed


@kernel
def _slot(table: Table, mixed: Any, bag: int, key: I32, length: int) -> Any:
    """Where the chain of a key stands, or the free slot where it would."""
    mask = table.slots.shape[0] - 1
    place = np.int64(mixed & np.uint64(mask))
    while table.slots[place] >= 0:
        e = table.slots[place]
        if table.hashed[e] == mixed and table.bag[e] == bag and table.length[e] == length:
            same = True
            for i in range(length):
                if table.pool[table.begin[e] + i] != key[i]:
                    same = False
                    break
            if same:
                return place
        place = (place + 1) & mask
    return place


@kernel
def find(table: Table, bag: int, key: I32, length: int) -> Any:
    """The first entry with this key, -1 without one."""
    return table.slots[_slot(table, _hash(bag, key, length), bag, key, length)]


@kernel
def labelled(table: Table, entry: int, label: I32, length: int) -> int:
    """The entry of a chain, from ``entry`` on, with these labels; -1 without one."""
    while entry >= 0:
        same = True
        for i in range(length):
            if table.pool[table.begin[entry] + length + i] != label[i]:
                same = False
                break
        if same:
            return entry
        entry = table.following[entry]
    return -1


@kernel
def record(table: Table, bag: int, key: I32, label: I32, length: int, value: int) -> Table:
    """Offer a value for a key and its labels: ``key``, ``label`` int32[length or more]; the best is kept."""
    mixed = _hash(bag, key, length)
    place = _slot(table, mixed, bag, key, length)
    first = table.slots[place]
    entry = labelled(table, first, label, length)
    if entry >= 0:
        table.value[entry] = max(table.value[entry], value)
        return table
    table = _grown(table, 2 * length)
    entry = table.used[0]
    begin = table.used[1]
    table.value[entry] = value
    table.bag[entry] = bag
    table.length[entry] = length
    table.hashed[entry] = mixed
    table.begin[entry] = begin
    table.following[entry] = -1
    table.used[0] += 1
    table.used[1] += 2 * length
    for i in range(length):
        table.pool[begin + i] = key[i]
        table.pool[begin + length + i] = label[i]
    if first >= 0:
        table.following[entry] = table.following[first]
        table.following[first] = entry
    else:
        table.used[2] += 1
        table.slots[_slot(table, mixed, bag, key, length)] = entry
    return table
