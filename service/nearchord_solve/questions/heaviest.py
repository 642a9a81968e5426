"""The heaviest independent set of a graph without pins: exact where the budgets allow, an interval where not."""

from dataclasses import dataclass, replace

import numpy as np

from nearchord_solve import bounds
from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.kernels.layout import STATES
from nearchord_solve.memory import predicted_bytes
from nearchord_solve.monitor import Stop
from nearchord_solve.order import Unfinished
from nearchord_solve.outcome import Verdict
from nearchord_solve.proof import Proof
from nearchord_solve.questions.branching import Branching
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.refine import over_fill, search_less_fill
from nearchord_solve.structure import Structure
from nearchord_solve.sweep import Swept, sweep
from nearchord_solve.tree import Partial, build_structure
from nearchord_solve.wording import counted, fill_found, fill_needed, verb


@dataclass(frozen=True, eq=False)
class Found:
    """An answer: ``chosen`` uint8[n] is None only with CANCELLED and OVER_FILL.

    ``proof``: a certificate, perhaps of a weaker bound; None where there is none.  ``swept``: the sweep that proved the
    optimum, None if none did.
    """

    verdict: Verdict
    value: int | None
    bound: int | None
    chosen: U8 | None
    structure: Structure | None
    reason: str
    proof: Proof | None = None
    swept: Swept | None = None


@dataclass(frozen=True, eq=False)
class Task:
    """One graph to settle, within one budget; ``reuse`` is about the structure of this graph."""

    graph: Graph
    weights: I64
    budget: Budget
    when_over: str
    gauge: Gauge
    reuse: Reuse | None = None

    def weight(self, chosen: U8) -> int:
        """Weight of a set."""
        return int(self.weights[chosen != 0].sum())

    @property
    def stop(self) -> Stop:
        """What the watcher asks for."""
        return self.gauge.monitor.stop


def find_heaviest(task: Task) -> Found:
    """Settle ``task``; never fails for want of budget or time."""
    total = int(task.weights.sum())
    task.gauge.bound(total)
    need = predicted_bytes(task.graph.n, task.graph.m)
    if need > task.budget.memory:
        chosen, bound = bounds.quick_pair(task.graph, task.weights)
        return _close(task, chosen, bound, None, f"memory budget: {need} bytes are needed")
    structure = build_structure(task.graph, task.budget, task.gauge.monitor, task.reuse)
    if isinstance(structure, Partial):
        return _without_structure(task, structure)
    if task.when_over == "stop" and over_fill(structure, task.budget):
        structure = search_less_fill(task.graph, structure, task.budget, task.gauge.monitor)
        if over_fill(structure, task.budget):
            return _over_fill(task, structure)
    found = _with_structure(task, structure)
    if found.verdict is Verdict.BOUNDED and over_fill(structure, task.budget) and not task.stop:
        return _with_less_fill(task, structure, found)
    return found


def _close(task: Task, chosen: U8, bound: int, structure: Structure | None, reason: str) -> Found:
    """End with a feasible set and a bound: PROVEN if they meet."""
    if task.stop is Stop.CANCEL:
        return _cancelled(structure)
    value = task.weight(chosen)
    task.gauge.incumbent(value)
    task.gauge.bound(bound)
    if value == bound:
        text = f"{reason}; the set found meets the bound all the same"
        return Found(Verdict.PROVEN, value, bound, chosen, structure, text)
    return Found(Verdict.BOUNDED, value, bound, chosen, structure, reason)


def _cancelled(structure: Structure | None) -> Found:
    return Found(Verdict.CANCELLED, None, None, None, structure, "cancelled on request")


def _without_structure(task: Task, partial: Partial) -> Found:
    """Fall back on greed and cliques when there is no tree of bags."""
    if task.stop is Stop.CANCEL:
        return _cancelled(None)
    if partial.ranking is None:
        chosen, bound = bounds.quick_pair(task.graph, task.weights)
        proof = None
    else:
        chosen, proof = bounds.cover_pair(partial.ranking, task.weights)
        bound = proof.bound
    if partial.why is Unfinished.STOPPED:
        return replace(_close(task, chosen, bound, None, partial.reason), proof=proof)
    everything = np.arange(task.graph.n, dtype=np.int32)
    return replace(_search_on(task, chosen, bound, everything, None, partial.reason), proof=proof)


def _over_fill(task: Task, structure: Structure) -> Found:
    """End because the fill budget does not suffice, as far as the exact search could tell, and the job stops there."""
    if task.stop is Stop.CANCEL:
        return _cancelled(structure)
    most = task.budget.fill
    lower = structure.fill_lower_bound
    assert most is not None
    if lower > most:
        reason = fill_needed(lower, most)
        return Found(Verdict.OVER_FILL, None, None, None, structure, reason)
    reason = fill_found(structure.fill, most, lower)
    if task.stop is Stop.SECONDS:
        reason += "; seconds ran out in the search for fewer"
    chosen, proof = bounds.cover_pair(structure.ranking, task.weights)
    return replace(_close(task, chosen, proof.bound, structure, reason), proof=proof)


