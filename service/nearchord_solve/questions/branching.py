"""Branch and bound over vertices, for graphs whose tables do not fit.

A node of the search pins some vertices in or out.  What is left is smaller and has less fill: when its tables
fit, the sweep settles it; until then the sweep bounds it, with cliques standing in for the cores that do not
fit.  The open node with the highest bound is split first, so that bound is the bound of the whole, at any time.
"""

import heapq
from dataclasses import dataclass, field, replace

import numpy as np

from nearchord_solve.arrays import I64, U8
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kernels.layout import STATES
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.pins import Contradiction, Rest, apply_pins
from nearchord_solve.structure import Structure
from nearchord_solve.sweep import sweep
from nearchord_solve.tree import Partial, build_structure

SHARE = 64  # a node may use this part of the state budget
WORK = 32  # all nodes together may use this many state budgets
VERTEX_COST = 100  # states that each vertex and edge of the graph counts for at each node


@dataclass(order=True)
class Node:
    """An open node: the highest bound comes first, ties to the elder."""

    key: tuple[int, int]
    must: tuple[int, ...] = field(compare=False)
    never: tuple[int, ...] = field(compare=False)
    split: int = field(compare=False)  # vertex to branch on


@dataclass
class Branching:
    """A running search on one graph; ``chosen`` uint8[n] is the best set and ``value`` its weight."""

    graph: Graph
    weights: I64
    budget: Budget
    gauge: Gauge
    chosen: U8
    value: int
    work: int = 0
    nodes: int = 0

    @property
    def worthwhile(self) -> bool:
        """Whether a node costs less than one state budget: else too few of them could be looked at."""
        return self._node_cost < self.budget.states

    @property
    def _node_cost(self) -> int:
        return VERTEX_COST * (self.graph.n + self.graph.m)

    def run(self, bound: int) -> int:
        """Search until the bound meets the value, or work or time is used up; returns the bound.

        ``bound`` is one known before.  Deterministic unless stopped.
        """
        monitor = self.gauge.monitor
        most = WORK * self.budget.states
        monitor.enter(Phase.IMPROVE, most)
        open_nodes: list[Node] = []
        going = self._look(open_nodes, (), (), bound)
        while going and open_nodes and -open_nodes[0].key[0] > self.value:
            bound = min(bound, -open_nodes[0].key[0])
            self.gauge.bound(bound)
            monitor.cells[Monitor.STEP] = min(self.work, most)
            if self.work > most or monitor.stop:
                return bound
            node = heapq.heappop(open_nodes)
            going = self._look(open_nodes, (*node.must, node.split), node.never, -node.key[0])
            going = going and self._look(open_nodes, node.must, (*node.never, node.split), -node.key[0])
        return self.value if going else bound

    def _look(self, open_nodes: list[Node], must: tuple[int, ...], never: tuple[int, ...], bound: int) -> bool:
        """Sweep a node and add it to the open ones, unless it is settled or cannot beat the best set.

        Returns False if it could not be swept; then the bound of the node it came from stands.
        """
        self.nodes += 1
        rest = apply_pins(self.graph, self.weights, np.array(must, np.int64), np.array(never, np.int64))
        assert not isinstance(rest, Contradiction)
        budget = replace(self.budget, fill=None, states=max(1, self.budget.states // SHARE))
        with self.gauge.monitor.aside() as quiet:
            structure = build_structure(rest.graph, budget, quiet)
            if isinstance(structure, Partial):
                return False
            fits = structure.fitting(budget)
            swept = sweep(structure, rest.weights, fits, quiet)
        self.work += self._node_cost + int(structure.forest.figures[:, STATES].sum())
        if swept is None or swept.chosen is None:
            return False
        self._offer(rest, swept.chosen)
        bound = min(bound, swept.bound + rest.taken_weight)
        if not fits.all() and bound > self.value:
            split = int(rest.vertices[_busiest(structure, rest.graph, fits)])
            heapq.heappush(open_nodes, Node((-bound, self.nodes), must, never, split))
        return True

    def _offer(self, rest: Rest, chosen: U8) -> None:
        value = int(rest.weights[chosen != 0].sum()) + rest.taken_weight
        if value > self.value:
            self.value = value
            self.chosen = np.zeros(self.graph.n, np.uint8)
            self.chosen[rest.vertices[chosen != 0]] = 1
            self.chosen[rest.taken] = 1
            self.gauge.incumbent(value)


def _busiest(structure: Structure, graph: Graph, fits: U8) -> int:
    """The vertex of most neighbours in the cores that do not fit, ties to the lowest."""
    cores = structure.cores
    loose = np.repeat(fits == 0, np.diff(cores.ptr))
    vertices = np.sort(structure.numbering.order[cores.place[loose]])
    return int(vertices[np.argmax(np.diff(graph.ptr)[vertices])])
