"""Add-on ``conflict_prices``: for every edge, what the optimum gains if that conflict is dropped, pins as they are.

The planner's reading: what clearing one conflict is worth, by filtering or by agreement, say.

Pins.  An edge at a ``never`` vertex gains nothing: the vertex stays out.  Where there are ``must`` vertices, call their
neighbours *blocked*.  Take away the pinned vertices, leave the blocked ones in, and let them weigh nothing: the optimum
is the one of the graph without them, as they can be taken out of any set at no loss.  Hence, with prices on this graph:

* an edge between two vertices that are free has the price that it has there;
* an edge from a blocked vertex to one that is not ``must`` gains nothing, since the vertex stays blocked;
* an edge from a ``must`` vertex to v frees v if v is next to no other ``must`` vertex.  The best set with v is worth
  (weight of v) + (optimum - price of choosing v there): what blocked vertices it holds are worth nothing and can be
  taken out.  So the gain is max(0, weight of v - price of choosing v).
"""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I64
from nearchord_solve.graph import Graph
from nearchord_solve.monitor import Monitor
from nearchord_solve.questions.addons.added import Added, Settled
from nearchord_solve.questions.heaviest import Task
from nearchord_solve.questions.pins import Rest, keep_vertices
from nearchord_solve.sweep import Swept, sweep
from nearchord_solve.sweep.prices import ConflictPrices, Unpriced, price_conflicts, price_vertices
from nearchord_solve.tree import Partial, build_structure


@dataclass(frozen=True, eq=False)
class Pinned:
    """The whole graph of the question, and what is pinned, as ascending vertices."""

    graph: Graph
    weights: I64
    must: I64
    never: I64

    def edges(self) -> tuple[I64, I64]:
        """(smaller end, larger end) of each edge in canonical order, int64[m] each."""
        ends = np.repeat(np.arange(self.graph.n), np.diff(self.graph.ptr))
        kept = self.graph.adj > ends
        return ends[kept], self.graph.adj[kept].astype(np.int64)

    def blockers(self) -> I64:
        """How many neighbours of each vertex must be chosen, int64[n]."""
        inside = np.zeros(self.graph.n, bool)
        inside[self.must] = True
        ends = np.repeat(np.arange(self.graph.n), np.diff(self.graph.ptr))
        return np.bincount(ends[inside[self.graph.adj]], minlength=self.graph.n)

    def with_blocked(self, blockers: I64) -> Rest:
        """The graph without the pinned vertices, but with the blocked ones, which weigh nothing."""
        stays = np.ones(self.graph.n, bool)
        stays[self.must] = stays[self.never] = False
        return keep_vertices(self.graph, np.where(blockers > 0, 0, self.weights), stays, self.must)


def add_conflict_prices(settled: Settled, pinned: Pinned) -> Added:
    """Column ``conflict_price``, int64 by edge of the whole graph in the order of its canonical form."""
    monitor = settled.task.gauge.monitor
    rest, swept, blockers = settled.rest, settled.swept, None
    if pinned.must.size:
        blockers = pinned.blockers()
        rest = pinned.with_blocked(blockers)
        again = _sweep_again(rest, settled.task, monitor)
        if again is None:
            return Added(note="with the neighbours of the pinned vertices the graph takes more than the budget")
        swept = again
    room = settled.task.budget.memory - swept.structure.held_bytes
    priced = price_vertices(swept, room, monitor)
    prices = price_conflicts(swept, priced, room, monitor) if not isinstance(priced, Unpriced) else priced
    if isinstance(prices, Unpriced) or isinstance(priced, Unpriced):
        return Added(note=str(prices))
    column = _canonical(pinned, rest, prices)
    if blockers is not None:
        inside = np.full(pinned.graph.n, np.iinfo(np.int64).max)
        inside[rest.vertices] = priced.inside
        _price_pinned(column, pinned, blockers, inside)
    return Added({"conflict_price": column})


def _sweep_again(rest: Rest, task: Task, monitor: Monitor) -> Swept | None:
    """The sweep of another graph within the same budget; None if that or time does not suffice."""
    with monitor.aside() as quiet:
        structure = build_structure(rest.graph, task.budget, quiet)
        if isinstance(structure, Partial):
            return None
        fits = structure.fitting(task.budget)
        swept = sweep(structure, rest.weights, fits, quiet) if fits.all() else None
    return swept if swept is not None and swept.chosen is not None else None


def _canonical(pinned: Pinned, rest: Rest, prices: ConflictPrices) -> I64:
    """The prices by edge of the whole graph, 0 for edges that are not in the rest.  O(m log m)."""
    n = pinned.graph.n
    one, other = rest.vertices[prices.one], rest.vertices[prices.other]
    key = np.minimum(one, other) * n + np.maximum(one, other)
    by_key = np.argsort(key)
    if key.size == pinned.graph.m:
        return prices.gain[by_key]
    low, high = pinned.edges()
    column = np.zeros(pinned.graph.m, np.int64)
    column[np.searchsorted(low * n + high, key[by_key])] = prices.gain[by_key]
    return column


def _price_pinned(column: I64, pinned: Pinned, blockers: I64, inside: I64) -> None:
    """Set the prices of edges at vertices that must be chosen and at their neighbours.

    ``inside`` int64[n]: the price of choosing each vertex next to blocked ones, the largest number for pinned ones.
    """
    low, high = pinned.edges()
    column[(blockers[low] > 0) | (blockers[high] > 0)] = 0
    must = np.zeros(pinned.graph.n, bool)
    must[pinned.must] = True
    for one, other in ((low, high), (high, low)):
        frees = must[one] & (blockers[other] == 1)
        freed = other[frees]
        column[frees] = np.maximum(0, pinned.weights[freed] - inside[freed])
