"""How a question that chooses vertices gets from a graph to its answer: one flow for all dynamic programs.

A program knows what a choice is; the flow knows budgets, stops and verdicts.
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

from nearchord_solve.arrays import I64, U8, U32
from nearchord_solve.memory import predicted_bytes
from nearchord_solve.monitor import Stop
from nearchord_solve.order import Ranking, Unfinished
from nearchord_solve.outcome import Verdict
from nearchord_solve.proof import Proof
from nearchord_solve.questions.heaviest import Found, Task
from nearchord_solve.refine import over_fill, search_less_fill
from nearchord_solve.structure import Structure
from nearchord_solve.tree import Partial, build_structure
from nearchord_solve.wording import fill_found, fill_needed


@dataclass(frozen=True, eq=False)
class Settled:
    """What a program found on a graph of known structure.

    ``chosen`` uint8[n] is feasible unless ``feasible`` says that no such choice was found.  If ``exact``, ``bound`` is
    the optimum, or there is no feasible choice at all; otherwise it is valid.  ``states``: states that it went through
    or would have to; ``reason``: how it was settled, or what was too small.  ``colour`` uint32[n]: classes of the
    chosen vertices, for questions that have some.  ``prices`` int64[n] twice: what the value loses if a vertex is
    chosen, and if it is not, -1 where that is impossible.  ``again`` settles other weights on the same structure, None
    if stopped.  ``proof``: of ``bound``, where there is one.
    """

    chosen: U8
    bound: int
    exact: bool
    states: int
    reason: str
    colour: U32 | None = None
    prices: tuple[I64, I64] | None = None
    again: Callable[[I64], "Settled | None"] | None = None
    feasible: bool = True
    proof: Proof | None = None


@dataclass(frozen=True, eq=False)
class Concluded:
    """A finding, and what it was found from."""

    found: Found
    states: int | None = None
    settled: Settled | None = None


class Program(Protocol):
    """One question about one graph."""

    def quick(self, task: Task, ranking: Ranking | None) -> Settled:
        """A feasible choice and a valid bound in about linear time, without looking at the clock."""

    def settle(self, task: Task, structure: Structure) -> Settled:
        """The optimum within the budget, or a choice and a bound where it or the time does not suffice."""


def run_program(task: Task, program: Program) -> Concluded:
    """Settle ``task``; never fails for want of budget or time."""
    task.gauge.bound(int(task.weights.sum()))
    need = predicted_bytes(task.graph.n, task.graph.m)
    if need > task.budget.memory:
        return _close(task, program.quick(task, None), None, f"memory budget: {need} bytes are needed")
    structure = build_structure(task.graph, task.budget, task.gauge.monitor, task.reuse)
    if isinstance(structure, Partial):
        ranking = None if structure.why is Unfinished.STOPPED else structure.ranking
        return _close(task, program.quick(task, ranking), None, structure.reason)
    if task.when_over == "stop" and over_fill(structure, task.budget):
        structure = search_less_fill(task.graph, structure, task.budget, task.gauge.monitor)
        if over_fill(structure, task.budget):
            return _over_fill(task, program, structure)
    settled = program.settle(task, structure)
    reason = settled.reason
    most = task.budget.fill
    if settled.exact and most is not None and structure.fill > most:
        reason += f" (more fill than the {most:,} budgeted, as the states allowed it)"
    return _close(task, settled, structure, reason)


def _over_fill(task: Task, program: Program, structure: Structure) -> Concluded:
    most, lower = task.budget.fill, structure.fill_lower_bound
    assert most is not None
    if lower > most and task.stop is not Stop.CANCEL:
        reason = fill_needed(lower, most)
        return Concluded(Found(Verdict.OVER_FILL, None, None, None, structure, reason))
    reason = fill_found(structure.fill, most, lower)
    if task.stop is Stop.SECONDS:
        reason += "; seconds ran out in the search for fewer"
    return _close(task, program.quick(task, structure.ranking), structure, reason)


def _cancelled(structure: Structure | None) -> Concluded:
    return Concluded(Found(Verdict.CANCELLED, None, None, None, structure, "cancelled on request"))


def _close(task: Task, settled: Settled, structure: Structure | None, reason: str) -> Concluded:
    """End with a feasible choice and a bound: PROVEN if they meet."""
    if task.stop is Stop.CANCEL:
        return _cancelled(structure)
    if not settled.feasible:
        return _without_choice(task, settled, structure, reason)
    value = task.weight(settled.chosen)
    task.gauge.incumbent(value)
    task.gauge.bound(settled.bound)
    states = settled.states if structure is not None else None
    verdict = Verdict.PROVEN if value == settled.bound else Verdict.BOUNDED
    if value == settled.bound and not settled.exact:
        reason += "; the choice found meets the bound all the same"
    found = Found(verdict, value, settled.bound, settled.chosen, structure, reason, settled.proof)
    return Concluded(found, states, settled)


def _without_choice(task: Task, settled: Settled, structure: Structure | None, reason: str) -> Concluded:
    """End without a feasible choice: there is none, or none was found."""
    states = settled.states if structure is not None else None
    if settled.exact:
        return Concluded(Found(Verdict.INFEASIBLE, None, None, None, structure, reason), states)
    task.gauge.bound(settled.bound)
    reason += "; no choice with all pins was found"
    return Concluded(Found(Verdict.BOUNDED, None, settled.bound, None, structure, reason), states)


def total_of(weights: I64, chosen: U8) -> int:
    """Weight of a choice."""
    return int(weights[chosen != 0].sum())
