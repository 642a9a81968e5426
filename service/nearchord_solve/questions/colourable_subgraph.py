"""Question ``colourable-subgraph``: the heaviest set of vertices that q colours suffice for.

The planner's reading: the best choice on q channels; with two, what is left out is the cheapest odd cycle transversal.
A state of a bag is a set of at most q disjoint cliques of its fill graph (independent sets of G), see
:mod:`nearchord_solve.sweep.kernels.label_states`.  Two states of neighbouring bags go together when they have the same
classes on the adhesion; glued, classes stay independent, as every edge of G lies in a bag.  With one colour it is the
heaviest independent set.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.budget import Budget
from nearchord_solve.errors import SolverError
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Outcome
from nearchord_solve.questions.independent_set import IndependentSet
from nearchord_solve.questions.labelled import Asked, answer_labelled
from nearchord_solve.questions.pins import pin_array

MOST_COLOURS = 4


@dataclass(frozen=True)
class ColourableSubgraph:
    """``colours``: 1 to 4; ``must``: vertices that have to be chosen; ``never``: vertices that may not be; 0-based.

    Add-ons: ``prices`` of the vertices, or ``scenarios``: so many vectors of weights.  The outcome has the column
    ``colour``, uint32: 1 to ``colours`` for each vertex of ``chosen``.
    """

    colours: int = 2
    must: Sequence[int] | I64 = ()
    never: Sequence[int] | I64 = ()
    prices: bool = False
    scenarios: int = 0

    def answer(
        self, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
    ) -> Outcome:
        """Answer for checked arguments; see :func:`nearchord_solve.solve`.  SolverError if colours are out of range."""
        if not 1 <= self.colours <= MOST_COLOURS:
            raise SolverError("question.colours", f"must be 1 to {MOST_COLOURS}, not {self.colours}")
        must = pin_array("question.must", self.must, graph.n)
        never = pin_array("question.never", self.never, graph.n)
        asked = Asked(self.colours, must, never, self.prices, self.scenarios)
        if self.colours == 1:
            single = IndependentSet(must, never, prices=self.prices, scenarios=self.scenarios)
            outcome = single.answer(graph, weights, budget, when_over, monitor, reuse)
            return replace(outcome, columns={**outcome.columns, **_one_class(outcome)})
        return answer_labelled(asked, graph, weights, budget, when_over, monitor, reuse)


def _one_class(outcome: Outcome) -> dict[str, U32 | I64]:
    """The colours of an independent set, and of those of the scenarios."""
    chosen = 0 if outcome.chosen is None else outcome.chosen.size
    columns: dict[str, U32 | I64] = {"colour": np.ones(chosen, np.uint32)}
    if "scenario_chosen" in outcome.columns:
        columns["scenario_colour"] = np.ones(outcome.columns["scenario_chosen"].size, np.uint32)
    return columns
