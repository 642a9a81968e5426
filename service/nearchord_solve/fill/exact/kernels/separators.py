"""Tests on many vertex sets at once, see :mod:`nearchord_solve.fill.exact.separators`.

Sets are rows of uint64[k, W]; the graph is the one induced on vertices 0..count-1 of ``rows`` uint64[n, W].
"""

from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.fill.exact.kernels.hashed import enter, roomier
from nearchord_solve.fill.exact.kernels.words import contains, fill_up, leave_out, side, unpack
from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I64, U64, kernel

Bools = NDArray[Any]


@kernel
def affordable(sets: U64, prices: I64, slack: int) -> Bools:
    """Which sets have pairs of total price at most ``slack``.

    ``prices`` int64[n, n], 0 on edges; sums must stay below 2^63.
    """
    fine = np.zeros(sets.shape[0], np.bool_)
    inside = np.empty(prices.shape[0], np.int64)
    for s in range(sets.shape[0]):
        count = unpack(sets[s], inside)
        total = np.int64(0)
        for i in range(count):
            for j in range(i + 1, count):
                total += prices[inside[i], inside[j]]
            if total > slack:
                break
        fine[s] = total <= slack
    return fine


@kernel
def _outside(count: int, chosen: U64, left: U64) -> None:
    """Overwrite ``left`` with vertices 0..count-1 outside ``chosen``."""
    fill_up(left, count)
    for w in range(left.shape[0]):
        left[w] &= ~chosen[w]


@kernel
def _within(small: U64, large: U64) -> bool:
    outside = np.uint64(0)
    for w in range(small.shape[0]):
        outside |= small[w] & ~large[w]
    return bool(outside == 0)


@kernel
def full_sides(rows: U64, count: int, separator: U64) -> U64:
    """Components of the rest that see all of ``separator``: uint64[sides, W]."""
    n, width = rows.shape
    left = np.empty(width, np.uint64)
    part = np.empty(width, np.uint64)
    near = np.empty(width, np.uint64)
    stack = np.empty(n, np.int64)
    sides = np.empty((count, width), np.uint64)
    found = 0
    _outside(count, separator, left)
    for v in range(count):
        if contains(left, v):
            side(rows, v, left, part, near, stack)
            if _within(separator, near):
                sides[found] = part
                found += 1
    return sides[:found]


@kernel
def separating(rows: U64, count: int, sets: U64) -> Bools:
    """Which sets are minimal separators: not empty, and seen in full by at least two components of the rest."""
    fine = np.zeros(sets.shape[0], np.bool_)
    for s in range(sets.shape[0]):
        fine[s] = sets[s].any() and full_sides(rows, count, sets[s]).shape[0] >= 2
    return fine


@kernel
def _covered(omega: U64, inside: I64, size: int, seen: U64) -> bool:
    """Whether seen[i] contains omega but for inside[i], for each i < size."""
    for i in range(size):
        x = inside[i]
        for w in range(omega.shape[0]):
            lacking = omega[w] & ~seen[i, w]
            if x >> 6 == w:
                lacking &= ~(np.uint64(1) << np.uint64(x & 63))
            if lacking != 0:
                return False
    return True


@kernel
def accepted(rows: U64, count: int, sets: U64, prices: I64, slack: int) -> Bools:
    """Which sets are potential maximal cliques with pairs of total price at most ``slack``.

    No component of the rest may see all of the set, and each of its vertices must be adjacent to, or share a
    component with, each other one.  O(count^2 W) for each set.
    """
    n, width = rows.shape
    fine = affordable(sets, prices, slack)
    left = np.empty(width, np.uint64)
    part = np.empty(width, np.uint64)
    near = np.empty(width, np.uint64)
    stack = np.empty(n, np.int64)
    inside = np.empty(n, np.int64)
    seen = np.empty((n, width), np.uint64)
    for s in range(sets.shape[0]):
        if not fine[s]:
            continue
        size = unpack(sets[s], inside)
        for i in range(size):
            seen[i] = rows[inside[i]]
        _outside(count, sets[s], left)
        for v in range(count):
            if not contains(left, v):
                continue
            side(rows, v, left, part, near, stack)
            if _within(sets[s], near):
                fine[s] = False
                break
            for i in range(size):
                if contains(near, inside[i]):
                    for w in range(width):
                        seen[i, w] |= near[w] & sets[s, w]
        fine[s] = fine[s] and _covered(sets[s], inside, size, seen)
    return fine


