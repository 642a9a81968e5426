"""Choosing the engine for an irreducible core.

Few vertices outside a largest clique: subsets.  Otherwise cutting planes; if they leave a gap, potential maximal
cliques when minimal separators are few, then a bounded number of cases by branch and cut, then more separators, then
cases without end.  Limits are counts, never times, so the way is the same on every machine.
"""

from nearchord_solve.arrays import I32
from nearchord_solve.fill.exact.blocks import solve_blocks
from nearchord_solve.fill.exact.branch import CaseSearch
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.cuts import Cuts, price_matrix
from nearchord_solve.fill.exact.greedy import coarse_portfolio, is_large, portfolio
from nearchord_solve.fill.exact.packing import disjoint
from nearchord_solve.fill.exact.root import Bounds, cut
from nearchord_solve.fill.exact.status import Status
from nearchord_solve.fill.exact.subsets import MOST_FREE, free_vertices, solve_subsets
from nearchord_solve.monitor import Monitor

FEW_SEPARATORS = 4_000
MANY_SEPARATORS = 20_000
FEW_NODES = 200
ENDLESS = 2**31


def first_bounds(core: Core, monitor: Monitor) -> Bounds | None:
    """The cheapest fill of the portfolio; for a large core also a packing of disjoint cycles, None when stopped."""
    if not is_large(core):
        return Bounds.above(core, portfolio(core, monitor))
    best = coarse_portfolio(core, monitor)
    if best is None:
        return None
    bounds = Bounds.above(core, best)
    bounds.raise_to(*disjoint(core, best, monitor.cells))
    return bounds


def search_core(core: Core, bounds: Bounds, most: int, monitor: Monitor) -> None:
    """Raise the lower bound of a core until it meets the upper one or passes ``most``, or until stopped.

    A large core is left as it is.
    """
    if is_large(core):
        return
    if free_vertices(core) <= MOST_FREE:
        limit = min(bounds.upper - 1, most)
        settle(core, bounds, limit, *solve_subsets(core, limit, monitor.cells))
        return
    relaxation = cut(core, bounds, most, monitor)
    cases = CaseSearch(core, relaxation, bounds, most, monitor)
    for separators, nodes in ((FEW_SEPARATORS, FEW_NODES), (MANY_SEPARATORS, ENDLESS)):
        if bounds.closed or bounds.lower > most or monitor.stop or by_blocks(core, bounds, most, separators, monitor):
            return
        if cases.run(nodes):
            return


def by_blocks(core: Core, bounds: Bounds, most: int, separators: int, monitor: Monitor) -> bool:
    """Look for a fill cheaper than the best known one among potential maximal cliques; whether that settled it."""
    limit = min(bounds.upper - 1, most)
    base, prices = price_matrix(core, Cuts.of(core, bounds.cycles), bounds.multipliers)
    slack = limit * bounds.multipliers.denominator - base
    return settle(core, bounds, limit, *solve_blocks(core, limit, prices, slack, separators, monitor.cells))


def settle(core: Core, bounds: Bounds, limit: int, status: Status, pairs: I32) -> bool:
    """Take over what an engine found out about fills of at most ``limit`` edges."""
    if status is Status.FOUND:
        bounds.offer(core, pairs)
        bounds.lower = bounds.upper
    elif status is Status.NONE:
        bounds.lower = max(bounds.lower, limit + 1)
    return status in (Status.FOUND, Status.NONE)
