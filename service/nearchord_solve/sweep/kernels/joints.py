"""What bags of the forest program connect: a set of partitions for each bag and each part of its adhesion.

A *joint* says that the vertices of a key, some of a bag's adhesion, are connected in these groups by what lies below.
Keys are known by a 64-bit code of bag and vertices, partitions by one of their labels too, which is enough for
counting: the chance that any two of a million are mixed up is below 10^-7, and the count would be off by a few.
"""

from typing import Any, NamedTuple

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U64, kernel

PRIME = np.uint64(0x9E3779B97F4A7C15)


class Joints(NamedTuple):
    """Joints of all bags.  They are added in place; who finds no room makes some by :func:`grown`."""

    code: U64  # [E] of the key
    digest: U64  # [E] of key and labels
    length: I32  # [E] vertices of the key
    following: I32  # [E] next joint of the same key, -1 ends
    begin: I64  # [E] where its labels stand in ``pool``
    pool: I32  # labels, named in the order of their first use
    slots: I32  # [2E] open addressing by key: first joint, -1 where free; a power of two long
    used: I64  # [2] joints, pool


@kernel
def no_joints(room: int) -> Joints:
    """Space for ``room`` joints, a power of two."""
    return Joints(
        np.empty(room, np.uint64), np.empty(room, np.uint64), np.empty(room, np.int32), np.empty(room, np.int32),
        np.empty(room, np.int64), np.empty(8 * room, np.int32), np.full(2 * room, -1, np.int32), np.zeros(2, np.int64),
    )  # fmt: skip


@kernel
def mixed(code: Any, number: int) -> Any:
    """A code with one more number in it, all bits stirred (the finishing steps of splitmix64)."""
    code = code * PRIME + np.uint64(number + 1)
    code = (code ^ (code >> np.uint64(30))) * np.uint64(0xBF58476D1CE4E5B9)
    code = (code ^ (code >> np.uint64(27))) * np.uint64(0x94D049BB133111EB)
    return code ^ (code >> np.uint64(31))


@kernel
def _slot(joints: Joints, code: Any, length: int) -> int:
    """Where the first joint of a key stands, or the free slot where it would."""
    mask = joints.slots.shape[0] - 1
    place = np.int64(code & np.uint64(mask))
    while joints.slots[place] >= 0:
        e = joints.slots[place]
        if joints.code[e] == code and joints.length[e] == length:
            break
        place = (place + 1) & mask
    return int(place)


@kernel
def find_joints(joints: Joints, code: Any, length: int) -> int:
    """The first joint of a key, -1 without one."""
    return int(joints.slots[_slot(joints, code, length)])


@kernel
def add_joint(joints: Joints, code: Any, label: I32, length: int) -> bool:
    """Add the partition ``label[:length]`` to a key unless it is there; False if there is no room."""
    digest = code
    for i in range(length):
        digest = mixed(digest, label[i])
    place = _slot(joints, code, length)
    first = joints.slots[place]
    e = first
    while e >= 0:
        if joints.digest[e] == digest:
            return True
        e = joints.following[e]
    e = joints.used[0]
    begin = joints.used[1]
    if e == joints.code.shape[0] or begin + length > joints.pool.shape[0]:
        return False
    joints.code[e] = code
    joints.digest[e] = digest
    joints.length[e] = length
    joints.begin[e] = begin
    joints.following[e] = first
    joints.slots[place] = e
    for i in range(length):
        joints.pool[begin + i] = label[i]
    joints.used[0] += 1
    joints.used[1] += length
    return True


@kernel
def grown(joints: Joints) -> Joints:
    """The same joints with twice the room.  O(E)."""
    count, pool = joints.used
    wider = no_joints(2 * joints.code.shape[0])
    wider.code[:count] = joints.code[:count]
    wider.digest[:count] = joints.digest[:count]
    wider.length[:count] = joints.length[:count]
    wider.begin[:count] = joints.begin[:count]
    wider.pool[:pool] = joints.pool[:pool]
    wider.used[:] = joints.used
    for e in range(count):
        place = _slot(wider, wider.code[e], wider.length[e])
        wider.following[e] = wider.slots[place]
        wider.slots[place] = e
    return wider


@kernel
def joint_bytes(joints: Joints) -> int:
    """Memory of the joints."""
    return int(40 * joints.code.shape[0] + 4 * joints.pool.shape[0])
