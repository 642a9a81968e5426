"""Plans of whole graphs, put together from those of parts; see :mod:`.parts` for why that is exact."""

from dataclasses import dataclass
from fractions import Fraction
from math import lcm

import numpy as np

from nearchord_solve.arrays import I64
from nearchord_solve.budget import Budget
from nearchord_solve.colouring.allotment import DONE, LONGEST, PLANNED, STOPPED, Allotment
from nearchord_solve.colouring.evidence import Evidence
from nearchord_solve.colouring.parts import Part, Parts
from nearchord_solve.colouring.plan import Mapping, Plan
from nearchord_solve.colouring.settle import Settler
from nearchord_solve.graph import Graph
from nearchord_solve.monitor import Monitor, Stop


@dataclass(frozen=True, eq=False)
class Planned:
    """When each vertex is served, unless it was cancelled and is not ``complete``; the best bound; and how many parts
    with fill took more than first fit."""

    complete: bool
    allotment: Allotment
    evidence: Evidence
    settled: int


class Planner:
    """Gives every vertex its time by first fit within a frame that is provably needed, and settles the parts in which
    that fails.

    The frame begins as long as the heaviest clique found.  It grows only when a part has no shorter plan, or none is
    found; then the plan of that part is laid over the time that its clique above has been given.
    """

    def __init__(
        self, graph: Graph, demand: I64, parts: Parts, clique: I64, whole: bool, budget: Budget, monitor: Monitor
    ) -> None:
        self._demand, self._parts, self._monitor = demand, parts, monitor
        self._settler = Settler(whole, budget, monitor)
        bound = int(demand[clique].sum())
        self._allotment = Allotment(graph, parts.sequence, demand, monitor.cells, bound)
        self._evidence = Evidence(Fraction(bound), clique)
        self._plans: dict[int, tuple[Part, Plan]] = {}

    def run(self) -> Planned:
        """Serve all vertices; a stop makes it go on without settling parts well."""
        allotment = self._allotment
        while True:
            code, v = allotment.advance()
            if code == DONE or self._monitor.stop is Stop.CANCEL:
                return Planned(code == DONE, allotment, self._evidence, len(self._plans))
            number = int(self._parts.part[v])
            if code == STOPPED:
                allotment.heed(np.zeros(Monitor.CELLS, np.int64))
            elif code == PLANNED:
                self._lay(*self._plans[number])
            elif number < 0:
                self._widen(v)
            else:
                self._settle(number)

    def _widen(self, v: int) -> None:
        """The vertex and its neighbours so far are a clique that was not among those looked through."""
        clique = np.sort(np.append(self._allotment.neighbours_given(v), v))
        need = int(self._demand[clique].sum())
        self._learn(Evidence(Fraction(need), clique))
        self._allotment.limit = max(self._allotment.limit, need * self._allotment.unit)

    def _learn(self, evidence: Evidence) -> None:
        if evidence.bound > self._evidence.bound:
            self._evidence = evidence
            self._monitor.bound(int(evidence.bound))

    def _settle(self, number: int) -> None:
        allotment, part = self._allotment, self._parts[number]
        demand = self._demand[part.vertices]
        settled = self._settler.settle(part, demand, Fraction(allotment.limit, allotment.unit))
        if settled.evidence is not None:
            self._learn(settled.evidence)
        self._make_room(settled.plan)
        self._plans[number] = part, settled.plan
        homes = part.vertices[part.home != 0]
        allotment.planned[homes] = 1
        allotment.undo(homes)

    def _make_room(self, plan: Plan) -> None:
        """Divide the steps if the plan needs it and numbers stay small enough, and lengthen the frame if it must be."""
        allotment = self._allotment
        if plan.frame > Fraction(allotment.limit, allotment.unit) or sum(plan.in_units(allotment.unit)) > (
            allotment.limit
        ):
            longest = max(plan.frame, Fraction(allotment.limit, allotment.unit))
            factor = lcm(allotment.unit, plan.denominator) // allotment.unit
            while longest * (allotment.unit * factor) >= LONGEST:
                factor //= 2
            allotment.refine(max(1, factor))
        allotment.limit = max(allotment.limit, sum(plan.in_units(allotment.unit)))

    def _lay(self, part: Part, plan: Plan) -> None:
        """Give the homes of a part their time, as the plan says when seen from the clique above."""
        allotment = self._allotment
        times = plan.times(self._demand[part.vertices].tolist(), allotment.unit)
        vertices = part.vertices.tolist()
        above = [(times[i], allotment.of(v)) for i, v in enumerate(vertices) if not part.home[i]]
        mapping = Mapping(above, sum(plan.in_units(allotment.unit)), allotment.limit)
        for i, v in enumerate(vertices):
            if part.home[i]:
                allotment.give(v, mapping.moved(times[i]))
