"""The checker: confirms an answer from graph and definition of the question. It shares no code with the solver."""

from __future__ import annotations

from nearchord.answer import Answer
from nearchord.checks.asked import check_asked, vectors_of
from nearchord.checks.beside import check_beside
from nearchord.checks.choice import check_choice
from nearchord.checks.confirmed import Confirmed
from nearchord.checks.fill import check_fill
from nearchord.checks.plan import check_plan
from nearchord.checks.scenarios import check_scenarios
from nearchord.checks.structure import check_structure
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import Choice, Fill, Plan, Question, Structure


def check(graph: Graph, answer: Answer, *, question: Question | None = None) -> Confirmed:
    """Confirms what can be confirmed of `answer` from the graph alone; raises CheckFailed naming the place.

    `question` is the question as it was asked: the answer has to be to it. It can be left out, except where it had
    scenarios or demands, which an answer does not carry.

    A choice or a plan is confirmed with its value, a fill with everything that its columns bear witness to, and a bound
    where it is plain or rests on witnesses. Prices, best sets and the number of optima are held against the definition;
    that they are the best can only be computed again. The answer has to belong to this very graph and, where the
    question takes weights or demands, to these. Time and memory O(n + m) for a choice, for each of the best sets and
    for each scenario, and what a proof takes; for a fill of k edges O((n + m + k) log m) and what its packing takes.
    """
    _check_graph(graph, answer)
    if question is not None:
        check_asked(graph, answer, question)
    match answer.question:
        case Choice(scenario_count=0):
            vectors_of(graph, answer, answer.question)
            confirmed, beside = check_choice(graph, answer, answer.question), Confirmed((), ())
            if answer.value is not None:
                beside = check_beside(graph, answer, answer.question)
            return confirmed.and_also(beside)
        case Choice():
            vectors = vectors_of(graph, answer, question or answer.question)
            return check_scenarios(graph, answer, answer.question, vectors)
        case Plan():
            return check_plan(graph, answer, vectors_of(graph, answer, question or answer.question))
        case Fill():
            return check_fill(graph, answer)
        case Structure():
            return check_structure(graph, answer)
    raise CheckFailed(f"this client cannot check the question {answer.question.name!r}; update it")


def _check_graph(graph: Graph, answer: Answer) -> None:
    source = answer.provenance
    if source.graph_address != graph.address:
        raise CheckFailed(f"the answer is about the graph {source.graph_address}, not about this one ({graph.address})")