def _with_less_fill(task: Task, structure: Structure, found: Found) -> Found:
    """A last resort where more fill than budgeted was used and the states did not suffice: search for less fill."""
    other = search_less_fill(task.graph, structure, task.budget, task.gauge.monitor)
    if task.stop is Stop.CANCEL:
        return _cancelled(other)
    fits = other.fitting(task.budget)
    if not over_fill(other, task.budget) and fits.all():
        swept = sweep(other, task.weights, fits, task.gauge.monitor)
        if swept is not None and swept.chosen is not None:
            return _proven(task, other, swept)
    if other.fill != structure.fill:
        other = replace(structure, plain=False, proven=other.fill_lower_bound)
    return replace(found, structure=other)


def _with_structure(task: Task, structure: Structure) -> Found:
    fits = structure.fitting(task.budget)
    swept = sweep(structure, task.weights, fits, task.gauge.monitor)
    if task.stop is Stop.CANCEL:
        return _cancelled(structure)
    if swept is None or swept.chosen is None:
        chosen, proof = bounds.cover_pair(structure.ranking, task.weights)
        if swept is not None and swept.bound < proof.bound:
            proof = swept.certify()
        found = _close(task, chosen, proof.bound, structure, "seconds ran out while sweeping the tree of bags")
        return replace(found, proof=proof)
    if fits.all():
        return _proven(task, structure, swept)
    proof = swept.certify()
    reason = _too_many_states(task, structure, fits)
    found = _search_on(task, swept.chosen, swept.bound, _homes(structure, fits), structure, reason)
    return replace(found, proof=proof)


def _proven(task: Task, structure: Structure, swept: Swept) -> Found:
    value, chosen = swept.bound, swept.chosen
    task.gauge.incumbent(value)
    task.gauge.bound(value)
    if structure.fill == 0:
        reason = "the graph is chordal: one sweep over its cliques settles it"
    else:
        reason = _all_tried(structure)
    most = task.budget.fill
    if most is not None and structure.fill > most:
        reason += f" (more fill than the {most:,} budgeted, as the states allowed it)"
    return Found(Verdict.PROVEN, value, value, chosen, structure, reason, swept.certify(), swept)


def _all_tried(structure: Structure) -> str:
    states, edges = counted(structure.states, "state"), counted(structure.fill, "fill edge")
    if structure.fill == 1:
        return f"all {states} of the bags that hold the only fill edge were tried"
    return f"all {states} of the bags that hold the {edges} were tried"


def _too_many_states(task: Task, structure: Structure, fits: U8) -> str:
    states = structure.forest.figures[:, STATES]
    most = int(states[fits == 0].max())
    budget = task.budget
    count = int((fits == 0).sum())
    cores = "the only fill core" if fits.size == 1 else f"{count:,} of {fits.size:,} fill cores"
    if most > budget.states or int(states.sum()) > budget.states:
        return (
            f"state budget: {cores} {verb(count, 'does', 'do')} not fit"
            f" into {counted(budget.states, 'state')} (bags of up to {structure.largest_bag:,} vertices)"
        )
    return f"memory budget: the tables of {cores} do not fit"


def _homes(structure: Structure, fits: U8) -> I32:
    """Vertices of the cores that do not fit, ascending."""
    cores = structure.cores
    loose = np.repeat(fits == 0, np.diff(cores.ptr))
    return np.sort(structure.numbering.order[cores.place[loose]])


def _search_on(task: Task, chosen: U8, bound: int, candidates: I32, structure: Structure | None, reason: str) -> Found:
    """Improve a pair by local search, then by branching, if the job wants it."""
    task.gauge.incumbent(task.weight(chosen))
    task.gauge.bound(bound)
    if task.when_over == "bound" and candidates.size and not task.stop:
        chosen = bounds.improve(
            task.graph, task.weights, chosen, candidates, bound, task.gauge.incumbent, task.gauge.monitor
        )
        if structure is not None:
            chosen, bound, more = _branch(task, chosen, bound)
            reason += more
        if task.stop is Stop.SECONDS:
            reason += "; seconds ran out in the search"
    return _close(task, chosen, bound, structure, reason)


def _branch(task: Task, chosen: U8, bound: int) -> tuple[U8, int, str]:
    """Close the gap, or a part of it, by branching; also says so."""
    search = Branching(task.graph, task.weights, task.budget, task.gauge, chosen, task.weight(chosen))
    if search.value >= bound or not search.worthwhile or task.stop:
        return chosen, bound, ""
    bound = search.run(bound)
    return search.chosen, bound, f"; {search.nodes:,} {verb(search.nodes, 'branch was', 'branches were')} looked at"
