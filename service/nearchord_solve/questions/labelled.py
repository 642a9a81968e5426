"""What colour classes and forests share: pins, the flow, and the columns of the answer.

``never`` vertices leave the graph.  ``must`` vertices weigh so much more that whoever leaves one of them out is lighter
than whoever takes all: with W the sum of all weights, each gets W + 1 on top.  An optimum below the sum of these extras
means that no choice holds all of them.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from nearchord_solve import bounds
from nearchord_solve.arrays import I64, U8, U32
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.kernels.greedy_classes import colour_in_order, grow_forest
from nearchord_solve.monitor import Monitor
from nearchord_solve.order import Ranking
from nearchord_solve.order_proof import certify_order
from nearchord_solve.outcome import Outcome, Verdict
from nearchord_solve.questions.conclude import contradiction, outcome_of
from nearchord_solve.questions.frame import Concluded, Settled, run_program
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Found, Task
from nearchord_solve.questions.pins import Contradiction, Rest, keep_vertices, lift
from nearchord_solve.structure import Structure
from nearchord_solve.sweep.kernels import label_passes
from nearchord_solve.sweep.labelled import Labelled, count_states, line_up, sweep_labelled

HEAVIEST = 2**61  # sums of weights with the extras of pins stay below


@dataclass(frozen=True, eq=False)
class LabelledProgram:
    """The heaviest choice of one graph; ``colours`` 0 means forests."""

    colours: int

    def quick(self, task: Task, ranking: Ranking | None) -> Settled:
        """Greed by weight over (degree + 1), and a bound from independent sets.

        A choice of q classes is q independent sets, a forest is two.
        """
        graph, weights = task.graph, task.weights
        if ranking is None:
            _, single = bounds.quick_pair(graph, weights)
        else:
            single = bounds.cover_pair(ranking, weights)[1].bound
        sequence = np.argsort(-(weights / (np.diff(graph.ptr) + 1.0)), kind="stable")
        colour = np.zeros(graph.n, np.uint8)
        if self.colours:
            colour_in_order(graph.ptr, graph.adj, sequence, self.colours, colour)
        else:
            grow_forest(graph.ptr, graph.adj, sequence, colour)
        bound = min(int(weights.sum()), max(self.colours, 2) * single)
        return self._settled(colour, bound, False, 0, "")

    def settle(self, task: Task, structure: Structure) -> Settled:
        """One sweep over all bags, if their states fit the budget."""
        budget, monitor = task.budget, task.gauge.monitor
        late = "seconds ran out while sweeping the tree of bags"
        line = line_up(task.graph, structure, monitor)
        if line is None:
            return replace(self.quick(task, structure.ranking), reason=late)
        states = count_states(line, self.colours, budget.states, monitor)
        if states > budget.states:
            return self._over(task, structure, states)
        room = budget.memory - structure.held_bytes - 8 * line.later.size
        swept = sweep_labelled(line, task.weights, self.colours, budget.states, room, monitor)
        if swept.colour is not None:
            settled = self._settled(swept.colour, swept.value, True, swept.states, _reason(structure, swept))
            weight = int(task.weights.sum())
            proof = certify_order(swept.value, line.order, line.forest, self.colours, states, weight)
            return replace(settled, proof=proof)
        if swept.code == label_passes.STATES:
            return self._over(task, structure, swept.states)
        reason = "memory budget: the tables of the bags do not fit" if swept.code == label_passes.MEMORY else late
        return replace(self.quick(task, structure.ranking), reason=reason, states=swept.states)

    def _over(self, task: Task, structure: Structure, states: int) -> Settled:
        reason = f"state budget: the bags (of up to {structure.largest_bag} vertices) have more than"
        reason += f" {task.budget.states} states"
        return replace(self.quick(task, structure.ranking), reason=reason, states=states)

    def _settled(self, colour: U8, bound: int, exact: bool, states: int, reason: str) -> Settled:
        chosen = (colour != 0).astype(np.uint8)
        return Settled(chosen, bound, exact, states, reason, colour.astype(np.uint32))


def _reason(structure: Structure, swept: Labelled) -> str:
    if structure.fill == 0:
        return "the graph is chordal: one sweep over its cliques settles it"
    return f"all {swept.states} states of the bags were tried ({structure.fill} fill edges)"


def answer_labelled(
    colours: int, must: I64, never: I64, graph: Graph, weights: I64, budget: Budget, when_over: str,
    monitor: Monitor, reuse: Reuse,
) -> Outcome:  # fmt: skip
    """Answer for checked arguments, pins as ascending arrays; ``colours`` 0 means forests."""
    both = np.intersect1d(must, never)
    if both.size:
        pins = Contradiction(int(both[0]), int(both[0]))
        return contradiction(pins, "must be chosen", "must not be chosen")
    stays = np.ones(graph.n, bool)
    stays[never] = False
    rest = keep_vertices(graph, weights, stays, np.empty(0, np.int64))
    extra = int(rest.weights.sum()) + 1
    offset = extra * must.size
    if offset + extra > HEAVIEST:
        return _pins_too_heavy(rest, must)
    heavier = rest.weights
    if must.size:
        heavier = rest.weights.copy()
        heavier[np.searchsorted(rest.vertices, must)] += extra
        heavier.flags.writeable = False
    whole = reuse if rest.graph is graph else None
    task = Task(rest.graph, heavier, budget, when_over, Gauge(monitor, -offset, 1), whole)
    ended = run_program(task, LabelledProgram(colours))
    return _conclude(ended, rest, offset, colours)


def _conclude(ended: Concluded, rest: Rest, offset: int, colours: int) -> Outcome:
    found = ended.found
    columns: Mapping[str, U32 | I64] = {}
    if found.bound is not None and found.bound < offset:
        found = Found(Verdict.INFEASIBLE, None, None, None, found.structure, _impossible(colours))
    elif found.value is not None and found.value < offset:
        reason = f"{found.reason}; no choice with all pins was found"
        found = Found(Verdict.BOUNDED, None, found.bound, None, found.structure, reason, found.proof)
    elif found.chosen is not None and colours and ended.colour is not None:
        columns = {"colour": ended.colour[found.chosen != 0]}
    outcome = outcome_of(found, -offset, 1, lambda chosen: lift(rest, chosen), rest.vertices)
    return replace(outcome, states=ended.states, columns={**columns, **outcome.columns})


def _impossible(colours: int) -> str:
    what = f"need more than {colours} colours" if colours else "close a cycle"
    return f"the pins contradict each other: the vertices that must be chosen {what}"


def _pins_too_heavy(rest: Rest, must: I64) -> Outcome:
    """Weights too large for the extras of so many pins: nothing but the trivial bound."""
    reason = f"weights up to {int(rest.weights.max())} leave no room for {must.size} pins: scale them down"
    found = Found(Verdict.BOUNDED, None, int(rest.weights.sum()), None, None, reason)
    return outcome_of(found, 0, 1, lambda chosen: lift(rest, chosen), rest.vertices)
