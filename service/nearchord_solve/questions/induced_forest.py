"""Question ``induced-forest``: the heaviest set of vertices with no cycle inside.

The planner's reading: a loop-free choice; what is left out is the cheapest feedback vertex set.  A state of a bag is a
set without a cycle of G, and what lies below connects some of its vertices: see
:mod:`nearchord_solve.sweep.kernels.label_states`.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from nearchord_solve.arrays import I64
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Outcome
from nearchord_solve.questions.labelled import Asked, answer_labelled
from nearchord_solve.questions.pins import pin_array


@dataclass(frozen=True)
class InducedForest:
    """``must``: vertices that have to be chosen; ``never``: vertices that may not be; both 0-based.

    Add-ons: ``prices`` of the vertices, or ``scenarios``: so many vectors of weights.
    """

    must: Sequence[int] | I64 = ()
    never: Sequence[int] | I64 = ()
    prices: bool = False
    scenarios: int = 0

    def answer(
        self, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
    ) -> Outcome:
        """Answer for checked arguments; see :func:`nearchord_solve.solve`."""
        must = pin_array("question.must", self.must, graph.n)
        never = pin_array("question.never", self.never, graph.n)
        asked = Asked(0, must, never, self.prices, self.scenarios)
        return answer_labelled(asked, graph, weights, budget, when_over, monitor, reuse)
