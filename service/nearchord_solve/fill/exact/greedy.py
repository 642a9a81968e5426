"""Upper bounds: greedy elimination with prices, made minimal."""

import numpy as np

from nearchord_solve.arrays import F64, U64
from nearchord_solve.fill.exact.atoms import triangulation_fill
from nearchord_solve.fill.exact.core import Core, Pair, joined
from nearchord_solve.fill.exact.kernels.greedy import BY_DEGREE, BY_FILL, eliminate
from nearchord_solve.fill.exact.words import new_pairs, rows_of
from nearchord_solve.fill.kernels.dense import list_fill, thin
from nearchord_solve.monitor import Monitor

ENDLESS_EFFORT = 2**62
MOST_FOR_SEARCH = 500
MOST_RESTARTS = 20
RESTARTS_OF_ONE = 10_000  # restarts are at most this over the number of vertices

_GOING_ON = np.zeros(Monitor.CELLS, np.int64)


def prices_of(core: Core) -> F64:
    """What a fill edge between two vertices costs: float64[n, n]."""
    sizes = np.array(core.sizes, np.float64)
    return np.outer(sizes, sizes)


def completed(core: Core, rule: int, price: F64, noise: F64) -> list[Pair]:
    """Fill of one greedy elimination, made minimal."""
    filled = rows_of(core.adj)
    eliminate(filled, rule, price, np.array(core.sizes, np.float64), noise)
    return thinned(core, filled)


def minimal(core: Core, fill: list[Pair]) -> list[Pair]:
    """A subset of a fill that is still one and has no smaller one inside."""
    return thinned(core, rows_of(joined(core.adj, fill)))


def thinned(core: Core, filled: U64) -> list[Pair]:
    """Fill of a triangulation after dropping what can go; ``filled`` is overwritten."""
    pairs = list_fill(rows_of(core.adj), filled)
    thin(filled, pairs, np.array([ENDLESS_EFFORT]), _GOING_ON)
    return new_pairs(core.adj, filled)


def portfolio(core: Core, monitor: Monitor) -> list[Pair]:
    """The cheapest of: minimum degree, MCS-M, minimum fill, and minimum fill with ties shaken; all minimal.

    Deterministic: the shaking is a fixed sequence, the longer the smaller the core.  When stopped, at least minimum
    degree.
    """
    still = np.zeros(core.n)
    price = prices_of(core)
    found = [completed(core, BY_DEGREE, price, still)]
    if core.n <= MOST_FOR_SEARCH and (searched := triangulation_fill(core.adj, core.everything, monitor.cells)):
        found.append(searched)
    random = np.random.default_rng(core.n)
    for turn in range(max(1, min(MOST_RESTARTS, RESTARTS_OF_ONE // max(1, core.n)))):
        if monitor.stop:
            break
        noise = random.random(core.n) * (2.0, 0.5)[turn % 2] if turn else still
        found.append(completed(core, BY_FILL, price, noise))
    return min(found, key=core.cost)
