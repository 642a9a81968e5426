"""Reductions that keep the fill number, to a fixed point.

1. A universal or simplicial vertex needs no fill edge: a triangulation of the rest extends to it.
2. The atoms of the decomposition by clique separators are independent (module :mod:`atoms`).
3. *Safe edge.*  Let y be a vertex, C a component of G - N[y], S = N(C), and let u, v be the only non-adjacent pair
   in S.  Then some minimum triangulation contains uv.
4. True twins form a class, and the fill between two classes is all or nothing: replace the fill edges of every
   member by those of a member with fewest; the result is still a triangulation (a true twin can be added to any
   vertex of a chordal graph) and costs no more.

Proof of 3, for classes of sizes s with s(u) <= s(y), s(v) <= s(y) and s(u) <= s(c) for every c in C (always so
when all sizes are 1).  Let H be a minimum triangulation without uv.  Every vertex of S is adjacent to y, and u and v
have neighbours in C.  Take a shortest path from u to v through C in H; with y it closes a cycle of H in which the
path has no chord and uv is none, so y is joined in H to all inner vertices; let p in C be the first.  Contract the
edge uy of H on S + C + y into u, and contract the connected set u + C of H on V - C into u.  Contraction keeps
graphs chordal.  Both results contain S as a clique, and G on S + C and on V - C; they meet in S, so their union H' is
chordal and contains G.  New in H' are uv, edges uc with yc in H and c in C, c not p because up is in H, and edges ux
with x outside S + C + y joined in H to C.  Gone are all edges of H between C and V - C - S.  With D the vertices of C
joined to y in H, the first kind costs s(u)(s(v) + s(D) - s(p)) and y alone gave back s(y) s(D) >= s(u) s(D) +
(s(y) - s(u)) s(p), which covers it since s(u) s(v) <= s(y) s(p): s(u) <= s(p), s(v) <= s(y).  An edge ux costs
s(u) s(x), and x gave back at least s(c) s(x) >= s(u) s(x) for some c in C.  So H' is no dearer and contains uv.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.fill.exact.atoms import atoms
from nearchord_solve.fill.exact.core import NO_PAIRS, Core
from nearchord_solve.fill.exact.kernels.reduce import add_safe_edges, stripped
from nearchord_solve.fill.exact.keys import row_keys
from nearchord_solve.fill.exact.ragged import starts
from nearchord_solve.monitor import Monitor

MOST_SAFE = 2**32  # n^2 W of a core in which safe edges are looked for: about 6,500 vertices


@dataclass(frozen=True, eq=False)
class Reduced:
    """What remains of a core: independent cores, and edges (of the part) that some minimum fill contains."""

    cores: list[Core]
    added: I32


def decompose(core: Core, monitor: Monitor) -> list[Core]:
    """Atoms without universal and simplicial vertices: rules 1 and 2 only.  Their fill numbers add up."""
    waiting = [(core, np.arange(core.n, dtype=np.int32))]
    found = []
    while waiting:
        whole, piece = waiting.pop()
        current = whole.induced(piece)
        kept = stripped(current.rows, monitor.cells)
        if not kept.size:
            continue
        inside = current.induced(kept)
        ptr, vertex = atoms(inside.rows, monitor.cells)
        if ptr.size == 2:
            found.append(inside)
        else:
            waiting.extend((inside, vertex[begin:end]) for end, begin in pairwise(ptr[::-1].tolist()))
    return found


def reduce_core(core: Core, monitor: Monitor) -> Reduced:
    """Apply all rules until nothing changes.  Cores come in a fixed order."""
    waiting = [core]
    found: list[Core] = []
    added = [NO_PAIRS]
    while waiting:
        current = waiting.pop()
        pieces = decompose(current, monitor)
        if len(pieces) != 1 or pieces[0].n < current.n:
            waiting.extend(reversed(pieces))
            continue
        reduced, pairs = with_safe_edges(current, monitor)
        if pairs.shape[0]:
            added.append(current.lift(pairs))
            waiting.append(reduced)
            continue
        contracted = contract_twins(current)
        if contracted.n < current.n:
            waiting.append(contracted)
        else:
            found.append(current)
    return Reduced(found, np.concatenate(added))


def with_safe_edges(core: Core, monitor: Monitor) -> tuple[Core, I32]:
    """The core with edges by rule 3, each found in the graph with the earlier ones added; none in very large cores."""
    rows = core.rows.copy()
    if core.n * rows.size > MOST_SAFE:
        return core, NO_PAIRS
    pairs = add_safe_edges(rows, core.sizes, monitor.cells)
    return Core(rows, core.start, core.member), pairs


def contract_twins(core: Core) -> Core:
    """One vertex for each class of true twins, in order of their lowest vertex.

    Twins are found by keys of their rows, then compared; should vertices that are no twins ever have the same key,
    twins of the higher ones stay apart.  O(n W + n log n).
    """
    head = _first_twins(core)
    heads = np.flatnonzero(head == np.arange(core.n)).astype(np.int32)
    if heads.size == core.n:
        return core
    smaller = core.induced(heads)
    owner = np.searchsorted(heads, np.repeat(head, core.sizes))
    order = np.lexsort((core.member, owner))
    return Core(smaller.rows, starts(np.bincount(owner, minlength=heads.size)), core.member[order])


def _first_twins(core: Core) -> I64:
    """The lowest twin of each vertex."""
    closed = core.rows.copy()
    vertices = np.arange(core.n)
    closed[vertices, vertices >> 6] |= np.uint64(1) << (vertices & 63).astype(np.uint64)
    _, first, place = np.unique(row_keys(closed), return_index=True, return_inverse=True)
    head = first[place]
    return np.where((closed == closed[head]).all(axis=1), head, vertices)
