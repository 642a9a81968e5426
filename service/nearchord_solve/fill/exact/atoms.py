"""Minimal triangulation and decomposition by clique minimal separators.

The fill number of a graph is the sum over its atoms: a clique separator S splits a graph into pieces S + D, no
non-edge lies in two pieces (it would lie in the clique S), a triangulation induces one of each piece, and
triangulations of the pieces meet in a clique, so their union is a triangulation.
"""

from collections.abc import Sequence

from nearchord_solve.fill.exact.core import Mask, Pair, around, is_clique, members, reach


def minimal_triangulation(adj: Sequence[Mask], within: Mask) -> tuple[list[int], list[Mask]]:
    """Order and later neighbours of a minimal triangulation of the graph induced on ``within``.

    MCS-M (Berry, Blair, Heggernes, Peyton, Algorithmica 39 (2004) 287-298): returns the minimal elimination order
    of the vertices and, at each of them, its neighbours in the triangulation that come later in the order.
    O(n m) time.
    """
    weight = dict.fromkeys(members(within), 0)
    left = within
    backwards: list[tuple[int, Mask]] = []
    later: dict[int, Mask] = dict.fromkeys(weight, 0)
    while left:
        v = max(members(left), key=lambda u: (weight[u], -u))
        left &= ~(1 << v)
        for u in members(_reached_below(adj, v, left, weight)):
            weight[u] += 1
            later[u] |= 1 << v
        backwards.append((v, 0))
    order = [v for v, _ in reversed(backwards)]
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


def atoms(adj: Sequence[Mask], within: Mask) -> list[Mask]:
    """Atoms of the graph induced on ``within``: its pieces without clique separators.

    In the order of MCS-M, a vertex whose later neighbours S form a clique of the graph cuts off S and the component
    of the rest that holds it (Berry, Pogorelcnik, Simonet, Algorithms 3 (2010) 197-215; Leimer, Discrete Math. 113
    (1993) 99-123).  Simplicial vertices come out as clique atoms.  O(n m) time.
    """
    order, later = minimal_triangulation(adj, within)
    remaining = within
    found: list[Mask] = []
    for v, ahead in zip(order, later, strict=True):
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


def triangulation_fill(adj: Sequence[Mask], within: Mask) -> list[Pair]:
    """Fill edges of the minimal triangulation of MCS-M."""
    order, later = minimal_triangulation(adj, within)
    pairs = []
    for v, ahead in zip(order, later, strict=True):
        pairs += [(min(u, v), max(u, v)) for u in members(ahead & ~adj[v])]
    return pairs


def full_components(adj: Sequence[Mask], separator: Mask, within: Mask) -> list[Mask]:
    """Components of ``within`` minus the separator that see all of it."""
    left = within & ~separator
    full = []
    while left:
        part = reach(adj, left & -left, left)
        left &= ~part
        if around(adj, part) & within == separator:
            full.append(part)
    return full
