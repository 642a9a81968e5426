"""Dynamic programming over blocks, see :mod:`nearchord_solve.fill.exact.blocks`."""

import numpy as np

from nearchord_solve.fill.exact.kernels.hashed import enter, roomier
from nearchord_solve.fill.exact.kernels.words import contains, fill_up, side, unpack
from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I64, U64, kernel, ones

ENDLESS = 2**62


@kernel
def _cost(rows: U64, sizes: I64, chosen: U64, found: I64) -> int:
    """What the non-adjacent pairs of a set cost."""
    count = unpack(chosen, found)
    total = np.int64(0)
    for i in range(count):
        for j in range(i + 1, count):
            if not contains(rows[found[i]], found[j]):
                total += sizes[found[i]] * sizes[found[j]]
    return int(total)


@kernel
def _room(array: I64, count: int) -> I64:
    """An array of which entry ``count`` can be written."""
    if count < array.shape[0]:
        return array
    return np.concatenate((array, np.empty(count + 16, np.int64)))


@kernel
def list_splits(rows: U64, sizes: I64, cliques: U64, cells: I64) -> tuple[U64, I64, I64, I64, I64, I64]:
    """Enter each clique at the block of each of its separators, and at the whole graph, which is block 0.

    ``rows`` uint64[n, W], ``sizes`` int64[n], ``cliques`` uint64[k, W].  Returns (blocks uint64[b, W], and of the
    splits: block, clique, what the clique costs beyond the separator, where their blocks below begin; the blocks below,
    int64).  Fewer when stopped.
    """
    n, width = rows.shape
    blocks = np.empty((0, width), np.uint64)
    table = np.empty(0, np.int64)
    home = np.empty(0, np.int64)
    clique = np.empty(0, np.int64)
    extra = np.empty(0, np.int64)
    start = np.zeros(1, np.int64)
    below = np.empty(0, np.int64)
    splits = 0
    used = 0
    part = np.empty((n, width), np.uint64)
    near = np.empty((n, width), np.uint64)
    number = np.empty(n, np.int64)
    left = np.empty(width, np.uint64)
    found = np.empty(n, np.int64)
    fill_up(left, n)
    blocks, table = roomier(blocks, 0, table)
    known = enter(left, blocks, 0, table) + 1
    for k in range(cliques.shape[0]):
        if cells[STOP] != 0:
            break
        fill_up(left, n)
        for w in range(width):
            left[w] &= ~cliques[k, w]
        sides = 0
        for v in range(n):
            if contains(left, v):
                side(rows, v, left, part[sides], near[sides], found)
                for w in range(width):
                    near[sides, w] &= cliques[k, w]
                blocks, table = roomier(blocks, known, table)
                number[sides] = enter(part[sides], blocks, known, table)
                known = max(known, number[sides] + 1)
                sides += 1
        whole = _cost(rows, sizes, cliques[k], found)
        for s in range(-1, sides):
            if s >= 0 and _repeats(near, s):
                continue
            left[:] = cliques[k]
            for w in range(width):
                if s >= 0:
                    left[w] &= ~near[s, w]
            for t in range(sides):
                if s < 0 or _beyond(near[t], near[s]):
                    below = _room(below, used)
                    below[used] = number[t]
                    used += 1
                    for w in range(width):
                        left[w] |= part[t, w]
            home = _room(home, splits)
            clique = _room(clique, splits)
            extra = _room(extra, splits)
            start = _room(start, splits + 1)
            blocks, table = roomier(blocks, known, table)
            home[splits] = enter(left, blocks, known, table)
            known = max(known, home[splits] + 1)
            clique[splits] = k
            extra[splits] = whole
            if s >= 0:
                extra[splits] -= _cost(rows, sizes, near[s], found)
            splits += 1
            start[splits] = used
    return blocks[:known], home[:splits], clique[:splits], extra[:splits], start[: splits + 1], below[:used]


@kernel
def _repeats(near: U64, s: int) -> bool:
    """Whether row s is among the rows before it."""
    t = 0
    while t < s and (_beyond(near[s], near[t]) or _beyond(near[t], near[s])):
        t += 1
    return t < s


@kernel
def _beyond(one: U64, other: U64) -> bool:
    """Whether a set holds a vertex that another does not."""
    outside = np.uint64(0)
    for w in range(one.shape[0]):
        outside |= one[w] & ~other[w]
    return bool(outside != 0)


@kernel
def _by_size(blocks: U64, home: I64) -> I64:
    """The splits by the size of their block, then by number."""
    size = np.zeros(blocks.shape[0], np.int64)
    for b in range(blocks.shape[0]):
        for w in range(blocks.shape[1]):
            size[b] += ones(blocks[b, w])
    place = np.zeros(64 * blocks.shape[1] + 2, np.int64)
    for s in range(home.shape[0]):
        place[size[home[s]] + 1] += 1
    for k in range(1, place.shape[0]):
        place[k] += place[k - 1]
    order = np.empty(home.shape[0], np.int64)
    for s in range(home.shape[0]):
        order[place[size[home[s]]]] = s
        place[size[home[s]]] += 1
    return order


@kernel
def cheapest(blocks: U64, home: I64, clique: I64, extra: I64, start: I64, below: I64, limit: int) -> tuple[int, I64]:
    """Least cost of block 0 and the cliques of a triangulation that reaches it; (``ENDLESS``, none) above ``limit``.

    The arrays are those of :func:`list_splits`.  Blocks are worked out by size, as those below a block are smaller;
    ties among splits go to the first.
    """
    count = blocks.shape[0]
    cost = np.full(count, limit + 1, np.int64)
    choice = np.full(count, -1, np.int64)
    for s in _by_size(blocks, home):
        total = extra[s]
        for i in range(start[s], start[s + 1]):
            total += cost[below[i]]
        if total < cost[home[s]]:
            cost[home[s]] = total
            choice[home[s]] = s
    chosen = np.empty(count, np.int64)
    waiting = np.zeros(count, np.int64)
    if cost[0] > limit:
        return ENDLESS, chosen[:0]
    height = 1
    found = 0
    while height > 0:
        height -= 1
        s = choice[waiting[height]]
        chosen[found] = clique[s]
        found += 1
        for i in range(start[s], start[s + 1]):
            waiting[height] = below[i]
            height += 1
    return int(cost[0]), chosen[:found]
