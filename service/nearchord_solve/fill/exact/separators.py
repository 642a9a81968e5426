"""Minimal separators and potential maximal cliques, enumerated completely up to a budget.

A separator S is minimal if at least two components of G - S see all of it.  A set is a potential maximal clique if it
is a maximal clique of some minimal triangulation; equivalently, no component of the rest sees all of it, and any two of
its vertices are adjacent or seen by a common component (Bouchitté and Todinca, SIAM J. Comput. 31 (2001) 212-232).

Enumeration adds one vertex a at a time (Bouchitté and Todinca, Theor. Comput. Sci. 276 (2002) 17-32): a potential
maximal clique of G is one of G - a, or one of those with a added, or S + a, or S + (T & C), where S and T are
minimal separators of G, C is a full component of S, and in the last case S avoids a and is no minimal separator of
G - a.

*The budget keeps it complete.*  Let prices d >= 0 on pairs be such that a fill containing the pairs M costs at least
``base`` + d(M) (such prices come from the relaxation: weight minus load).  A wanted fill costs at most k, so
every clique of its triangulation has d(missing pairs) <= k - base, and so has each of its subsets; all sets
that the rules above start from, Omega - a and S, are subsets of the clique they lead to.  T need not be within
budget, so separators themselves are enumerated without one.
"""

import numpy as np

from nearchord_solve.arrays import I64, U64
from nearchord_solve.fill.exact.core import Mask, around, components, members
from nearchord_solve.fill.exact.kernels.separators import accepted, affordable, full_sides, separating
from nearchord_solve.kernels.cells import STOP


def minimal_separators(adj: list[Mask], within: Mask, most: int, cells: I64) -> list[Mask] | None:
    """All minimal separators of the connected graph induced on ``within``, or None if more than ``most`` or stopped.

    Starts from neighbourhoods N(C), C a component of G - N[v], and closes under S -> N(C), C a component of
    G - S - N(x), x in S (Berry, Bordat, Cogis, Int. J. Found. Comput. Sci. 11 (2000) 397-403).
    """
    found: dict[Mask, None] = {}
    waiting: list[Mask] = []
    for v in members(within):
        waiting.extend(_close_by(adj, within & ~adj[v] & ~(1 << v), found))
    while waiting:
        separator = waiting.pop()
        for x in members(separator):
            waiting.extend(_close_by(adj, within & ~separator & ~adj[x], found))
        if len(found) > most or cells[STOP]:
            return None
    return list(found)


def _close_by(adj: list[Mask], outside: Mask, found: dict[Mask, None]) -> list[Mask]:
    """Record the neighbourhoods of the components of ``outside``; returns the new ones."""
    fresh = []
    for part in components(adj, outside):
        separator = around(adj, part)
        if separator and separator not in found:
            found[separator] = None
            fresh.append(separator)
    return fresh


def connected_order(adj: list[Mask]) -> list[int]:
    """An order in which every beginning is connected: next a vertex with most neighbours so far, then the lowest."""
    order = [0]
    done = 1
    while len(order) < len(adj):
        reachable = around(adj, done)
        v = max(members(reachable), key=lambda u: ((adj[u] & done).bit_count(), -u))
        order.append(v)
        done |= 1 << v
    return order


def potential_cliques(rows: U64, separators: U64, prices: I64, slack: int, most: int, cells: I64) -> U64 | None:
    """All potential maximal cliques whose missing pairs cost at most ``slack``.

    ``rows`` uint64[n, W] of a graph numbered by :func:`connected_order`; ``separators`` uint64[s, W] all its minimal
    separators; ``prices`` int64[n, n], sums below 2^62.  None if there are more than ``most`` on the way, or stopped.
    """
    n = rows.shape[0]
    levels = _separators_by_level(rows, separators)
    found = np.zeros((1, rows.shape[1]), np.uint64)
    found[0, 0] = 1
    for a in range(1, n):
        if cells[STOP] != 0:
            return None
        now, before = levels[a], levels[a - 1]
        candidates = [found, with_vertex(found, a), with_vertex(now, a)]
        kept = [distinct(np.concatenate(candidates))]
        kept[0] = kept[0][accepted(rows, a + 1, kept[0], prices, slack)]
        known = {row.tobytes() for row in before}
        starts = now[[not _in(row, a) and row.tobytes() not in known for row in now]]
        starts = starts[affordable(starts, prices, slack)]
        for start in starts:
            if cells[STOP] != 0:
                return None
            for full in full_sides(rows, a + 1, start):
                extended = distinct(now & full)
                extended = extended[extended.any(axis=1)] | start
                kept.append(extended[accepted(rows, a + 1, extended, prices, slack)])
        found = distinct(np.concatenate(kept))
        if found.shape[0] > most:
            return None
    return found


def _separators_by_level(rows: U64, separators: U64) -> list[U64]:
    """Minimal separators of the graph on vertices 0..a, for each a.

    A minimal separator of G - a is one of G, or becomes one with a added.
    """
    n, width = rows.shape
    levels = [np.empty((0, width), np.uint64)] * n
    levels[n - 1] = distinct(separators)
    for a in range(n - 1, 0, -1):
        candidates = distinct(without_vertex(levels[a], a))
        levels[a - 1] = candidates[separating(rows, a, candidates)]
    return levels


def distinct(sets: U64) -> U64:
    """Rows without repetition, in a fixed order."""
    if sets.shape[0] < 2:
        return sets
    return np.unique(sets, axis=0)


def with_vertex(sets: U64, a: int) -> U64:
    """Each set with a added."""
    grown = sets.copy()
    grown[:, a >> 6] |= np.uint64(1 << (a & 63))
    return grown


def without_vertex(sets: U64, a: int) -> U64:
    """Each set with a removed."""
    shrunk = sets.copy()
    shrunk[:, a >> 6] &= ~np.uint64(1 << (a & 63))
    return shrunk


def _in(words: U64, a: int) -> bool:
    return bool(words[a >> 6] >> np.uint64(a & 63) & np.uint64(1))
