"""Add-on ``scenarios``: the heaviest set for each of many vectors of weights, found together.

The first vector is answered as any other question.  If the tables settle it, they settle all: one sweep goes through
the bags and their states for many vectors at a time.  Otherwise each vector is answered by itself, as far as seconds
and budgets reach; a bound and a feasible choice there are always.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.kept import Kept, Reuse
from nearchord_solve.monitor import Stop
from nearchord_solve.outcome import Outcome, Verdict
from nearchord_solve.questions.addons.added import cancelled
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Found, Task, find_heaviest
from nearchord_solve.questions.pins import Rest, lift
from nearchord_solve.sweep.independent import as_vertices
from nearchord_solve.sweep.scenarios import sweep_wide, wide_bytes


@dataclass(frozen=True, eq=False)
class Case:
    """The answer for one vector; ``chosen`` uint32, ascending."""

    value: int
    bound: int
    chosen: U32


def answer_scenarios(task: Task, rest: Rest, found: Found, outcome: Outcome, weights: I64) -> Outcome:
    """``outcome`` with columns about all vectors, ``weights`` int64[R, n] of the whole graph.

    ``found`` and ``outcome`` answer ``task``, which is about the first vector and what pins left of the graph.
    """
    if found.value is None or found.bound is None or found.chosen is None:
        return outcome
    left = weights
    whole = rest.graph.n == weights.shape[1]
    if not whole:
        left = np.ascontiguousarray(weights[:, rest.vertices])
        left.flags.writeable = False
    cases = [Case(found.value, found.bound, as_vertices(found.chosen)), *_others(task, found, left[1:])]
    if task.stop is Stop.CANCEL:
        return cancelled(outcome)
    settled = sum(case.value == case.bound for case in cases)
    taken = weights[:, rest.taken].sum(axis=1)
    chosen = [case.chosen if whole else lift(rest, case.chosen) for case in cases]
    return replace(
        outcome,
        verdict=Verdict.PROVEN if settled == len(cases) else Verdict.BOUNDED,
        proof="search",
        proof_kinds=("search",) * len(outcome.proof_kinds),
        reason=f"{outcome.reason}; proven for {settled} of {len(cases)} scenarios",
        columns={
            "scenario_value": np.array([case.value for case in cases], np.int64) + taken,
            "scenario_bound": np.array([case.bound for case in cases], np.int64) + taken,
            "scenario_start": np.cumsum([0, *(one.size for one in chosen)], dtype=np.int64),
            "scenario_chosen": np.concatenate(chosen),
        },
    )


def _others(task: Task, found: Found, weights: I64) -> Iterator[Case]:
    """The answers for all vectors but the first, int64[R - 1, n] by vertex of the rest."""
    structure = found.structure
    done = 0
    if found.swept is not None and len(weights):
        swept = found.swept.structure
        if swept.held_bytes + wide_bytes(swept, len(weights)) <= task.budget.memory:
            for swath in sweep_wide(swept, weights, task.gauge.monitor):
                for r, optimum in enumerate(swath.optima.tolist()):
                    yield Case(optimum, optimum, swath.chosen[swath.ptr[r] : swath.ptr[r + 1]])
                done += swath.optima.size
    known = None if structure is None else Kept(task.graph.n, task.graph.m, task.budget, structure)
    for vector in weights[done:]:
        with task.gauge.monitor.aside() as quiet:
            again = find_heaviest(replace(task, weights=vector, gauge=Gauge(quiet, 0, 1), reuse=Reuse(known)))
        if again.value is None or again.bound is None or again.chosen is None:
            return  # only on a cancel
        yield Case(again.value, again.bound, as_vertices(again.chosen))
