"""Question ``independent-set``: the heaviest set of vertices with no edge inside.

The planner's reading: the best conflict-free choice on one channel.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial

from nearchord_solve.arrays import I64
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Outcome
from nearchord_solve.questions.addons.added import AddOn, extend
from nearchord_solve.questions.addons.conflict_prices import Pinned, add_conflict_prices
from nearchord_solve.questions.addons.count import add_count
from nearchord_solve.questions.addons.limit import find_limited
from nearchord_solve.questions.addons.prices import add_prices
from nearchord_solve.questions.addons.ranked import add_best
from nearchord_solve.questions.addons.scenarios import answer_scenarios
from nearchord_solve.questions.addons.terms import check_terms
from nearchord_solve.questions.conclude import contradiction, infeasible, outcome_of
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Task, find_heaviest
from nearchord_solve.questions.pins import Contradiction, apply_pins, lift, pin_array


@dataclass(frozen=True)
class IndependentSet:
    """``must``: vertices that have to be chosen; ``never``: vertices that may not be; both 0-based.

    Add-ons: ``prices`` of the vertices, ``conflict_prices`` of the edges, the ``best`` so many sets (2 to 1000; 0 and 1
    ask for nothing more), the ``count`` of the best ones; or ``limit``: at most so many vertices are chosen, pins
    included; or ``scenarios``: so many vectors of weights.
    """

    must: Sequence[int] | I64 = ()
    never: Sequence[int] | I64 = ()
    prices: bool = False
    conflict_prices: bool = False
    best: int = 0
    count: bool = False
    limit: int | None = None
    scenarios: int = 0

    def answer(
        self, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
    ) -> Outcome:
        """Answer for checked arguments; see :func:`nearchord_solve.solve`."""
        check_terms(self)
        must = pin_array("question.must", self.must, graph.n)
        never = pin_array("question.never", self.never, graph.n)
        first = weights[0] if self.scenarios else weights
        rest = apply_pins(graph, first, must, never)
        if isinstance(rest, Contradiction):
            return contradiction(rest, "must be chosen", "must not be chosen")
        room = None if self.limit is None else self.limit - must.size
        if room is not None and room < 0:
            return infeasible(
                f"the pins contradict the limit: {must.size} vertices must be chosen, {self.limit} may be"
            )
        gauge = Gauge(monitor, rest.taken_weight, 1)
        whole = reuse if rest.graph is graph else None
        task = Task(rest.graph, rest.weights, budget, when_over, gauge, whole)
        found = find_heaviest(task) if room is None else find_limited(task, room)
        outcome = outcome_of(found, rest.taken_weight, 1, lambda chosen: lift(rest, chosen), rest.vertices)
        if self.scenarios:
            return answer_scenarios(task, rest, found, outcome, weights)
        return extend(outcome, task, rest, found.swept, self._wanted(Pinned(graph, weights, must, never)))

    def _wanted(self, pinned: Pinned) -> dict[str, AddOn]:
        """The add-ons asked for, by name."""
        wanted: dict[str, AddOn] = {}
        if self.prices:
            wanted["prices"] = partial(add_prices, n=pinned.graph.n)
        if self.conflict_prices:
            wanted["conflict_prices"] = partial(add_conflict_prices, pinned=pinned)
        if self.best > 1:
            wanted["best"] = partial(add_best, most=self.best)
        if self.count:
            wanted["count"] = add_count
        return wanted
