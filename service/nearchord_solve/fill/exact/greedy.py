"""Upper bounds: greedy elimination with prices, made minimal."""

import numpy as np

from nearchord_solve.arrays import F64, U64
from nearchord_solve.fill.exact.atoms import triangulation_fill
from nearchord_solve.fill.exact.core import Core, Pair, joined
from nearchord_solve.fill.exact.kernels.greedy import BY_DEGREE, BY_FILL, eliminate
from nearchord_solve.fill.exact.words import new_pairs, rows_of
from nearchord_solve.kernels.dense import list_fill, thin
from nearchord_solve.monitor import Monitor

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
    thin(filled, pairs, _GOING_ON)
    return new_pairs(core.adj, filled)


def portfolio(core: Core, restarts: int) -> list[Pair]:
    """The cheapest of: MCS-M, minimum degree, minimum fill, and ``restarts`` of minimum fill with shaken ties.

    All minimal triangulations.  Deterministic: the shaking is a fixed sequence.
    """
    still = np.zeros(core.n)
    price = prices_of(core)
    found = [
        triangulation_fill(core.adj, core.everything),
        completed(core, BY_DEGREE, price, still),
        completed(core, BY_FILL, price, still),
    ]
    random = np.random.default_rng(core.n)
    for turn in range(restarts):
        noise = random.random(core.n) * (0.5 if turn % 2 else 2.0)
        found.append(completed(core, BY_FILL, price, noise))
    return min(found, key=core.cost)
