"""Iterated local search for a heavy independent set, from a given one.

Moves: put v in place of all its chosen neighbours if it outweighs them; put two non-adjacent neighbours of a
chosen x, both without another chosen neighbour, in x's place if together they outweigh it (Andrade, Resende and
Werneck, J. Heuristics 18 (2012) 525-547, here with weights).  A kick forces in a random vertex; if the moves that
follow do not make up for it, the kick is undone, but for one in a while.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U8, U64, kernel

KEEP_WORSE = 64  # one kick in so many is kept although it made things worse


class Search(NamedTuple):
    """State of a search; arrays are changed in place."""

    ptr: I64
    adj: I32
    weights: I64
    chosen: U8  # [n] present set
    best: U8  # [n] best set
    load: I64  # [n] weight of chosen neighbours
    tight: I32  # [n] number of chosen neighbours
    mark: I64  # [n] scratch
    journal: I32  # [4n + 64] flips of the present round
    total: I64  # [3] weight of chosen, of best, and the scratch stamp
    random: U64  # [1] random state, not zero


@kernel
def draw(random: U64, most: int) -> int:
    """Next number in 0..most-1 of a xorshift generator (Marsaglia, J. Stat. Software 8 (2003) 14)."""
    x = random[0]
    x ^= x << np.uint64(13)
    x ^= x >> np.uint64(7)
    x ^= x << np.uint64(17)
    random[0] = x
    return int((x >> np.uint64(11)) % np.uint64(most))


@kernel
def flip(s: Search, v: int) -> None:
    """Choose v, or give it up."""
    if s.chosen[v]:
        s.chosen[v] = 0
        s.total[0] -= s.weights[v]
        for e in range(s.ptr[v], s.ptr[v + 1]):
            s.load[s.adj[e]] -= s.weights[v]
            s.tight[s.adj[e]] -= 1
    else:
        s.chosen[v] = 1
        s.total[0] += s.weights[v]
        for e in range(s.ptr[v], s.ptr[v + 1]):
            s.load[s.adj[e]] += s.weights[v]
            s.tight[s.adj[e]] += 1


@kernel
def force(s: Search, v: int, count: int) -> int:
    """Choose v and give up its chosen neighbours; flips go to the journal, whose new length is returned."""
    for e in range(s.ptr[v], s.ptr[v + 1]):
        u = s.adj[e]
        if s.chosen[u]:
            flip(s, u)
            s.journal[count] = u
            count += 1
    flip(s, v)
    s.journal[count] = v
    return count + 1


@kernel
def find_pair(s: Search, x: int) -> tuple[int, int]:
    """Two non-adjacent vertices whose only chosen neighbour is x and that outweigh it; (-1, -1) if none."""
    for e in range(s.ptr[x], s.ptr[x + 1]):
        u = s.adj[e]
        if s.tight[u] != 1:
            continue
        s.total[2] += 1
        stamp = s.total[2]
        for f in range(s.ptr[u], s.ptr[u + 1]):
            s.mark[s.adj[f]] = stamp
        for f in range(e + 1, s.ptr[x + 1]):
            v = s.adj[f]
            if s.tight[v] == 1 and s.mark[v] != stamp and s.weights[u] + s.weights[v] > s.weights[x]:
                return u, v
    return -1, -1


@kernel
def move(s: Search, v: int, count: int) -> int:
    """Make a move at v, or in place of its only chosen neighbour, that helps; the new length of the journal."""
    x = v
    if not s.chosen[v]:
        if s.weights[v] > s.load[v]:
            return force(s, v, count)
        x = -1
        if s.tight[v] == 1:
            e = s.ptr[v]
            while not s.chosen[s.adj[e]]:
                e += 1
            x = s.adj[e]
    if x >= 0:
        u, other = find_pair(s, x)
        if u >= 0:
            count = force(s, u, count)
            count = force(s, other, count)
    return count


@kernel
def climb(s: Search, count: int) -> int:
    """Move at and around the journal's vertices until nothing helps or the journal is half full."""
    read = 0
    room = s.journal.shape[0] // 2
    while read < count and count < room:
        x = s.journal[read]
        read += 1
        count = move(s, x, count)
        for e in range(s.ptr[x], s.ptr[x + 1]):
            if count >= room:
                break
            count = move(s, s.adj[e], count)
    return count


@kernel
def begin_search(s: Search, candidates: I32) -> int:
    """Set the state up from ``chosen`` and climb from there; returns the weight of ``best``."""
    for v in range(s.chosen.shape[0]):
        if s.chosen[v]:
            s.total[0] += s.weights[v]
            for e in range(s.ptr[v], s.ptr[v + 1]):
                s.load[s.adj[e]] += s.weights[v]
                s.tight[s.adj[e]] += 1
    s.journal[: candidates.shape[0]] = candidates
    climb(s, candidates.shape[0])
    s.best[:] = s.chosen
    s.total[1] = s.total[0]
    return int(s.total[1])


@kernel
def kick_and_climb(s: Search, candidates: I32, rounds: int, cells: I64) -> int:
    """Do ``rounds`` kicks at ``candidates``; returns the weight of ``best``.

    Deterministic in the state, unless stopped.
    """
    for _ in range(rounds):
        if cells[STOP] != 0:
            break
        v = candidates[draw(s.random, candidates.shape[0])]
        if s.chosen[v]:
            continue
        before = s.total[0]
        count = climb(s, force(s, v, 0))
        if s.total[0] < before and draw(s.random, KEEP_WORSE) != 0:
            for e in range(count - 1, -1, -1):
                flip(s, s.journal[e])
        elif s.total[0] > s.total[1]:
            s.total[1] = s.total[0]
            s.best[:] = s.chosen
    return int(s.total[1])
