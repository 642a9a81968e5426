"""Question ``colouring``: the fewest colours so that every vertex has as many as it demands and neighbours share none.

The planner's reading: a channel plan for everybody.  Each colour is one unit of a plan of independent sets; how plans
are put together from those of parts, and why that is exact, is said in :mod:`nearchord_solve.colouring.parts`.  On a
chordal graph the heaviest clique by demand is always met.  In a fill core the bound may also be that of a plan in
fractions of units, rounded up, or the end of a search that tried all colourings with fewer colours.
"""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.budget import Budget
from nearchord_solve.colouring.allotment import Allotment
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Outcome
from nearchord_solve.questions.served import Request, outcome_of_plan, serve, without_plan

MOST_COLOURS_GIVEN = 10**7


@dataclass(frozen=True)
class Colouring:
    """The weights of the solve are the demands; all ones ask for an ordinary colouring.

    The outcome has the column ``colour`` uint32, from 1: one for each vertex or, if some demand is not 1, those of
    vertex v, ascending, at ``colour_start[v]`` to ``colour_start[v + 1]``.
    """

    def answer(
        self, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
    ) -> Outcome:
        """Answer for checked arguments; see :func:`nearchord_solve.solve`."""
        request = Request(graph, weights, True, budget, when_over, monitor, reuse)
        served = serve(request)
        if isinstance(served, Outcome):
            return served
        if int(weights.sum()) <= MOST_COLOURS_GIVEN:
            return outcome_of_plan(request, served, lambda allotment: _columns(allotment, weights))
        return without_plan(
            outcome_of_plan(request, served, lambda _: {}),
            f"the demands add up to more than the {MOST_COLOURS_GIVEN} colours that a plan can list; give them in a"
            " coarser unit, or ask for fractional-colouring, which gives shares",
        )


def _columns(allotment: Allotment, demand: I64) -> dict[str, U32 | I64]:
    _, start, end = allotment.intervals()
    sizes = end - start
    before = np.cumsum(sizes) - sizes
    colour = np.arange(int(sizes.sum())) + np.repeat(start - before + 1, sizes)
    columns: dict[str, U32 | I64] = {"colour": colour.astype(np.uint32)}
    if not bool((demand == 1).all()):
        columns["colour_start"] = np.concatenate((np.zeros(1, np.int64), np.cumsum(demand)))
    return columns
