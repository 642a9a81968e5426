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

Minimal separators start from neighbourhoods N(C), C a component of G - N[v], and close under S -> N(C), C a component
of G - S - N(x), x in S (Berry, Bordat, Cogis, Int. J. Found. Comput. Sci. 11 (2000) 397-403).
"""

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.arrays import I64, U64
from nearchord_solve.fill.exact.kernels.separators import accepted, affordable, all_separators, extended, separating
from nearchord_solve.kernels.cells import STOP

BOOL = NDArray[np.bool_]


def minimal_separators(rows: U64, most: int, cells: I64) -> U64 | None:
    """All minimal separators of a connected graph, uint64[s, W], or None if more than ``most`` or stopped."""
    complete, found = all_separators(rows, most, cells)
    return found if complete else None


def potential_cliques(rows: U64, separators: U64, prices: I64, slack: int, most: int, cells: I64) -> U64 | None:
    """All potential maximal cliques whose missing pairs cost at most ``slack``: uint64[k, W].

    ``rows`` uint64[n, W] of a graph in which every beginning 0..a is connected; ``separators`` uint64[s, W] all its
    minimal separators; ``prices`` int64[n, n], sums below 2^62.  None if there are more than ``most`` on the way, or
    stopped.
    """
    n = rows.shape[0]
    levels = _separators_by_level(rows, separators)
    found = np.zeros((1, rows.shape[1]), np.uint64)
    found[0, 0] = 1
    for a in range(1, n):
        now, before = levels[a], levels[a - 1]
        kept = distinct(np.concatenate((found, with_vertex(found, a), with_vertex(now, a))))
        kept = kept[accepted(rows, a + 1, kept, prices, slack)]
        starts = now[~_holding(now, a) & ~_among(now, before)]
        starts = starts[affordable(starts, prices, slack)]
        found = distinct(np.concatenate((kept, extended(rows, a + 1, now, starts, prices, slack, cells))))
        if cells[STOP] != 0 or found.shape[0] > most:
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


def _holding(sets: U64, a: int) -> BOOL:
    """Which sets hold a."""
    found: BOOL = (sets[:, a >> 6] & np.uint64(1 << (a & 63))) != 0
    return found


def _among(sets: U64, others: U64) -> BOOL:
    """Which of the sets are among the others; each of both without repetition."""
    _, place, times = np.unique(np.concatenate((others, sets)), axis=0, return_inverse=True, return_counts=True)
    found: BOOL = times[place.ravel()[others.shape[0] :]] == 2
    return found
