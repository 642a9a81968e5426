"""Short plans of one part that does not fit into the frame as it comes."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.arrays import I64
from nearchord_solve.budget import Budget
from nearchord_solve.colouring.allotment import lay_out
from nearchord_solve.colouring.copies import Painter, copies
from nearchord_solve.colouring.evidence import Evidence, rounded
from nearchord_solve.colouring.heaviest_sets import HeaviestSets
from nearchord_solve.colouring.parts import Part
from nearchord_solve.colouring.plan import Plan
from nearchord_solve.colouring.shortest import Shortest, shortest_frame
from nearchord_solve.monitor import Monitor

MOST_COPIES = 10_000
MOST_LINKS = 10**7  # neighbours that all copies may have together
FIRST_TURNS = 4000
LONG_TURNS = 400_000
LARGE = 500  # vertices of a part above which long tries come before its linear program
FINEST = 10_000  # a unit is not divided into more steps to make a plan writable


@dataclass(frozen=True, eq=False)
class Settled:
    """A plan of a part, and why a shorter one would not do, or could not be found; None if the frame sufficed."""

    plan: Plan
    evidence: Evidence | None


def by_first_fit(part: Part, demand: I64) -> Plan:
    """The best of first fit along a few sequences: along the tree of bags, by demand and degree, and as numbered."""
    graph = part.graph
    weight = demand * (np.diff(graph.ptr) + 1.0)
    sequences = (part.sequence, np.argsort(-weight, kind="stable"), np.arange(graph.n))
    plans = [_plan_along(part, sequence, demand) for sequence in sequences]
    return min(plans, key=lambda plan: plan.frame)


def _plan_along(part: Part, sequence: I64, demand: I64) -> Plan:
    lengths, vertex, first, last = lay_out(part.graph, sequence, demand).segments()
    member = np.zeros((lengths.size, demand.size), np.bool_)
    for v, begin, end in zip(vertex.tolist(), first.tolist(), last.tolist(), strict=True):
        member[begin:end, v] = True
    return Plan(member, lengths.tolist())


def shorter(one: Plan, other: Plan) -> Plan:
    """The shorter of two plans, the first if they are equally long."""
    return other if other.frame < one.frame else one


class Settler:
    """Settles one part after the other; ``whole``: in whole units, else in fractions of them."""

    def __init__(self, whole: bool, budget: Budget, monitor: Monitor) -> None:
        self._whole, self._budget, self._monitor = whole, budget, monitor

    def settle(self, part: Part, demand: I64, frame: Fraction) -> Settled:
        """A plan no longer than ``frame``, or the shortest one, or, where that takes too long, a short one.

        ``demand`` int64[p].
        """
        plan = by_first_fit(part, demand)
        if plan.frame <= frame or self._monitor.stop:
            return Settled(plan, None)
        if self._whole:
            return _Whole(self, part, demand, frame, plan).settle()
        return self._in_fractions(part, demand, frame, plan)

    def _in_fractions(self, part: Part, demand: I64, frame: Fraction, plan: Plan) -> Settled:
        painter = self.painter(part, demand)
        large = demand.size > LARGE
        if painter is not None:
            painter.improve(int(frame), LONG_TURNS if large else FIRST_TURNS)
            plan = shorter(plan, painter.plan)
            if plan.frame <= frame:
                return Settled(plan, None)
        found = self.shortest(part, demand, frame, [plan])
        if found is None:
            if painter is not None and not large:
                painter.improve(int(frame), LONG_TURNS)
                plan = shorter(plan, painter.plan)
            return Settled(plan, None)
        evidence = self.evidence(part, demand, found)
        target = max(frame, evidence.bound) if evidence else frame
        if found.plan is not None:
            plan = shorter(plan, found.plan)
            if plan.frame > target and target.denominator <= FINEST:
                plan = shorter(plan, self._on_grid(part, demand, found.plan, target))
        return Settled(plan, evidence)

    def _on_grid(self, part: Part, demand: I64, plan: Plan, target: Fraction) -> Plan:
        """A plan in units of the target's denominator, near to one whose fractions are too long to be written."""
        unit = target.denominator
        finer = Plan(plan.member, [length * unit for length in plan.lengths], plan.denominator)
        found = self.in_whole_units(part, demand * unit, finer, int(target * unit))
        return plan if found is None else Plan(found.member, found.lengths, unit)

    def in_whole_units(self, part: Part, demand: I64, plan: Plan, target: int) -> Plan | None:
        """Whole parts of the lengths of ``plan`` as they are, and copies for what is then missing; None if too much."""
        whole = [length // plan.denominator for length in plan.lengths]
        served = plan.member.T.astype(np.int64) @ np.array(whole, np.int64) if whole else 0 * demand
        short = np.maximum(0, demand - served)
        painter = self.painter(part, short)
        if painter is None:
            return None
        painter.improve(target - sum(whole), FIRST_TURNS)
        rest = painter.plan
        return Plan(np.concatenate((plan.member, rest.member)), [*whole, *rest.lengths])

    def shortest(self, part: Part, demand: I64, frame: Fraction, plans: Sequence[Plan]) -> Shortest | None:
        """The shortest plan in fractions, begun from the sets of ``plans``; None if the states do not allow it."""
        sets = HeaviestSets(part.graph, self._budget, self._monitor)
        if not sets.affordable:
            return None
        first: NDArray[np.bool_] = np.concatenate([plan.member for plan in plans])
        return shortest_frame(demand, sets, first, frame, self._whole, self._monitor)

    def evidence(self, part: Part, demand: I64, found: Shortest) -> Evidence | None:
        """The bound that a linear program left."""
        if found.bottleneck is None:
            return None
        bound = rounded(found.bottleneck.bound(demand), self._whole)
        return Evidence(bound, vertices=part.vertices, bottleneck=found.bottleneck)

    def painter(self, part: Part, demand: I64) -> Painter | None:
        """Colours for copies, begun greedily; None if there were too many."""
        graph, total = part.graph, int(demand.sum())
        if total > MOST_COPIES:
            return None
        around = np.repeat(demand, np.diff(graph.ptr)) * demand[graph.adj]
        if int(around.sum()) + total * int(demand.max(initial=0)) > MOST_LINKS:
            return None
        painter = Painter(copies(part.graph, demand), self._monitor)
        painter.begin()
        return painter

    @property
    def most(self) -> int:
        """Steps that a search may take."""
        return self._budget.states

    @property
    def stopped(self) -> bool:
        """Whether the watcher wants an end."""
        return bool(self._monitor.stop)


class _Whole:
    """The fewest whole units for one part: cheap tries, the bound in fractions, what can be rounded from it, and then
    branching, as long as plan and bound are apart."""

    def __init__(self, by: Settler, part: Part, demand: I64, frame: Fraction, plan: Plan) -> None:
        self._by, self._part, self._demand, self._frame, self._plan = by, part, demand, frame, plan
        self._evidence: Evidence | None = None
        self._painter = by.painter(part, demand)

    def settle(self) -> Settled:
        """Go on until the plan is no longer than the frame or the bound."""
        small = self._demand.size <= LARGE
        middle = (self._relax, self._paint_long) if small else (self._paint_long, self._relax)
        for step in (self._paint, *middle, self._branch):
            step()
            if self._plan.frame <= self._target or self._by.stopped:
                break
        return Settled(self._plan, self._evidence)

    @property
    def _target(self) -> Fraction:
        """There is no use in being shorter."""
        return self._frame if self._evidence is None else max(self._frame, self._evidence.bound)

    def _paint(self, turns: int = FIRST_TURNS) -> None:
        if self._painter is not None:
            self._painter.improve(int(self._target), turns)
            self._plan = shorter(self._plan, self._painter.plan)

    def _paint_long(self) -> None:
        self._paint(LONG_TURNS)

    def _relax(self) -> None:
        found = self._by.shortest(self._part, self._demand, self._frame, [self._plan])
        if found is None:
            return
        self._evidence = self._by.evidence(self._part, self._demand, found)
        if found.plan is not None:
            near = self._by.in_whole_units(self._part, self._demand, found.plan, int(self._target))
            self._plan = self._plan if near is None else shorter(self._plan, near)

    def _branch(self) -> None:
        """Try the fewest units that are not refuted, then one more."""
        if self._painter is None:
            return
        for units in range(int(self._target), int(self._plan.frame)):
            possible = self._painter.settle(units, self._by.most)
            if possible:
                self._plan = shorter(self._plan, self._painter.plan)
            if possible is not False:
                return
            self._evidence = Evidence(Fraction(units + 1))
