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

from nearchord_solve.fill.exact.atoms import atoms
from nearchord_solve.fill.exact.core import Core, Mask, Pair, around, components, is_clique, members
from nearchord_solve.monitor import Monitor


@dataclass(frozen=True)
class Reduced:
    """What remains of a core: independent cores, and edges (of the part) that some minimum fill contains."""

    cores: list[Core]
    added: list[Pair]


def decompose(core: Core, monitor: Monitor) -> list[Core]:
    """Atoms without universal and simplicial vertices: rules 1 and 2 only.  Their fill numbers add up."""
    waiting = [core.everything]
    found = []
    while waiting:
        kept = waiting.pop()
        inside = stripped(core.adj, kept)
        if not inside:
            continue
        pieces = atoms(core.adj, inside, monitor.cells)
        if len(pieces) == 1:
            found.append(core.induced(pieces[0]))
        else:
            waiting.extend(reversed(pieces))
    return found


def reduce_core(core: Core, monitor: Monitor) -> Reduced:
    """Apply all rules until nothing changes.  Cores come in a fixed order."""
    waiting = [core]
    found: list[Core] = []
    added: list[Pair] = []
    while waiting:
        current = waiting.pop()
        pieces = decompose(current, monitor)
        if len(pieces) != 1 or pieces[0].n < current.n:
            waiting.extend(reversed(pieces))
            continue
        safe = [] if monitor.stop else safe_edges(current)
        if safe:
            added += current.lift(safe)
            waiting.append(current.with_edges(safe))
            continue
        contracted = contract_twins(current)
        if contracted.n < current.n:
            waiting.append(contracted)
        else:
            found.append(current)
    return Reduced(found, added)


def stripped(adj: list[Mask], kept: Mask) -> Mask:
    """What is left of ``kept`` after deleting universal and simplicial vertices again and again."""
    changed = True
    while changed:
        changed = False
        for v in members(kept):
            near = adj[v] & kept
            if near | 1 << v == kept or is_clique(adj, near):
                kept ^= 1 << v
                changed = True
    return kept


def safe_edges(core: Core) -> list[Pair]:
    """Edges by rule 3, each found in the graph with the earlier ones added.  O(n^2 m) bit operations."""
    adj = list(core.adj)
    found: list[Pair] = []
    changed = True
    while changed:
        changed = False
        for y in range(core.n):
            for far in list(components(adj, core.everything & ~adj[y] & ~(1 << y))):
                pair = _almost_clique(adj, around(adj, far))
                if pair is not None and _sizes_allow(core, pair, y, far):
                    found.append(pair)
                    adj[pair[0]] |= 1 << pair[1]
                    adj[pair[1]] |= 1 << pair[0]
                    changed = True
    return found


def _almost_clique(adj: list[Mask], inside: Mask) -> Pair | None:
    """The only non-adjacent pair inside, or None if there are none or several."""
    found = None
    for v in members(inside):
        lacking = inside & ~adj[v] & ~((2 << v) - 1)
        if lacking:
            if found is not None or lacking & (lacking - 1):
                return None
            found = (v, lacking.bit_length() - 1)
    return found


def _sizes_allow(core: Core, pair: Pair, y: int, far: Mask) -> bool:
    sizes = core.sizes
    most = sizes[y]
    if sizes[pair[0]] > most or sizes[pair[1]] > most:
        return False
    return min(sizes[pair[0]], sizes[pair[1]]) <= min(sizes[c] for c in members(far))


def contract_twins(core: Core) -> Core:
    """One vertex for each class of true twins, in order of their lowest vertex."""
    first: dict[Mask, int] = {}
    joined: dict[int, list[int]] = {}
    for v in range(core.n):
        head = first.setdefault(core.adj[v] | 1 << v, v)
        joined.setdefault(head, []).extend(core.classes[v])
    kept = 0
    for v in joined:
        kept |= 1 << v
    smaller = core.induced(kept)
    return Core(smaller.adj, [tuple(sorted(joined[v])) for v in members(kept)])
