"""Dynamic programming over eliminated sets, see :mod:`nearchord_solve.fill.exact.subsets`.

Vertices are bits 0..n-1 of one word, n <= 62; the first ``free`` of them may be eliminated.
"""

from typing import Any

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I64, U64, kernel, lowest, ones

ONE = np.uint64(1)
FOUND, STOPPED, NONE = 0, 1, 2
UNREACHED = 65535


@kernel
def _weight(word: Any, sizes: I64, plain: bool) -> int:
    """Total size of a set."""
    if plain:
        return ones(word)
    total = 0
    while word != 0:
        total += sizes[lowest(word)]
        word &= word - ONE
    return total


@kernel
def _reach(adj: U64, gone: Any, outside: Any, reached: U64) -> None:
    """Overwrite ``reached`` at the vertices outside: those seen directly or through a component of ``gone``."""
    left = outside
    while left != 0:
        v = lowest(left)
        left &= left - ONE
        reached[v] = adj[v]
    rest = gone
    while rest != 0:
        part = rest & (~rest + ONE)
        frontier = part
        near = np.uint64(0)
        while frontier != 0:
            u = lowest(frontier)
            frontier &= frontier - ONE
            near |= adj[u]
            fresh = adj[u] & gone & ~part
            part |= fresh
            frontier |= fresh
        rest &= ~part
        near &= outside
        left = near
        while left != 0:
            v = lowest(left)
            left &= left - ONE
            reached[v] |= near
    left = outside
    while left != 0:
        v = lowest(left)
        left &= left - ONE
        reached[v] &= outside & ~(ONE << np.uint64(v))


@kernel
def _simplicial(free: int, gone: Any, reached: U64) -> int:
    """The lowest free vertex left whose neighbours are a clique by now, or -1."""
    for v in range(free):
        if (gone >> np.uint64(v)) & ONE != 0:
            continue
        clique = True
        left = reached[v]
        while left != 0:
            u = lowest(left)
            left &= left - ONE
            if reached[v] & ~reached[u] & ~(ONE << np.uint64(u)) != 0:
                clique = False
                break
        if clique:
            return v
    return -1


@kernel
def sweep(adj: U64, sizes: I64, free: int, limit: int, last: Any, cells: I64) -> int:
    """Visit the sets in ascending order, so each after all its subsets.

    ``adj`` uint64[n], ``sizes`` int64[n]; ``last`` int8[2^free] is overwritten with the vertex eliminated last, -1 for
    sets not reached.  Costs are uint16; ``limit`` is at most 65534.  Looks at STOP every 4,096 sets.
    """
    n = adj.shape[0]
    best = np.full(1 << free, UNREACHED, np.uint16)
    best[0] = 0
    plain = bool((sizes == 1).all())
    reached = np.zeros(n, np.uint64)
    everything = (ONE << np.uint64(n)) - ONE
    for number in range(1 << free):
        if (number & 4095) == 0 and cells[STOP] != 0:
            return STOPPED
        so_far = np.int64(best[number])
        if so_far > limit:
            continue
        gone = np.uint64(number)
        _reach(adj, gone, everything & ~gone, reached)
        only = _simplicial(free, gone, reached)
        for v in range(free):
            if (gone >> np.uint64(v)) & ONE != 0 or (only >= 0 and v != only):
                continue
            cost = so_far + sizes[v] * _weight(reached[v] & ~adj[v], sizes, plain)
            after = number | (1 << v)
            if cost <= limit and cost < best[after]:
                best[after] = cost
                last[after] = v
    return FOUND if best[(1 << free) - 1] <= limit else NONE


@kernel
def largest_clique(adj: U64, tries: int) -> Any:
    """A clique of most vertices as far as ``tries`` steps of branch and bound can tell, as one word.

    ``adj`` uint64[n].  Branches on the vertex with most neighbours among the candidates, ties to the lowest.
    """
    n = adj.shape[0]
    chosen = np.zeros(n + 2, np.uint64)
    candidates = np.zeros(n + 2, np.uint64)
    candidates[0] = (ONE << np.uint64(n)) - ONE
    best = np.uint64(0)
    height = 1
    while height > 0 and tries > 0:
        tries -= 1
        height -= 1
        inside = chosen[height]
        rest = candidates[height]
        if rest == 0 and ones(inside) > ones(best):
            best = inside
        if rest == 0 or ones(inside) + ones(rest) <= ones(best):
            continue
        v = lowest(rest)
        left = rest
        while left != 0:
            u = lowest(left)
            left &= left - ONE
            if ones(adj[u] & rest) > ones(adj[v] & rest):
                v = u
        candidates[height] = rest & ~(ONE << np.uint64(v))
        chosen[height + 1] = inside | ONE << np.uint64(v)
        candidates[height + 1] = rest & adj[v]
        height += 2
    return best


@kernel
def replay(adj: U64, free: int, last: Any) -> None:
    """Eliminate the free vertices as ``last`` of :func:`sweep` says; ``adj`` uint64[n] gains the fill."""
    sequence = np.empty(free, np.int64)
    gone = (1 << free) - 1
    for i in range(free - 1, -1, -1):
        sequence[i] = last[gone]
        gone ^= 1 << sequence[i]
    left = (ONE << np.uint64(adj.shape[0])) - ONE
    for i in range(free):
        left &= ~(ONE << np.uint64(sequence[i]))
        near = adj[sequence[i]] & left
        rest = near
        while rest != 0:
            u = lowest(rest)
            rest &= rest - ONE
            adj[u] |= near & ~(ONE << np.uint64(u))
