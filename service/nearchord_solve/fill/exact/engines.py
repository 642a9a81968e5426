"""Choosing the engine for an irreducible core."""

from nearchord_solve.fill.exact.branch import CaseSearch
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.greedy import portfolio
from nearchord_solve.fill.exact.root import Bounds, cut
from nearchord_solve.fill.exact.subsets import DONE, MOST_FREE, NONE, free_vertices, solve_subsets
from nearchord_solve.monitor import Monitor

RESTARTS = 20


def first_bounds(core: Core) -> Bounds:
    """The cheapest fill of the portfolio."""
    best = portfolio(core, RESTARTS)
    return Bounds(best, core.cost(best))


def search_core(core: Core, bounds: Bounds, most: int, monitor: Monitor) -> None:
    """Raise the lower bound of a core until it meets the upper one or passes ``most``, or until stopped."""
    if free_vertices(core) <= MOST_FREE:
        by_subsets(core, bounds, most, monitor)
        return
    relaxation = cut(core, bounds, most, monitor)
    if not bounds.closed and bounds.lower <= most:
        print("BRANCH", core.n, bounds.lower, bounds.upper,flush=True)
        S=CaseSearch(core, relaxation, bounds, most, monitor)
        ok=S.run(10**6)
        print("BRANCH done",ok, len(S.tree), bounds.lower, bounds.upper, S.checkable,flush=True)


def by_subsets(core: Core, bounds: Bounds, most: int, monitor: Monitor) -> None:
    """Look for a fill cheaper than the best known one, of at most ``most`` edges; all or nothing."""
    limit = min(bounds.upper - 1, most)
    status, pairs = solve_subsets(core, limit, monitor.cells)
    if status == DONE:
        bounds.offer(core, pairs)
        bounds.lower = bounds.upper
    elif status == NONE:
        bounds.lower = limit + 1
