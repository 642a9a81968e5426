"""Add-on ``prices``: what choosing each vertex costs, and what leaving it out costs.

The planner's reading: how much of the total weight an overruling of the answer gives up.  The optimum less that of
the sets with the vertex (``price_in``), and of those without it (``price_out``); -1 where no set that respects the pins
does so.  Pins leave nothing open about the vertices they settle: a ``must`` vertex costs nothing, a ``never`` vertex
and a neighbour of a ``must`` vertex are left out at no cost.
"""

import numpy as np

from nearchord_solve.questions.addons.added import Added, Settled
from nearchord_solve.sweep.prices import Unpriced, price_vertices


def add_prices(settled: Settled, n: int) -> Added:
    """Columns ``price_in`` and ``price_out``, int64 by vertex of the whole graph of ``n`` vertices."""
    task = settled.task
    room = task.budget.memory - settled.swept.structure.held_bytes
    priced = price_vertices(settled.swept, room, task.gauge.monitor)
    if isinstance(priced, Unpriced):
        return Added(note=str(priced))
    inside = np.full(n, -1)
    outside = np.zeros(n, np.int64)
    inside[settled.rest.taken] = 0
    outside[settled.rest.taken] = -1
    inside[settled.rest.vertices] = priced.inside
    outside[settled.rest.vertices] = priced.outside
    return Added({"price_in": inside, "price_out": outside})
