"""Engine for cores with few minimal separators: dynamic programming over potential maximal cliques.

A component C of G - S that sees all of S is a *block* with separator S = N(C).  If a potential maximal clique Omega
lies in S + C and contains S, it splits the block into the components of C - Omega, which are blocks again, so

    cost(C) = min over such Omega of fill(Omega) - fill(S) + sum of cost(D) over the components D of C - Omega,

and the minimum fill is the least fill(Omega) + sum of cost(D) over all components D of G - Omega (Fomin, Kratsch,
Todinca, Villanger, SIAM J. Comput. 38 (2008) 1058-1079).  Only cliques within the budget are needed (module
:mod:`separators`).
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I64
from nearchord_solve.fill.exact.core import Core, Mask, Pair, around, components, members, missing
from nearchord_solve.fill.exact.packing import DENOMINATOR
from nearchord_solve.fill.exact.separators import connected_order, minimal_separators, potential_cliques
from nearchord_solve.fill.exact.status import Status
from nearchord_solve.fill.exact.words import masks_of, rows_of
from nearchord_solve.kernels.cells import STOP

MOST_CLIQUES = 200_000
_ENDLESS = 2**62


@dataclass(frozen=True)
class _Split:
    """A clique that serves a block: what it adds beyond the separator, and the blocks below it."""

    clique: Mask
    extra: int
    below: tuple[Mask, ...]


def solve_blocks(
    core: Core, limit: int, listed: Mapping[Pair, int], base: int, most_separators: int, cells: I64
) -> tuple[Status, list[Pair]]:
    """A minimum fill of at most ``limit`` edges.

    ``base`` and ``listed`` prices as from :func:`packing.prices`; 0 and {} always hold.  Returns (FOUND, fill),
    (NONE, []) if every fill costs more, (TOO_LARGE, []) if there are more separators or cliques than allowed, or
    (STOPPED, []).
    """
    order = connected_order(core.adj)
    place = {v: i for i, v in enumerate(order)}
    adj = [sum(1 << place[u] for u in members(core.adj[v])) for v in order]
    sizes = [core.sizes[v] for v in order]
    separators = minimal_separators(adj, core.everything, most_separators, cells)
    if separators is None:
        return (Status.STOPPED if cells[STOP] else Status.TOO_LARGE), []
    prices = np.zeros((core.n, core.n), np.int64)
    for a, b in missing(adj, core.everything):
        named = (min(order[a], order[b]), max(order[a], order[b]))
        prices[a, b] = prices[b, a] = listed.get(named, sizes[a] * sizes[b] * DENOMINATOR)
    rows = rows_of(adj)
    width = rows.shape[1]
    packed = b"".join(s.to_bytes(8 * width, "little") for s in separators)
    sets = np.frombuffer(packed, np.uint64).reshape(-1, width).copy()
    cliques = potential_cliques(rows, sets, prices, limit * DENOMINATOR - base, MOST_CLIQUES, cells)
    if cliques is None:
        return (Status.STOPPED if cells[STOP] else Status.TOO_LARGE), []
    cost, chosen = _best(adj, sizes, masks_of(cliques), limit, cells)
    if cells[STOP]:
        return Status.STOPPED, []
    if cost > limit:
        return Status.NONE, []
    pairs = {(min(order[a], order[b]), max(order[a], order[b])) for clique in chosen for a, b in missing(adj, clique)}
    return Status.FOUND, sorted(pairs)


def _best(adj: list[Mask], sizes: list[int], cliques: list[Mask], limit: int, cells: I64) -> tuple[int, list[Mask]]:
    """Least cost and the cliques of a triangulation that reaches it."""
    everything = (1 << len(adj)) - 1
    splits: dict[Mask, list[_Split]] = {}
    for clique in cliques:
        if cells[STOP]:
            return _ENDLESS, []
        _record(adj, sizes, clique, everything, splits)
    cost: dict[Mask, int] = {}
    choice: dict[Mask, _Split] = {}
    for block in sorted(splits, key=lambda c: (c.bit_count(), c)):
        best = limit + 1
        for split in splits[block]:
            total = split.extra
            for below in split.below:
                total += cost.get(below, limit + 1)
            if total < best:
                best, choice[block] = total, split
        if best <= limit:
            cost[block] = best
    chosen: list[Mask] = []
    waiting = [everything] if everything in cost else []
    while waiting:
        split = choice[waiting.pop()]
        chosen.append(split.clique)
        waiting.extend(split.below)
    return cost.get(everything, _ENDLESS), chosen


def _record(
    adj: list[Mask], sizes: list[int], clique: Mask, everything: Mask, splits: dict[Mask, list[_Split]]
) -> None:
    """Enter a clique at the block of each of its separators, and at the whole graph."""
    sides = [(part, around(adj, part)) for part in components(adj, everything & ~clique)]
    lacking = _lacking(adj, sizes, clique)
    splits.setdefault(everything, []).append(_Split(clique, lacking, tuple(part for part, _ in sides)))
    for separator in {s for _, s in sides}:
        below = tuple(part for part, s in sides if s & ~separator)
        block = clique & ~separator
        for part in below:
            block |= part
        splits.setdefault(block, []).append(_Split(clique, lacking - _lacking(adj, sizes, separator), below))


def _lacking(adj: list[Mask], sizes: list[int], inside: Mask) -> int:
    return sum(sizes[a] * sizes[b] for a, b in missing(adj, inside))
