"""Prices of vertices after a sweep for the heaviest independent set."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I64
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.sweep.independent import Swept
from nearchord_solve.sweep.kernels import gaps
from nearchord_solve.sweep.kernels import prices as kernels


@dataclass(frozen=True, eq=False)
class Priced:
    """Prices by vertex, int64[n] each: the optimum less that of the sets with the vertex, and of those without it."""

    inside: I64
    outside: I64


def price_vertices(swept: Swept, monitor: Monitor) -> Priced | None:
    """Prices of all vertices after a sweep that settled all cores by tables; None if stopped.

    O(n + m log n) outside cores; inside, a few times the states.
    """
    structure = swept.structure
    forest, order = structure.forest, structure.numbering.order
    assert swept.chosen is not None
    n = order.size
    monitor.enter(Phase.SWEEP, n)
    used = int(swept.tries.end.max(initial=0))
    prices = kernels.Prices(
        np.empty(n, np.int64),
        np.zeros(n, np.int64),
        np.empty(n, np.int64),
        np.empty(n + forest.bag_kind.size, np.int64),
        np.full(used, gaps.MOST_GAP),
    )
    by_place = swept.chosen[order]
    if not kernels.outward_prices(
        structure.numbering, forest, swept.tries, used, swept.residual, by_place, prices, monitor.cells
    ):
        return None
    inside, outside = np.empty(n, np.int64), np.empty(n, np.int64)
    inside[order] = prices.chosen
    outside[order] = prices.left_out
    return Priced(inside, outside)
