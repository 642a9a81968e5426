"""The states of one bag whose states are sets with labels, and the message that it sends.

Colours: the sets are at most q disjoint cliques of the fill graph, labels are their names in the order of their lowest
vertices.  A state goes with the entries of the bags below that have the same classes on the adhesion.

Forests: the sets have no cycle of G inside.  An entry of a bag below says which vertices of its adhesion are connected
by what lies below, *without* the edges inside the adhesion: two bags below that share such an edge would close a false
cycle with it otherwise.  A state is taken with one entry of each bag below; every group that such an entry connects
must hit distinct trees of what is connected so far, edges of the bag included, and joins them.  What the bag sends up
is again without the edges inside its own adhesion.  On an adhesion without fill at most two vertices are chosen, an
edge of G, so nothing can connect them: labels are trivial there.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest, ones
from nearchord_solve.sweep.kernels.label_table import Table, find, record

ONE = np.uint64(1)


class Bag(NamedTuple):
    """One bag: what its states are made of."""

    number: int
    member: I32  # [b] vertices, ascending: adhesion first, then homes
    adhesion: int
    joined: bool  # whether labels on the adhesion mean something
    near: U64  # [b, W] rows of the fill graph
    gain: I64  # [b] what a vertex is worth here: 0 in the adhesion
    pair: I64  # [b, b] what two vertices are worth together, by (higher, lower)
    child: I32  # [C] bags below that send entries
    inside: U64  # [C, W] the adhesion of each
    plain: I32  # [C] its entry for the empty set
    base: int  # sum of the values of these entries


class Scratch(NamedTuple):
    """Room for completing one state: a row for each bag below that it meets, and one more."""

    meets: I32  # which bags below
    where: I32  # [C+1, room] places of the key in the state
    lengths: I64  # of the key
    wanted: I32  # [C+1, room] labels of the key
    head: I32  # first entry of the chain
    key: I32  # [room]
    own_label: I32
    names: I32
    whole: I32  # [C+1, room] trees with the edges of the adhesion
    sent: I32  # [C+1, room] trees without
    state: I32  # [room]
    value: I64
    current: I32
    picks: I32  # [C]


@kernel
def _scratch(children: int, room: int) -> Scratch:
    rows = children + 1
    return Scratch(
        np.empty(rows, np.int32), np.empty((rows, room), np.int32), np.zeros(rows, np.int64),
        np.empty((rows, room), np.int32), np.full(rows, -1, np.int32), np.empty(room, np.int32),
        np.empty(room, np.int32), np.empty(room, np.int32), np.empty((rows, room), np.int32),
        np.empty((rows, room), np.int32), np.empty(room, np.int32), np.empty(rows, np.int64),
        np.full(rows, -1, np.int32), np.empty(children, np.int32),
    )  # fmt: skip


@kernel
def _same(parent: I32, a: int, b: int) -> bool:
    return bool(parent[a] == parent[b])


@kernel
def _join(parent: I32, size: int, a: int, b: int) -> None:
    old = parent[a]
    new = parent[b]
    for i in range(size):
        if parent[i] == old:
            parent[i] = new


@kernel
def _canonical(label: I32, count: int, named: I32, names: I32) -> None:
    """Name labels in the order of their first use.  ``names`` is scratch."""
    used = 0
    for i in range(count):
        found = -1
        for k in range(used):
            if names[k] == label[i]:
                found = k
        if found < 0:
            names[used] = label[i]
            found = used
            used += 1
        named[i] = found


@kernel
def _edges_of_state(bag: Bag, chosen: I32, size: int, whole: I32, sent: I32) -> None:
    """Trees of a state with and without the edges inside the adhesion: int32[size] each, overwritten."""
    for i in range(size):
        whole[i] = i
        sent[i] = i
    for i in range(size):
        for j in range(i):
            v, u = chosen[i], chosen[j]
            if (bag.near[v, u >> 6] >> np.uint64(u & 63)) & ONE == 0:
                _join(whole, size, i, j)
                if v >= bag.adhesion:
                    _join(sent, size, i, j)


@kernel
def _graft(table: Table, entry: int, where: I32, count: int, size: int, whole: I32, sent: I32) -> bool:
    """Join what an entry connects; False if that closes a cycle.  ``where``: places of its key in the state."""
    at = table.begin[entry] + count
    for i in range(count):
        for j in range(i):
            if table.pool[at + i] == table.pool[at + j]:
                first = True  # only with the first of its group: a group is joined as a star
                for k in range(j):
                    if table.pool[at + k] == table.pool[at + i]:
                        first = False
                if not first:
                    continue
                if _same(whole, where[i], where[j]):
                    return False
                _join(whole, size, where[i], where[j])
                _join(sent, size, where[i], where[j])
    return True


@kernel
def _send(
    bag: Bag, table: Table, forest: bool, chosen: I32, label: I32, size: int, own: int, set_: U64, room: int,
    most: int, scratch: Scratch, cells: I64,
) -> tuple[Table, int]:  # fmt: skip
    """Complete one state by entries of the bags below in all ways that fit, and record each; returns how many."""
    meets, where, count, wanted, head, key, own_label, names, whole, sent, state, value, current, picks = scratch
    depth = 0
    rest = own + bag.base
    picks[:] = bag.plain
    for c in range(bag.child.shape[0]):
        for w in range(set_.shape[0]):
            if bag.inside[c, w] & set_[w] != 0:
                meets[depth] = c
                count[depth] = 0
                depth += 1
                rest -= table.value[bag.plain[c]]
                break
    for k in range(depth):
        c = meets[k]
        for i in range(size):
            v = chosen[i]
            if (bag.inside[c, v >> 6] >> np.uint64(v & 63)) & ONE != 0:
                where[k, count[k]] = i
                key[count[k]] = bag.member[v]
                own_label[count[k]] = label[i]
                count[k] += 1
        _canonical(own_label, count[k], wanted[k], names)
        head[k] = find(table, bag.child[c], key, count[k])
    if forest:
        _edges_of_state(bag, chosen, size, whole[0], sent[0])
    lead = 0
    while lead < size and chosen[lead] < bag.adhesion:
        lead += 1
    for i in range(size):
        state[i] = bag.member[chosen[i]]
    value[0] = rest
    current[0] = head[0]
    level = 0
    combinations = 0
    while level >= 0:
        if level == depth:
            combinations += 1
            for i in range(lead):
                own_label[i] = sent[level, i] if forest else label[i]
                if forest and not bag.joined:
                    own_label[i] = i
            _canonical(own_label, lead, key, names)
            table = record(table, bag.number, state, key, lead, value[level], state, label, size, room, picks)
            level -= 1
            if level >= 0:
                current[level] = table.following[current[level]]
            if combinations > most or cells[STOP] != 0:
                return table, combinations
            continue
        entry = current[level]
        if entry < 0:
            level -= 1
            if level >= 0:
                current[level] = table.following[current[level]]
            continue
        fits = True
        if forest:
            for i in range(size):
                whole[level + 1, i] = whole[level, i]
                sent[level + 1, i] = sent[level, i]
            fits = _graft(table, entry, where[level], count[level], size, whole[level + 1], sent[level + 1])
        else:
            for i in range(count[level]):
                if table.pool[table.begin[entry] + count[level] + i] != wanted[level, i]:
                    fits = False
                    break
        if fits:
            picks[meets[level]] = entry
            value[level + 1] = value[level] + table.value[entry]
            level += 1
            if level < depth:
                current[level] = head[level]
        else:
            current[level] = table.following[entry]
    return table, combinations


@kernel
def _above(v: int, words: int, masks: U64) -> None:
    """Only vertices above v stay."""
    for w in range(words):
        if w < v >> 6 or (w == v >> 6 and v & 63 == 63):
            masks[w] = 0
        elif w == v >> 6:
            masks[w] &= ~((ONE << np.uint64((v & 63) + 1)) - ONE)


@kernel
def _keep_trees(bag: Bag, tree: U64, allowed: U64) -> None:
    """Keep candidates that have at most one neighbour in a tree: two would close a cycle."""
    for w in range(allowed.shape[0]):
        word = allowed[w]
        while word != 0:
            x = (w << 6) + lowest(word)
            word &= word - ONE
            ties = 0
            for y in range(allowed.shape[0]):
                ties += ones(tree[y] & ~bag.near[x, y])
            if ties > 1:
                allowed[w] &= ~(ONE << np.uint64(x & 63))


@kernel
def settle_states(
    bag: Bag, table: Table, colours: int, most: int, deepest: int, cells: I64
) -> tuple[Table, int]:  # fmt: skip
    """Go through all states of a bag and record what they send; ``colours`` 0 means forests.

    Sets grow by ascending vertices.  ``allow`` says what may join each label, ``open_`` what of it was not tried yet.
    Returns (table, states with their entries); gives up above ``most`` or when told to stop.
    """
    b, words = bag.near.shape
    forest = colours == 0
    kinds = max(colours, 1)
    allow = np.zeros((deepest + 1, kinds, words), np.uint64)
    open_ = np.zeros((deepest + 1, kinds, words), np.uint64)
    set_ = np.zeros((deepest + 1, words), np.uint64)
    scratch = _scratch(bag.child.shape[0], deepest + 1)
    chosen = np.zeros(deepest + 1, np.int32)
    label = np.zeros(deepest + 1, np.int32)
    tree = np.zeros((deepest + 1, deepest + 1), np.int32)
    merged = np.zeros(words, np.uint64)
    used = np.zeros(deepest + 1, np.int64)
    value = np.zeros(deepest + 1, np.int64)
    everything = np.zeros(words, np.uint64)
    for v in range(b):
        everything[v >> 6] |= ONE << np.uint64(v & 63)
    for k in range(kinds):
        allow[0, k] = everything
    open_[0, 0] = everything
    table, total = _send(bag, table, forest, chosen, label, 0, value[0], set_[0], deepest, most, scratch, cells)
    depth = 0
    while depth >= 0:
        if total > most or cells[STOP] != 0:
            return table, total
        v = -1
        kind = 0
        while kind < kinds and v < 0:
            for w in range(words):
                if open_[depth, kind, w] != 0:
                    v = (w << 6) + lowest(open_[depth, kind, w])
                    open_[depth, kind, w] &= open_[depth, kind, w] - ONE
                    break
            if v < 0:
                kind += 1
        if v < 0:
            depth -= 1
            continue
        chosen[depth] = v
        label[depth] = kind
        below = depth + 1
        more = bag.gain[v]
        for i in range(depth):
            more += bag.pair[v, chosen[i]]
        value[below] = value[depth] + more
        used[below] = max(used[depth], kind + 1)
        set_[below] = set_[depth]
        set_[below, v >> 6] |= ONE << np.uint64(v & 63)
        for k in range(kinds):
            allow[below, k] = allow[depth, k]
            if k == kind and not forest:
                for w in range(words):
                    allow[below, k, w] &= bag.near[v, w]
            _above(v, words, allow[below, k])
            open_[below, k] = 0
            if forest or k <= used[below]:
                open_[below, k] = allow[below, k]
        if forest:
            merged[:] = 0
            merged[v >> 6] |= ONE << np.uint64(v & 63)
            tree[below, depth] = depth
            for i in range(depth):
                tree[below, i] = tree[depth, i]
            for i in range(depth):
                u = chosen[i]
                if (bag.near[v, u >> 6] >> np.uint64(u & 63)) & ONE == 0:
                    _join(tree[below], below, i, depth)
            for i in range(depth):
                if tree[below, i] == tree[below, depth]:
                    merged[chosen[i] >> 6] |= ONE << np.uint64(chosen[i] & 63)
            _keep_trees(bag, merged, allow[below, 0])
            open_[below, 0] = allow[below, 0]
        table, ways = _send(
            bag, table, forest, chosen, label, below, value[below], set_[below], deepest, most, scratch, cells
        )
        total += ways
        depth = below
    return table, total
