"""Question ``fractional-colouring``: the shortest frame in which every vertex is served as long as it demands, and
neighbours never together.

The planner's reading: an airtime plan, with the price of each bottleneck.  A plan is a list of independent sets with
shares of time; the shortest one is the optimum of a linear program over all independent sets.  The program falls apart
over parts (:mod:`nearchord_solve.colouring.parts`); only fill cores that do not fit into the frame that the heaviest
clique needs have it solved (:mod:`nearchord_solve.colouring.shortest`), exactly, in fractions.
"""

from dataclasses import dataclass
from math import gcd

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.budget import Budget
from nearchord_solve.colouring.allotment import Allotment
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Outcome
from nearchord_solve.questions.served import MOST_ENTRIES, Request, outcome_of_plan, serve, without_plan


@dataclass(frozen=True)
class FractionalColouring:
    """The weights of the solve are the demands.

    The outcome's value is a fraction.  Set i of the plan is ``share_vertex[share_start[i]:share_start[i+1]]``, with the
    share ``share_numerator[i] / share_denominator[0]``; the shares add up to the value.
    """

    def answer(
        self, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
    ) -> Outcome:
        """Answer for checked arguments; see :func:`nearchord_solve.solve`."""
        request = Request(graph, weights, False, budget, when_over, monitor, reuse)
        served = serve(request)
        if isinstance(served, Outcome):
            return served
        if served.allotment.entries <= MOST_ENTRIES:
            return outcome_of_plan(request, served, _columns)
        return without_plan(
            outcome_of_plan(request, served, lambda _: {}),
            f"the sets of a plan would list more than {MOST_ENTRIES} vertices; give demands in a coarser unit",
        )


def _columns(allotment: Allotment) -> dict[str, U32 | I64]:
    lengths, vertex, first, last = allotment.segments()
    sizes = last - first
    before = np.cumsum(sizes) - sizes
    segment = np.arange(int(sizes.sum())) + np.repeat(first - before, sizes)
    order = np.argsort(segment, kind="stable")
    members = np.repeat(vertex, sizes)[order].astype(np.uint32)
    start = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.bincount(segment, minlength=lengths.size))))
    shared = gcd(allotment.unit, *lengths.tolist())
    return {
        "share_start": start,
        "share_vertex": members,
        "share_numerator": lengths // shared,
        "share_denominator": np.array([allotment.unit // shared], np.int64),
    }
