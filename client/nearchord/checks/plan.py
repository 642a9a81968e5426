"""Answers that serve everybody: plan, value and bound."""

from __future__ import annotations

from nearchord.answer import Answer
from nearchord.checks.confirmed import Confirmed, Findings, check_sides, check_unanswered
from nearchord.checks.edges import Ints
from nearchord.checks.plan_bounds import check_plan_bound
from nearchord.checks.plans import check_colours_of_all, check_shares
from nearchord.checks.states import TooManyStates
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import Colouring
from nearchord.stages import ProofKind, Verdict


def check_plan(graph: Graph, answer: Answer, demand: Ints) -> Confirmed:
    """Confirms the plan from its definition, and the bound where it is plain or proved; `demand` int64[n].

    Time as :func:`check_colours_of_all`, :func:`check_shares` and the proof take.
    """
    found = Findings()
    whole = isinstance(answer.question, Colouring)
    if answer.value is None:
        if answer.verdict is not Verdict.BOUNDED or answer.bound is None:
            return check_unanswered(answer)
        found.leave_open("any plan: the answer carries none")
    else:
        check_sides(answer)
        if answer.chosen.size:
            raise CheckFailed(f"{answer.chosen.size} vertices are chosen, but the question chooses none")
        found.confirm((check_colours_of_all if whole else check_shares)(graph, answer, demand))
    try:
        words = check_plan_bound(graph, answer, demand, whole)
    except TooManyStates:
        found.leave_open(f"the bound {answer.bound}: checking its proof would take too long")
        return found.settle()
    if words is not None:
        found.confirm(words)
    elif ProofKind.SEARCH in (answer.proof, *answer.proof_kinds):
        found.leave_open(f"the bound {answer.bound}: it rests on a search, which leaves no proof")
    else:
        found.leave_open(f"the bound {answer.bound}: the answer carries no proof of it")
    return found.settle()
