"""The dynamic program of colour classes and forests, as the flow of all questions runs it."""

from dataclasses import dataclass, field, replace

import numpy as np

from nearchord_solve import bounds
from nearchord_solve.arrays import I64, U8
from nearchord_solve.kernels.greedy_classes import colour_in_order, grow_forest
from nearchord_solve.order import Ranking
from nearchord_solve.order_proof import certify_order
from nearchord_solve.questions.frame import Settled
from nearchord_solve.questions.heaviest import Task
from nearchord_solve.structure import Structure
from nearchord_solve.sweep.kernels import label_passes
from nearchord_solve.sweep.labelled import Labelled, Pinned, count_states, line_up, sweep_labelled
from nearchord_solve.wording import counted


def _nothing() -> I64:
    return np.empty(0, np.int64)


@dataclass(frozen=True, eq=False)
class LabelledProgram:
    """The heaviest choice of one graph; ``colours`` 0 means forests.

    ``must`` int64, ascending: vertices that have to be chosen; ``start`` uint8[n]: colours with which they can be.
    ``prices``: whether prices of the vertices are wanted.
    """

    colours: int
    must: I64 = field(default_factory=_nothing)
    start: U8 | None = None
    prices: bool = False

    def quick(self, task: Task, ranking: Ranking | None) -> Settled:
        """What must be chosen, then greed by weight over (degree + 1), and a bound from independent sets.

        A choice of q classes is q independent sets, a forest is two.
        """
        graph, weights = task.graph, task.weights
        if ranking is None:
            _, single = bounds.quick_pair(graph, weights)
        else:
            single = bounds.cover_pair(ranking, weights)[1].bound
        sequence = np.argsort(-(weights / (np.diff(graph.ptr) + 1.0)), kind="stable")
        if self.must.size:
            sequence = np.concatenate((self.must, sequence[~np.isin(sequence, self.must)]))
        if self.colours == 0:
            colour = np.zeros(graph.n, np.uint8)
            grow_forest(graph.ptr, graph.adj, sequence, colour)
        else:
            colour = np.zeros(graph.n, np.uint8) if self.start is None else self.start.copy()
            colour_in_order(graph.ptr, graph.adj, sequence, self.colours, colour)
        bound = min(int(weights.sum()), max(self.colours, 2) * single)
        return self._settled(colour, bound, False, 0, "")

    def settle(self, task: Task, structure: Structure) -> Settled:
        """One sweep over all bags, if their states fit the budget."""
        budget, monitor = task.budget, task.gauge.monitor
        late = "seconds ran out while sweeping the tree of bags"
        line = line_up(task.graph, structure, monitor)
        if line is None:
            return replace(self.quick(task, structure.ranking), reason=late)
        pinned = Pinned.of(task.weights, self.must, self.colours)
        states = count_states(line, pinned, budget.states, monitor)
        if states > budget.states:
            return self._over(task, structure, states)
        room = budget.memory - structure.held_bytes - 8 * line.later.size
        swept = sweep_labelled(line, pinned, budget.states, room, self.prices, monitor)
        if swept.colour is not None:

            def again(weights: I64) -> Settled | None:
                other = Pinned.of(weights, self.must, self.colours)
                once_more = sweep_labelled(line, other, budget.states, room, False, monitor)
                return None if once_more.colour is None else self._swept(structure, once_more)

            weight = int(task.weights.sum())
            weight += self.must.size * (weight + 1)
            proof = certify_order(swept.value, line.order, line.forest, self.colours, swept.states, weight)
            return replace(self._swept(structure, swept), again=again, proof=proof)
        if swept.code == label_passes.IMPOSSIBLE:
            nothing = np.zeros(task.graph.n, np.uint8)
            return Settled(nothing, 0, True, swept.states, "all states of the bags were tried", feasible=False)
        if swept.code == label_passes.STATES:
            return self._over(task, structure, swept.states)
        reason = "memory budget: the tables of the bags do not fit" if swept.code == label_passes.MEMORY else late
        return replace(self.quick(task, structure.ranking), reason=reason, states=swept.states)

    def _swept(self, structure: Structure, swept: Labelled) -> Settled:
        assert swept.colour is not None
        settled = self._settled(swept.colour, swept.value, True, swept.states, _reason(structure, swept))
        return replace(settled, prices=swept.prices)

    def _over(self, task: Task, structure: Structure, states: int) -> Settled:
        reason = f"state budget: the bags (of up to {structure.largest_bag:,} vertices) have more than"
        reason += f" {counted(task.budget.states, 'state')}"
        return replace(self.quick(task, structure.ranking), reason=reason, states=states)

    def _settled(self, colour: U8, bound: int, exact: bool, states: int, reason: str) -> Settled:
        chosen = (colour != 0).astype(np.uint8)
        feasible = bool(chosen[self.must].all())
        return Settled(chosen, bound, exact, states, reason, colour.astype(np.uint32), feasible=feasible)


def _reason(structure: Structure, swept: Labelled) -> str:
    if structure.fill == 0:
        return "the graph is chordal: one sweep over its cliques settles it"
    return f"all {counted(swept.states, 'state')} of the bags were tried ({counted(structure.fill, 'fill edge')})"
