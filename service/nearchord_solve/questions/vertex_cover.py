"""Question ``vertex-cover``: the lightest set of vertices that meets every edge.

The planner's reading: the cheapest requests to withdraw.  It is the complement of the heaviest independent
set; ``bound`` is a lower bound.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Outcome
from nearchord_solve.questions.conclude import contradiction, outcome_of
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Task, find_heaviest
from nearchord_solve.questions.pins import Contradiction, apply_pins, lift, pin_array


@dataclass(frozen=True)
class VertexCover:
    """``must``: vertices that have to be in the cover; ``never``: vertices that may not be; both 0-based."""

    must: Sequence[int] | I64 = ()
    never: Sequence[int] | I64 = ()

    def answer(
        self, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
    ) -> Outcome:
        """Answer for checked arguments; see :func:`nearchord_solve.solve`."""
        must = pin_array("question.must", self.must, graph.n)
        never = pin_array("question.never", self.never, graph.n)
        rest = apply_pins(graph, weights, never, must)
        if isinstance(rest, Contradiction):
            return contradiction(rest, "must stay out of the cover", "must be in the cover")
        offset = int(weights.sum()) - rest.taken_weight
        whole = reuse if rest.graph is graph else None
        found = find_heaviest(Task(rest.graph, rest.weights, budget, when_over, Gauge(monitor, offset, -1), whole))

        def complement(chosen: U32) -> U32:
            outside = np.ones(graph.n, bool)
            outside[lift(rest, chosen)] = False
            return np.flatnonzero(outside).astype(np.uint32)

        return outcome_of(found, offset, -1, complement, rest.vertices)
