"""Minimal triangulation and decomposition by clique minimal separators.

The fill number of a graph is the sum over its atoms: a clique separator S splits a graph into pieces S + D, no
non-edge lies in two pieces (it would lie in the clique S), a triangulation induces one of each piece, and
triangulations of the pieces meet in a clique, so their union is a triangulation.
"""

from collections.abc import Sequence

from nearchord_solve.arrays import I64
from nearchord_solve.fill.exact.core import Mask, Pair, is_clique, members, reach
from nearchord_solve.kernels.cells import STOP


def minimal_triangulation(adj: Sequence[Mask], within: Mask, cells: I64) -> tuple[list[int], list[Mask]] | None:
    """Order and later neighbours of a minimal triangulation of the graph induced on ``within``.

    MCS-M (Berry, Blair, Heggernes, Peyton, Algorithmica 39 (2004) 287-298): returns the minimal elimination order
    of the vertices and, at each of them, its neighbours in the triangulation that come later in the order; None if
    ``cells`` say stop.  O(n m) time.
    """
    weight = dict.fromkeys(members(within), 0)
    left = within
    backwards: list[int] = []
    later: dict[int, Mask] = dict.fromkeys(weight, 0)
    while left:
        if cells[STOP]:
            return None
        v = max(members(left), key=lambda u: (weight[u], -u))
        left &= ~(1 << v)
        for u in members(_reached_below(adj, v, left, weight)):
            weight[u] += 1
            later[u] |= 1 << v
        backwards.append(v)
    order = backwards[::-1]
    return order, [later[v] for v in order]


def _reached_below(adj: Sequence[Mask], v: int, left: Mask, weight: dict[int, int]) -> Mask:
    """Vertices u of ``left`` with a path v..u whose inner vertices lie in ``left`` and weigh less than u."""
    found = adj[v] & left
    levels: dict[int, Mask] = {}
    for u in members(found):
        levels[weight[u]] = levels.get(weight[u], 0) | 1 << u
    seen = found
    while levels:
        level = min(levels)
        inner = levels.pop(level)
        while inner:
            low = inner & -inner
            inner ^= low
            for x in members(adj[low.bit_length() - 1] & left & ~seen):
                seen |= 1 << x
                if weight[x] > level:
                    found |= 1 << x
                    levels[weight[x]] = levels.get(weight[x], 0) | 1 << x
                else:
                    inner |= 1 << x
    return found


def atoms(adj: Sequence[Mask], within: Mask, cells: I64) -> list[Mask]:
    """Atoms of the graph induced on ``within``: its pieces without clique separators.

    In the order of MCS-M, a vertex whose later neighbours S form a clique of the graph cuts off S and the component
    of the rest that holds it (Berry, Pogorelcnik, Simonet, Algorithms 3 (2010) 197-215; Leimer, Discrete Math. 113
    (1993) 99-123).  Simplicial vertices come out as clique atoms.  O(n m) time.  When
    stopped, the whole comes out as one piece.
    """
    triangulation = minimal_triangulation(adj, within, cells)
    if triangulation is None:
        return [within]
    remaining = within
    found: list[Mask] = []
    for v, ahead in zip(*triangulation, strict=True):
        if not remaining >> v & 1:
            continue
        cut = ahead & remaining
        if is_clique(adj, cut):
            piece = reach(adj, 1 << v, remaining & ~cut)
            if remaining & ~piece & ~cut:
                found.append(piece | cut)
                remaining &= ~piece
    if remaining:
        found.append(remaining)
    return found


def triangulation_fill(adj: Sequence[Mask], within: Mask, cells: I64) -> list[Pair] | None:
    """Fill edges of the minimal triangulation of MCS-M; None if stopped."""
    triangulation = minimal_triangulation(adj, within, cells)
    if triangulation is None:
        return None
    pairs = []
    for v, ahead in zip(*triangulation, strict=True):
        pairs += [(min(u, v), max(u, v)) for u in members(ahead & ~adj[v])]
    return pairs
