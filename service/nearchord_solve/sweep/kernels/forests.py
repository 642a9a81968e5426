"""Counting the states that the bags have in the forest program, without values and without the way back.

F is the graph of the fill edges inside a bag of b vertices; T are the vertices that touch fill, u = b - |T| the
others, which are adjacent in G to everything in the bag.  A state is a set X with no cycle of G inside, together with
one entry of each bag below, as the program goes through them (:mod:`.label_states`).

With a vertex outside T, X is a star or a single edge, hence connected: whatever connects two of its vertices below
would close a cycle, and each of the u (1 + N) + C(u, 2) sets, N being the number of non-empty cliques of F, counts
once.  For sets inside T it has to be known what the bags below can connect.  The entries of a bag that connect
something are its *joints* (:mod:`.joints`): vertices of its adhesion, and which of them are connected by what lies
below, without the edges inside the adhesion.  An entry that connects nothing exists for every set, so it need not be
kept; most bags have no joints at all, and their sets are counted by popcount.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.cliques import depth_limit
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest, ones
from nearchord_solve.kernels.words import clear, full, holds
from nearchord_solve.sweep.kernels.joints import Joints, add_joint, find_joints, grown, joint_bytes, mixed

ONE = np.uint64(1)
NO_ROOM = -1  # instead of a number of ways: make room for joints and count again
FRESH, NOTHING = -2, -1  # of the joint taken from a bag below: none tried yet; the entry that connects nothing


class Touched(NamedTuple):
    """The part of a bag that touches fill, and what lies below."""

    number: int
    code: U64  # [t] codes of the vertices
    near: U64  # [t, W] rows of F
    lead: int  # the first so many are in the adhesion
    sends: bool  # whether the bag's joints are wanted
    hub: bool  # whether a vertex outside T goes with this bag: it connects all of a clique of F
    child: I32  # [C] bags below that have joints
    inside: U64  # [C, W] which of T is in the adhesion of each


class Room(NamedTuple):
    """Scratch; rows of the last six belong to the bags below that a set meets."""

    chosen: I32  # [room] the set, ascending
    at: I32  # [t] where each of it stands there
    label: I32  # [room]
    whole: I32  # [C+1, room] trees of the set, with what is connected below
    sent: I32  # the same without the edges inside the adhesion
    place: I32  # [C+1, room] what a bag below shares with the set
    shared: I64  # [C+1] how much that is
    head: I32  # [C+1] its first joint
    joint: I32  # [C+1] the one that is tried


@kernel
def symmetric(rows: U64) -> U64:
    """Both directions of upper rows."""
    t = rows.shape[0]
    both = rows.copy()
    for i in range(t):
        for j in range(i + 1, t):
            if holds(rows[i], j):
                both[j, i >> 6] |= ONE << np.uint64(i & 63)
    return both


@kernel
def _room(bag: Touched, deepest: int) -> Room:
    rows = bag.child.shape[0] + 1
    return Room(
        np.zeros(deepest, np.int32), np.zeros(bag.near.shape[0], np.int32), np.zeros(deepest, np.int32),
        np.zeros((rows, deepest), np.int32), np.zeros((rows, deepest), np.int32), np.zeros((rows, deepest), np.int32),
        np.zeros(rows, np.int64), np.zeros(rows, np.int32), np.zeros(rows, np.int32),
    )  # fmt: skip


@kernel
def _merge(label: I32, row: int, size: int, a: int, b: int) -> None:
    old = label[row, a]
    new = label[row, b]
    for i in range(size):
        if label[row, i] == old:
            label[row, i] = new


@kernel
def _graft(joints: Joints, joint: int, level: int, size: int, room: Room) -> bool:
    """Connect, in the row above ``level``, what a joint connects; False if that closes a cycle."""
    labels = joints.begin[joint]
    for i in range(size):
        room.whole[level + 1, i] = room.whole[level, i]
        room.sent[level + 1, i] = room.sent[level, i]
    for i in range(1, room.shared[level]):
        j = i - 1  # the last of the same group before
        while j >= 0 and joints.pool[labels + j] != joints.pool[labels + i]:
            j -= 1
        if j >= 0:
            a, b = room.place[level, i], room.place[level, j]
            if room.whole[level + 1, a] == room.whole[level + 1, b]:
                return False
            _merge(room.whole, level + 1, size, a, b)
            _merge(room.sent, level + 1, size, a, b)
    return True


@kernel
def _send(bag: Touched, lead: int, level: int, room: Room, joints: Joints) -> bool:
    """Keep what a set connects among its first ``lead`` vertices, if that is anything; False without room."""
    groups = 0
    for i in range(lead):
        room.label[i] = groups
        for j in range(i):
            if room.sent[level, j] == room.sent[level, i]:
                room.label[i] = room.label[j]
                break
        if room.label[i] == groups:
            groups += 1
    if groups == lead:
        return True
    code = mixed(np.uint64(0), bag.number)
    for i in range(lead):
        code ^= bag.code[room.chosen[i]]
    return add_joint(joints, code, room.label, lead)


@kernel
def _meet(bag: Touched, set_: U64, room: Room, joints: Joints) -> int:
    """Find the bags below with joints for what they share with a set; returns how many."""
    met = 0
    for c in range(bag.child.shape[0]):
        shared = 0
        for w in range(set_.shape[0]):
            shared += ones(set_[w] & bag.inside[c, w])
        if shared < 2:
            continue
        code = mixed(np.uint64(0), bag.child[c])
        shared = 0
        for w in range(set_.shape[0]):
            word = set_[w] & bag.inside[c, w]
            while word != 0:
                v = (w << 6) + lowest(word)
                word &= word - ONE
                code ^= bag.code[v]
                room.place[met, shared] = room.at[v]
                shared += 1
        room.head[met] = find_joints(joints, code, shared)
        room.shared[met] = shared
        if room.head[met] >= 0:
            met += 1
    return met


@kernel
def _complete(bag: Touched, set_: U64, size: int, lead: int, most: int, room: Room, joints: Joints) -> int:
    """In how many ways the bags below complete a set, or NO_ROOM; keeps what each sends.  Ends above ``most``.

    Row 0 of ``room.whole`` and ``room.sent`` holds the trees of the set; its first ``lead`` are in the adhesion.
    """
    depth = _meet(bag, set_, room, joints)
    ways = 0
    level = 0
    room.joint[0] = FRESH
    while level >= 0 and ways <= most:
        if level == depth:
            ways += 1
            if lead > 1 and not _send(bag, lead, level, room, joints):
                return NO_ROOM
            level -= 1
            continue
        if room.joint[level] == FRESH:
            joint = NOTHING
        else:
            joint = room.head[level] if room.joint[level] == NOTHING else joints.following[room.joint[level]]
            if joint < 0:
                level -= 1
                continue
        room.joint[level] = joint
        if joint == NOTHING:
            for i in range(size):
                room.whole[level + 1, i] = room.whole[level, i]
                room.sent[level + 1, i] = room.sent[level, i]
        elif not _graft(joints, joint, level, size, room):
            continue
        level += 1
        room.joint[level] = FRESH
    return ways


@kernel
def _extend(bag: Touched, depth: int, v: int, tree: I32, own: I32, room: Room, merged: U64) -> bool:
    """Add vertex v to a set of ``depth`` vertices: its trees go to the next row, that of v to ``merged`` as a set.

    ``tree``: trees of the set, ``own``: without the edges inside the adhesion.  Returns whether v has no neighbour
    in the set.
    """
    below = depth + 1
    room.chosen[depth] = v
    room.at[v] = depth
    for i in range(depth):
        tree[below, i] = tree[depth, i]
        own[below, i] = own[depth, i]
    tree[below, depth] = depth
    own[below, depth] = depth
    alone = True
    for i in range(depth):
        if not holds(bag.near[v], room.chosen[i]):
            alone = False
            _merge(tree, below, below, i, depth)
            if v >= bag.lead:
                _merge(own, below, below, i, depth)
    merged[:] = 0
    for i in range(below):
        if tree[below, i] == tree[below, depth]:
            merged[room.chosen[i] >> 6] |= ONE << np.uint64(room.chosen[i] & 63)
    return alone


@kernel
def _narrow(near: U64, merged: U64, open_: U64, depth: int) -> int:
    """Row ``depth`` + 1 of the candidates: those that have at most one neighbour in a tree.  Returns how many."""
    count = 0
    for y in range(merged.shape[0]):
        word = open_[depth, y]
        kept = word
        while word != 0:
            x = (y << 6) + lowest(word)
            word &= word - ONE
            ties = 0
            for z in range(merged.shape[0]):
                ties += ones(merged[z] & ~near[x, z])
            if ties > 1:
                kept &= ~(ONE << np.uint64(x & 63))
        open_[depth + 1, y] = kept
        count += ones(kept)
    return count


@kernel
def count_forests(
    bag: Touched, edges: int, most: int, most_bytes: int, joints: Joints, cells: I64
) -> tuple[Joints, int]:  # fmt: skip
    """States of one bag whose sets lie inside T, the empty one included; about ``most`` or more if above it.

    ``edges``: edges of F.  Sets grow by ascending vertices; a candidate stays one while it has at most one neighbour
    in each tree, and only the tree that changed is looked at.  O(t W) a set, O(size^2) a state of a bag with joints.
    Ends early when told to, or when the joints take more than ``most_bytes``.
    """
    t, words = bag.near.shape
    deepest = min(t, 2 * depth_limit(t, edges)) + 2
    room = _room(bag, deepest)
    open_ = np.zeros((deepest, words), np.uint64)
    set_ = np.zeros(words, np.uint64)
    tree = np.zeros((deepest, deepest), np.int32)
    own = np.zeros((deepest, deepest), np.int32)
    loose = np.ones(deepest, np.bool_)  # whether the set has no edge of G inside
    merged = np.zeros(words, np.uint64)
    open_[0] = full(t, words)
    each = bag.sends or bag.child.shape[0] > 0
    total = 1 if each else 1 + t
    depth = 0
    while depth >= 0 and total <= most and cells[STOP] == 0 and joint_bytes(joints) <= most_bytes:
        w = 0
        while w < words and open_[depth, w] == 0:
            w += 1
        if w == words:
            depth -= 1
            if depth >= 0:
                clear(set_, room.chosen[depth])
            continue
        v = (w << 6) + lowest(open_[depth, w])
        clear(open_[depth], v)
        loose[depth + 1] = _extend(bag, depth, v, tree, own, room, merged) and loose[depth]
        more = _narrow(bag.near, merged, open_, depth)
        size = depth + 1
        if not each:
            total += more
        else:
            set_[v >> 6] |= ONE << np.uint64(v & 63)
            lead = 0
            while bag.sends and lead < size and room.chosen[lead] < bag.lead:
                lead += 1
            ways = NO_ROOM
            while ways == NO_ROOM:
                for i in range(size):
                    room.whole[0, i] = tree[size, i]
                    room.sent[0, i] = own[size, i]
                ways = _complete(bag, set_, size, lead, most - total, room, joints)
                if ways != NO_ROOM and lead > 1 and bag.hub and loose[size]:
                    room.sent[0] = 0
                    if not _send(bag, lead, 0, room, joints):
                        ways = NO_ROOM
                if ways == NO_ROOM:
                    joints = grown(joints)
            total += ways
        if more > 0:
            depth = size
        elif each:
            clear(set_, v)
    return joints, total
