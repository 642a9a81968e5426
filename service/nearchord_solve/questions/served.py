"""The flow of the questions that serve every vertex as long as it demands: structure, plan, bound, and the outcome."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from fractions import Fraction

import numpy as np

from nearchord_solve.arrays import I32, I64, U32
from nearchord_solve.budget import Budget
from nearchord_solve.colouring.allotment import LONGEST, Allotment
from nearchord_solve.colouring.evidence import Evidence
from nearchord_solve.colouring.parts import Parts
from nearchord_solve.colouring.planner import Planned, Planner
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.memory import predicted_bytes
from nearchord_solve.monitor import Monitor, Stop
from nearchord_solve.order import Unfinished
from nearchord_solve.outcome import Outcome, Verdict
from nearchord_solve.questions.clique import CliqueProgram
from nearchord_solve.questions.conclude import without_structure
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Task
from nearchord_solve.refine import over_fill, search_less_fill
from nearchord_solve.structure import Structure
from nearchord_solve.tree import Partial, build_structure
from nearchord_solve.wording import counted, fill_found, fill_needed, verb

Columns = dict[str, U32 | I64]
MOST_ENTRIES = 20_000_000  # vertices that the sets of a plan in fractions may list together
MANY_ENTRIES = 2_000_000  # above so many a plan with fewer pieces is looked for


@dataclass(frozen=True, eq=False)
class Served:
    """A plan that serves everybody, why none is shorter, and how it was found; ``gap`` is why one might be shorter,
    where the reason does not say it."""

    allotment: Allotment
    evidence: Evidence
    structure: Structure | None
    reason: str
    gap: str = ""


@dataclass(frozen=True, eq=False)
class Request:
    """What to serve: ``demand`` int64[n]; ``whole``: in whole units."""

    graph: Graph
    demand: I64
    whole: bool
    budget: Budget
    when_over: str
    monitor: Monitor
    reuse: Reuse | None

    @property
    def task(self) -> Task:
        """The heaviest clique by demand as a task."""
        gauge = Gauge(self.monitor, 0, 1)
        return Task(self.graph, self.demand, self.budget, self.when_over, gauge, self.reuse)


def serve(request: Request) -> Served | Outcome:
    """Serve everybody; an outcome where there is nothing to write down: cancelled, or over the fill budget."""
    found = _serve(request)
    if request.monitor.stop is Stop.CANCEL:
        return without_structure(request.monitor, "")
    return found


def _serve(request: Request) -> Served | Outcome:
    graph, budget, monitor = request.graph, request.budget, request.monitor
    need = predicted_bytes(graph.n, graph.m)
    if need > budget.memory:
        by_degree = np.argsort(-np.diff(graph.ptr), kind="stable").astype(np.int32)
        return _quickly(request, by_degree, None, f"memory budget: {need} bytes are needed")
    structure = build_structure(graph, budget, monitor, request.reuse)
    if isinstance(structure, Partial):
        stopped = structure.why is Unfinished.STOPPED or structure.ranking is None
        order = np.arange(graph.n, dtype=np.int32) if stopped or not structure.ranking else structure.ranking.order
        return _quickly(request, order, None, structure.reason)
    if request.when_over == "stop" and over_fill(structure, budget):
        structure = search_less_fill(graph, structure, budget, monitor)
        if over_fill(structure, budget):
            return _over_fill(request, structure)
    return _along(request, structure)


def _along(request: Request, structure: Structure) -> Served | Outcome:
    """Put a plan together over the parts."""
    graph, monitor = request.graph, request.monitor
    clique = CliqueProgram().settle(request.task, structure)
    heaviest = np.flatnonzero(clique.chosen)
    monitor.bound(int(request.demand[heaviest].sum()))
    parts = Parts(graph, structure)

    def plan(demand: I64) -> Planned:
        return Planner(graph, demand, parts, heaviest, request.whole, request.budget, monitor).run()

    planned = plan(request.demand)
    if monitor.stop is Stop.CANCEL:
        return without_structure(monitor, "")
    if not request.whole and planned.allotment.entries > MANY_ENTRIES:
        frame = planned.allotment.frame
        other = plan(parts.raised(request.demand, int(frame)))
        if other.complete and other.allotment.frame <= frame:
            planned = replace(planned, allotment=other.allotment)
    if monitor.stop is Stop.SECONDS:
        reason = "seconds ran out while planning"
    elif structure.fill == 0:
        reason = "the graph is chordal: its heaviest clique by demand decides"
    elif not planned.settled:
        reason = "first fit along the tree of bags needs no more than the heaviest clique by demand"
    else:
        reason = _planned(planned.settled, structure.fill_cores)
    most = request.budget.fill
    if most is not None and structure.fill > most:
        reason += f" (more fill than the {most:,} budgeted, as it allowed that)"
    return Served(planned.allotment, planned.evidence, structure, reason, "" if monitor.stop else _gap(request.budget))


def _planned(settled: int, cores: int) -> str:
    was = verb(settled, "was", "were")
    if cores == 1:
        return f"the only fill core {was} planned on its own"
    return f"{settled:,} of {counted(cores, 'fill core')} {was} planned on {verb(settled, 'its', 'their')} own"


def _gap(budget: Budget) -> str:
    allowed = counted(budget.states, "state")
    return f"; {allowed} allowed neither a shorter plan nor a proof that there is none"


def _quickly(request: Request, sequence: I32, structure: Structure | None, reason: str) -> Served:
    """First fit, and a clique found greedily."""
    clique = np.flatnonzero(CliqueProgram().quick(request.task, None).chosen)
    bound = Fraction(int(request.demand[clique].sum()))
    cells = np.zeros(Monitor.CELLS, np.int64)
    allotment = Allotment(request.graph, np.ascontiguousarray(sequence), request.demand, cells, LONGEST)
    allotment.advance()
    return Served(allotment, Evidence(bound, clique), structure, reason)


def _over_fill(request: Request, structure: Structure) -> Served | Outcome:
    most, lower = request.budget.fill, structure.fill_lower_bound
    assert most is not None
    if lower > most:
        reason = fill_needed(lower, most)
        return Outcome(
            Verdict.OVER_FILL, None, None, None, structure.fill, lower, structure.states, structure.bags,
            structure.largest_bag, structure.parts, structure.fill_cores, "none",
            ("none",) * structure.fill_cores, reason,
        )  # fmt: skip
    reason = fill_found(structure.fill, most, lower)
    if request.monitor.stop is Stop.SECONDS:
        reason += "; seconds ran out in the search for fewer"
    return _quickly(request, structure.ranking.order, structure, reason)


def outcome_of_plan(request: Request, served: Served, plan: Callable[[Allotment], Columns]) -> Outcome:
    """The outcome with the plan as columns; value and bound are whole numbers where units are."""
    structure, evidence = served.structure, served.evidence
    served.allotment.close_gaps()
    frame, bound = served.allotment.frame, evidence.bound
    value = int(frame) if request.whole else frame
    request.monitor.incumbent(-(-frame.numerator // frame.denominator))
    proven = frame == bound
    kind = "certificate" if evidence.certified else "search" if proven else "none"
    cores = structure.fill_cores if structure else 0
    return Outcome(
        verdict=Verdict.PROVEN if proven else Verdict.BOUNDED,
        value=value,
        bound=int(bound) if request.whole else bound,
        chosen=None,
        fill=structure.fill if structure else None,
        fill_lower_bound=structure.fill_lower_bound if structure else 0,
        states=structure.states if structure else None,
        bags=structure.bags if structure else 0,
        largest_bag=structure.largest_bag if structure else 0,
        parts=structure.parts if structure else 0,
        fill_cores=cores,
        proof=kind,
        proof_kinds=(kind,) * cores,
        reason=served.reason if proven else served.reason + served.gap,
        columns={**plan(served.allotment), **evidence.columns(request.graph.n, request.whole)},
    )


def without_plan(outcome: Outcome, reason: str) -> Outcome:
    """The same bound, where the plan is too long to be written."""
    if outcome.verdict is not Verdict.PROVEN and outcome.reason:
        reason = f"{reason}; {outcome.reason}"
    return replace(outcome, verdict=Verdict.BOUNDED, value=None, reason=reason)
