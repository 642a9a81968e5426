"""Vertex sets as rows of uint64 words."""

from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.kernels.compiled import I64, U64, kernel, lowest

F64 = NDArray[Any]


@kernel
def unpack(words: U64, found: I64) -> int:
    """Write the members of one set, ascending, into ``found`` int64; returns their number."""
    count = 0
    for w in range(words.shape[0]):
        left = words[w]
        while left != 0:
            found[count] = 64 * w + lowest(left)
            count += 1
            left &= left - np.uint64(1)
    return count


@kernel
def contains(words: U64, v: int) -> bool:
    """Whether v is in the set."""
    return bool((words[v >> 6] >> np.uint64(v & 63)) & np.uint64(1))


@kernel
def fill_up(words: U64, count: int) -> None:
    """Overwrite a set with vertices 0..count-1."""
    for w in range(words.shape[0]):
        words[w] = np.uint64(0)
    for v in range(count):
        words[v >> 6] |= np.uint64(1) << np.uint64(v & 63)


@kernel
def leave_out(words: U64, v: int) -> None:
    """Remove v from the set."""
    words[v >> 6] &= ~(np.uint64(1) << np.uint64(v & 63))


@kernel
def side(rows: U64, start: int, left: U64, part: U64, near: U64, stack: I64) -> None:
    """Move the component of ``left`` that holds ``start`` to ``part``; ``near`` gets all neighbours of its vertices.

    ``rows`` uint64[n, W]; ``left``, ``part``, ``near`` uint64[W] and ``stack`` int64[n] are overwritten.
    """
    for w in range(left.shape[0]):
        part[w] = np.uint64(0)
        near[w] = np.uint64(0)
    part[start >> 6] |= np.uint64(1) << np.uint64(start & 63)
    leave_out(left, start)
    stack[0] = start
    height = 1
    while height > 0:
        height -= 1
        v = stack[height]
        for w in range(left.shape[0]):
            near[w] |= rows[v, w]
            fresh = rows[v, w] & left[w]
            left[w] &= ~fresh
            part[w] |= fresh
            while fresh != 0:
                stack[height] = 64 * w + lowest(fresh)
                height += 1
                fresh &= fresh - np.uint64(1)