@kernel
def extended(rows: U64, count: int, sets: U64, starts: U64, prices: I64, slack: int, cells: I64) -> U64:
    """The sets S + (T & C) that are potential maximal cliques within ``slack``: uint64[found, W], with repetition.

    S runs over ``starts``, C over the full components of the rest, T over ``sets``, as far as T & C is not empty.
    Fewer when stopped.
    """
    width = rows.shape[1]
    kept = np.empty((16, width), np.uint64)
    found = 0
    fresh = np.empty((0, width), np.uint64)
    table = np.empty(0, np.int64)
    joined = np.empty(width, np.uint64)
    for s in range(starts.shape[0]):
        sides = full_sides(rows, count, starts[s])
        for c in range(sides.shape[0]):
            if cells[STOP] != 0:
                return kept[:found]
            new = 0
            table[:] = -1
            for t in range(sets.shape[0]):
                any_inside = np.uint64(0)
                for w in range(width):
                    any_inside |= sets[t, w] & sides[c, w]
                    joined[w] = starts[s, w] | (sets[t, w] & sides[c, w])
                if any_inside != 0:
                    fresh, table = roomier(fresh, new, table)
                    new = max(new, enter(joined, fresh, new, table) + 1)
            fine = accepted(rows, count, fresh[:new], prices, slack)
            for i in range(new):
                if fine[i]:
                    if found == kept.shape[0]:
                        kept = np.concatenate((kept, np.empty_like(kept)))
                    kept[found] = fresh[i]
                    found += 1
    return kept[:found]


@kernel
def all_separators(rows: U64, most: int, cells: I64) -> tuple[bool, U64]:
    """All minimal separators of a connected graph: uint64[s, W], in a fixed order.

    Starts from neighbourhoods N(C), C a component of G - N[v], and closes under S -> N(C), C a component of
    G - S - N(x), x in S.  Returns (False, those found) if there are more than ``most``, or when stopped.
    """
    n, width = rows.shape
    sets = np.empty((0, width), np.uint64)
    table = np.empty(0, np.int64)
    left = np.empty(width, np.uint64)
    part = np.empty(width, np.uint64)
    near = np.empty(width, np.uint64)
    stack = np.empty(n, np.int64)
    inside = np.empty(n, np.int64)
    count = 0
    for turn in range(-n, most + 1):
        if turn >= count:
            return True, sets[:count]
        if turn < 0:
            size = 1
            inside[0] = turn + n
        else:
            size = unpack(sets[turn], inside)
        for i in range(size):
            if cells[STOP] != 0 or count > most:
                return False, sets[:count]
            fill_up(left, n)
            leave_out(left, inside[i])
            for w in range(width):
                left[w] &= ~rows[inside[i], w]
                if turn >= 0:
                    left[w] &= ~sets[turn, w]
            for v in range(n):
                if not contains(left, v):
                    continue
                side(rows, v, left, part, near, stack)
                for w in range(width):
                    near[w] &= ~part[w]
                if near.any():
                    sets, table = roomier(sets, count, table)
                    count = max(count, enter(near, sets, count, table) + 1)
    return False, sets[:count]


@kernel
def connected_order(rows: U64) -> I64:
    """An order in which every beginning is connected: next a vertex with most neighbours so far, then the lowest."""
    n = rows.shape[0]
    order = np.empty(n, np.int64)
    seen = np.zeros(n, np.int64)
    near = np.empty(n, np.int64)
    for place in range(n):
        best = -1
        for v in range(n):
            if seen[v] >= 0 and (best < 0 or seen[v] > seen[best]):
                best = v
        order[place] = best
        seen[best] = -1
        for i in range(unpack(rows[best], near)):
            if seen[near[i]] >= 0:
                seen[near[i]] += 1
    return order
