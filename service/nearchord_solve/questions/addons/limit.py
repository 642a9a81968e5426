"""Add-on ``limit``: the heaviest independent set of at most so many vertices.

First without the limit: if the heaviest set keeps it, that is all.  Then penalties for each vertex (:mod:`.penalty`),
which often give the optimum with a few sweeps; and where a gap is left, the dynamic program with the number of
vertices for an index (:mod:`nearchord_solve.sweep.limited`), if it fits the budget.
"""

from dataclasses import replace

import numpy as np

from nearchord_solve.monitor import Phase, Stop
from nearchord_solve.outcome import Verdict
from nearchord_solve.questions.addons.penalty import Corner, Penalised, corner, heaviest_of
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Found, Task, find_heaviest
from nearchord_solve.structure import Structure
from nearchord_solve.sweep.labelled import line_up
from nearchord_solve.sweep.limited import LimitedSweep, OverBudget
from nearchord_solve.wording import counted


class BoundOnly(Gauge):
    """Tells of bounds only: sets found without the limit do not count."""

    def incumbent(self, value: int) -> None:
        """Keep it."""


def find_limited(task: Task, limit: int) -> Found:
    """Settle ``task`` with at most ``limit`` vertices; never fails for want of budget or time."""
    if limit == 0:
        task.gauge.incumbent(0)
        task.gauge.bound(0)
        nothing = np.zeros(task.graph.n, np.uint8)
        return Found(Verdict.PROVEN, 0, 0, nothing, None, "the limit leaves no room for more vertices")
    gauge = BoundOnly(task.gauge.monitor, task.gauge.offset, task.gauge.sign)
    found = find_heaviest(replace(task, gauge=gauge))
    if found.chosen is None or found.value is None or found.bound is None:
        return found
    heaviest = corner(task, found.chosen)
    if heaviest.size <= limit:
        task.gauge.incumbent(found.value)
        return replace(found, reason=f"{found.reason}; the limit of {limit} leaves it as it is")
    return _within(task, limit, found, heaviest)


def _within(task: Task, limit: int, found: Found, heaviest: Corner) -> Found:
    """Where the set found is too large."""
    lightest_first = np.sort(task.weights)
    bound = min(int(found.bound or 0), int(lightest_first[-limit:].sum()))
    below = heaviest_of(task, heaviest.chosen, limit)
    reason = f"the limit of {limit} cuts into a set of {heaviest.size}"
    structure = found.structure
    if structure is None or task.stop or (found.verdict is Verdict.BOUNDED and task.when_over == "stop"):
        return _close(task, found, below, bound, f"{found.reason}; {reason}")
    fits = structure.fitting(task.budget)
    nothing = corner(task, np.zeros(task.graph.n, np.uint8))
    search = Penalised(task, structure, fits, limit, nothing, heaviest, bound)
    task.gauge.monitor.enter(Phase.IMPROVE)
    search.search()
    if search.below.weight > below.weight:
        below = search.below
    below = _filled_up(task, below, limit)
    reason += f"; {counted(search.sweeps, 'sweep')} with a penalty for each vertex"
    if below.weight == search.bound:
        return _close(task, found, below, search.bound, f"{reason} settled it")
    if not fits.all():
        return _close(task, found, below, search.bound, f"{found.reason}; {reason}: a gap is left")
    return _by_states(task, limit, found, structure, below, search.bound, reason)


def _by_states(
    task: Task, limit: int, found: Found, structure: Structure, below: Corner, bound: int, reason: str
) -> Found:
    """Close the gap by the dynamic program over bags and numbers of vertices."""
    room = (task.budget.memory - structure.held_bytes) // 24  # value and choice, twice while they are made
    most = min(task.budget.states, room)
    line = line_up(task.graph, structure, task.gauge.monitor)
    try:
        swept = None if line is None else LimitedSweep(line, task.weights, limit, most, task.gauge.monitor).run()
    except OverBudget:
        return _close(
            task, found, below, bound,
            f"{reason}: a gap is left that takes more than {counted(most, 'state')} by numbers of vertices to close",
        )  # fmt: skip
    if swept is None:
        return _close(task, found, below, bound, f"{reason}: a gap is left; seconds ran out while it was closed")
    value, chosen = swept
    return _close(
        task,
        found,
        corner(task, chosen),
        value,
        f"{reason}, then states by numbers of vertices settled it",
    )


def _close(task: Task, found: Found, best: Corner, bound: int, reason: str) -> Found:
    if task.stop is Stop.CANCEL:
        return Found(Verdict.CANCELLED, None, None, None, found.structure, "cancelled on request")
    task.gauge.incumbent(best.weight)
    task.gauge.bound(bound)
    verdict = Verdict.PROVEN if best.weight == bound else Verdict.BOUNDED
    return replace(
        found, verdict=verdict, value=best.weight, bound=bound, chosen=best.chosen, reason=reason, swept=None
    )  # fmt: skip


def _filled_up(task: Task, best: Corner, limit: int) -> Corner:
    """Add vertices without a neighbour in the set while there is room, the heaviest first.  O(n + m)."""
    if best.size == limit:
        return best
    graph = task.graph
    chosen = best.chosen.copy()
    blocked = np.zeros(graph.n, bool)
    owner = np.repeat(chosen != 0, np.diff(graph.ptr))
    blocked[graph.adj[owner]] = True
    free = np.flatnonzero(~blocked & (chosen == 0) & (task.weights > 0))
    room = limit - best.size
    for v in free[np.argsort(-task.weights[free], kind="stable")].tolist():
        if room and not blocked[v]:
            chosen[v] = 1
            blocked[graph.adj[graph.ptr[v] : graph.ptr[v + 1]]] = True
            room -= 1
    return corner(task, chosen)
