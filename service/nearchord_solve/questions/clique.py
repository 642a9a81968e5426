"""Question ``clique``: the heaviest set of pairwise adjacent vertices.

The planner's reading: the tightest bottleneck, and a lower bound on channels.  A clique of G lies in one bag of the
triangulation G + F.  In a bag B it is an independent set of the fill graph F_B, so the heaviest one weighs w(B) minus
the lightest vertex cover of F_B: only vertices that touch fill have to be decided, by branch and bound.  Bags without
fill are cliques themselves.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from nearchord_solve.arrays import I64, U8
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.order import Ranking
from nearchord_solve.order_proof import OrderCertificate
from nearchord_solve.outcome import Outcome
from nearchord_solve.questions.conclude import contradiction, outcome_of
from nearchord_solve.questions.frame import Settled, run_program, total_of
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Task
from nearchord_solve.questions.pins import Contradiction, Rest, keep_vertices, lift, pin_array
from nearchord_solve.structure import Structure
from nearchord_solve.sweep.kernels import bag_cliques
from nearchord_solve.wording import counted

MOST_NODES = 100_000  # of a search that a checker in plain Python is asked to do again


@dataclass(frozen=True)
class Clique:
    """``must``: vertices that have to be chosen; ``never``: vertices that may not be; both 0-based."""

    must: Sequence[int] | I64 = ()
    never: Sequence[int] | I64 = ()

    def answer(
        self, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
    ) -> Outcome:
        """Answer for checked arguments; see :func:`nearchord_solve.solve`.

        The states are the nodes of the search in bags that hold fill.
        """
        must = pin_array("question.must", self.must, graph.n)
        never = pin_array("question.never", self.never, graph.n)
        rest = _around(graph, weights, must, never)
        if isinstance(rest, Contradiction):
            return contradiction(rest, "must be chosen", "must not be chosen", "two vertices without an edge")
        gauge = Gauge(monitor, rest.taken_weight, 1)
        whole = reuse if rest.graph is graph else None
        ended = run_program(Task(rest.graph, rest.weights, budget, when_over, gauge, whole), CliqueProgram())
        outcome = outcome_of(ended.found, rest.taken_weight, 1, lambda chosen: lift(rest, chosen), rest.vertices)
        return replace(outcome, states=ended.states)


def _around(graph: Graph, weights: I64, must: I64, never: I64) -> Rest | Contradiction:
    """What is left to decide: the common neighbours of ``must`` without ``never``."""
    both = np.intersect1d(must, never)
    if both.size:
        return Contradiction(int(both[0]), int(both[0]))
    meets = np.full(graph.n, must.size, np.int64) if must.size == 0 else np.zeros(graph.n, np.int64)
    for v in must:
        row = graph.adj[graph.ptr[v] : graph.ptr[v + 1]]
        strangers = np.setdiff1d(must, row)
        strangers = strangers[strangers != v]
        if strangers.size:
            return Contradiction(int(v), int(strangers[0]))
        meets[row] += 1
    stays = meets == must.size
    stays[must] = False
    stays[never] = False
    return keep_vertices(graph, weights, stays, must)


@dataclass(frozen=True)
class CliqueProgram:
    """The heaviest clique of one graph."""

    def quick(self, task: Task, ranking: Ranking | None) -> Settled:
        """Greedy by weight of the closed neighbourhood; the bound is the heaviest K(i) of a numbering."""
        graph, weights = task.graph, task.weights
        chosen = _greedy(graph, weights)
        if ranking is None:
            bound = max(_bound_by_degree(graph, weights), total_of(weights, chosen))
            return Settled(chosen, bound, False, 0, "")
        bound = max(_bound_along(ranking, weights), total_of(weights, chosen))
        return Settled(chosen, bound, False, 0, "", proof=OrderCertificate(bound, ranking.order[::-1], None))

    def settle(self, task: Task, structure: Structure) -> Settled:
        """Look through all bags, those without fill first."""
        weights, numbering, monitor = task.weights, structure.numbering, task.gauge.monitor
        monitor.enter(Phase.SWEEP, weights.size)
        by_place = weights[numbering.order]
        done, value, place = bag_cliques.heaviest_row(
            numbering.low_ptr, numbering.low, numbering.core, by_place, monitor.cells
        )
        if not done:
            return replace(
                self.quick(task, structure.ranking), reason="seconds ran out while sweeping the tree of bags"
            )
        chosen = np.zeros(weights.size, np.uint8)
        if place >= 0:
            chosen[place] = 1
            chosen[numbering.low[numbering.low_ptr[place] : numbering.low_ptr[place + 1]]] = 1
        value, bound, nodes = bag_cliques.heaviest_in_bags(
            structure.forest, by_place, int(value), task.budget.states, chosen, monitor.cells
        )
        by_vertex = np.empty(weights.size, np.uint8)
        by_vertex[numbering.order] = chosen
        exact = bool(bound == value)
        proof = None
        if exact and nodes <= MOST_NODES:
            proof = OrderCertificate(int(bound), numbering.order[::-1], None)
        reason = self._reason(task, structure, nodes)
        return Settled(by_vertex, int(bound), exact, int(nodes), reason, proof=proof)

    def _reason(self, task: Task, structure: Structure, nodes: int) -> str:
        if task.stop:
            return "seconds ran out in the search of the bags with fill"
        if nodes >= task.budget.states:
            return (
                f"state budget: the search of the bags with fill takes more than {counted(task.budget.states, 'node')}"
            )
        if structure.fill == 0:
            return "the graph is chordal: its heaviest bag is the heaviest clique"
        bags, searched = counted(structure.bags, "bag"), counted(nodes, "search node")
        return f"all {bags} were compared, with {searched} in those that hold fill"


def _around_each(graph: Graph, weights: I64) -> I64:
    """Weight of each closed neighbourhood; the running sum may wrap, its differences are exact."""
    running = np.concatenate((np.zeros(1, np.int64), np.cumsum(weights[graph.adj])))
    return weights + running[graph.ptr[1:]] - running[graph.ptr[:-1]]


def _greedy(graph: Graph, weights: I64) -> U8:
    chosen = np.empty(graph.n, np.uint8)
    sequence = np.argsort(-_around_each(graph, weights), kind="stable")
    bag_cliques.grow_clique(graph.ptr, graph.adj, sequence, chosen)
    return chosen


def _bound_along(ranking: Ranking, weights: I64) -> int:
    """Each clique lies in K(i) of its highest place."""
    outside = np.full(weights.size, -1, np.int32)
    cells = np.zeros(Monitor.CELLS, np.int64)
    by_place = weights[ranking.order]
    _, bound, _ = bag_cliques.heaviest_row(ranking.low_ptr, ranking.low, outside, by_place, cells)
    return int(bound)


def _bound_by_degree(graph: Graph, weights: I64) -> int:
    """Each clique lies in the closed neighbourhood of each of its vertices."""
    return int(_around_each(graph, weights).max(initial=0))
