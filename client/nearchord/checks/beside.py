"""What an answer has beside its choice, where the question asks for it: prices, best sets, the number of optima."""

from __future__ import annotations

from nearchord.answer import Answer
from nearchord.checks.confirmed import Confirmed, Findings
from nearchord.checks.prices import check_conflict_prices, check_prices
from nearchord.checks.ranked import check_best, check_optima
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import Choice, IndependentSet
from nearchord.stages import Verdict

AGAIN = "the answer carries no proof of it; computing it again confirms it"


def check_beside(graph: Graph, answer: Answer, question: Choice) -> Confirmed:
    """Confirms what follows from the definition, and says what only a new computation confirms."""
    found = Findings()
    if getattr(question, "prices", False) and _are_there(answer, ("price_in", "price_out"), "the prices", found):
        found.confirm(check_prices(graph, answer, question))
        found.leave_open(f"that the prices are exact: {AGAIN}")
    if isinstance(question, IndependentSet):
        _check_sets(graph, answer, question, found)
    return found.settle()


def _check_sets(graph: Graph, answer: Answer, question: IndependentSet, found: Findings) -> None:
    if question.conflict_prices and _are_there(answer, ("conflict_price",), "the prices of conflicts", found):
        found.confirm(check_conflict_prices(graph, answer, question))
        found.leave_open(f"that the prices of conflicts are exact: {AGAIN}")
    if question.best > 1 and _are_there(answer, ("best_value",), "the best sets", found):
        found.confirm(check_best(graph, answer, question))
        found.leave_open(f"that no other set is better than the last of these: {AGAIN}")
    if question.count and answer.count is not None:
        found.leave_open(f"the number of best sets: {AGAIN}")
    elif question.count:
        found.leave_open("the number of best sets: the answer does not have it")
    check_optima(answer, question)


def _are_there(answer: Answer, columns: tuple[str, ...], what: str, found: Findings) -> bool:
    """Whether the answer has any of them; only a proven one can."""
    there = any(column in answer.columns for column in columns)
    if there and answer.verdict is not Verdict.PROVEN:
        raise CheckFailed(f"the answer has {what}, but the verdict is {answer.verdict}")
    if not there:
        found.leave_open(f"{what}: the answer does not have them")
    return there
