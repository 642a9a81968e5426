"""Upper bounds: greedy elimination with prices, made minimal."""

import numpy as np

from nearchord_solve.arrays import F64, I32, I64, U64
from nearchord_solve.fill.exact.atoms import triangulation_fill
from nearchord_solve.fill.exact.core import Core, with_pairs
from nearchord_solve.fill.exact.kernels.greedy import BY_DEGREE, BY_FILL, eliminate
from nearchord_solve.fill.kernels.dense import fill_by_degree, fill_by_missing, list_fill, thin
from nearchord_solve.monitor import Monitor

ENDLESS_EFFORT = 2**62
EFFORT = 4_000_000_000  # words that one step on a large core may touch: a few seconds
MOST_DENSE = 2_048  # vertices of a core for which matrices of numbers are made: 32 MiB each
MOST_FOR_SEARCH = 500
MOST_RESTARTS = 20
RESTARTS_OF_ONE = 10_000  # restarts are at most this over the number of vertices
PRODUCTS: F64 = np.empty((0, 0))

_GOING_ON = np.zeros(Monitor.CELLS, np.int64)


def prices_of(core: Core) -> F64:
    """What a fill edge between two vertices costs: float64[n, n]."""
    sizes = core.sizes.astype(np.float64)
    return np.outer(sizes, sizes)


def completed(core: Core, rule: int, price: F64, noise: F64) -> I32:
    """Fill of one greedy elimination, made minimal.  ``price`` may be ``PRODUCTS`` for what the pairs cost."""
    filled = core.rows.copy()
    eliminate(filled, rule, price, core.sizes.astype(np.float64), noise)
    return thinned(core, filled, _GOING_ON)


def minimal(core: Core, fill: I32, cells: I64) -> I32:
    """A subset of a fill that is still one and has no smaller one inside, sorted.

    On a large core it may have one when stopped or after much effort.
    """
    return thinned(core, with_pairs(core.rows.copy(), fill), cells)


def is_large(core: Core) -> bool:
    """Whether matrices of numbers would be too large, and with them the relaxation and the engines."""
    return core.n > MOST_DENSE


def thinned(core: Core, filled: U64, cells: I64) -> I32:
    """Fill of a triangulation after dropping what can go, sorted; ``filled`` is overwritten."""
    pairs = list_fill(core.rows, filled)
    effort, cells = (EFFORT, cells) if is_large(core) else (ENDLESS_EFFORT, _GOING_ON)
    count, _ = thin(filled, pairs, np.array([effort]), cells)
    return pairs[:count].copy()


def portfolio(core: Core, monitor: Monitor) -> I32:
    """The cheapest of: minimum degree, MCS-M, minimum fill, and minimum fill with ties shaken; all minimal.

    Deterministic: the shaking is a fixed sequence, the longer the smaller the core.  When stopped, at least minimum
    degree.
    """
    still = np.zeros(core.n)
    found = [completed(core, BY_DEGREE, PRODUCTS, still)]
    if core.n <= MOST_FOR_SEARCH and (searched := triangulation_fill(core.rows, monitor.cells)) is not None:
        found.append(searched)
    random = np.random.default_rng(core.n)
    for turn in range(max(1, min(MOST_RESTARTS, RESTARTS_OF_ONE // max(1, core.n)))):
        if monitor.stop:
            break
        noise = random.random(core.n) * (2.0, 0.5)[turn % 2] if turn else still
        found.append(completed(core, BY_FILL, PRODUCTS, noise))
    return min(found, key=core.cost)


def coarse_portfolio(core: Core, monitor: Monitor) -> I32 | None:
    """The same for a large core, without regard to the sizes of classes: minimum degree, and minimum fill if effort
    allows, made minimal as far as effort allows.  None when stopped in minimum degree."""
    filled = np.empty_like(core.rows)
    if not fill_by_degree(core.rows, filled, np.array([ENDLESS_EFFORT]), monitor.cells):
        return None
    best = thinned(core, filled, monitor.cells)
    if fill_by_missing(core.rows, filled, np.array([EFFORT]), monitor.cells):
        best = min(best, thinned(core, filled, monitor.cells), key=core.cost)
    return best
